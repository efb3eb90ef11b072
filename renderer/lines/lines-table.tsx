import { useMemo } from "react";
import type { Quantity } from "../../app/base/index.ts";
import type { LineResult, RunglineResult } from "../../app/protocol/index.ts";
import { SortedTable, sortedColumns } from "../controls/sorted-table.tsx";
import { valueText } from "../ledger/value-text.ts";
import { notesOfLine } from "../rungs/rung-layout.ts";
import { colourOfN } from "../plot/colours.ts";
import { useMode } from "../frame/theme.ts";
import { useController, useWindow } from "../store/context.ts";

const helper = sortedColumns<LineResult>();

/** eV, or eV/cm: above it areas are printed in milli-units. */
const LARGE_AREA = 0.02;

const shown = (quantity: Quantity, scale: number): string => valueText({ quantity, scale, unit: "" }).value;

/** The lines as a table: sortable, its rows light with the rungs. */
export function LinesTable({ result }: { readonly result: RunglineResult }) {
  const controller = useController();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const mode = useMode();
  const perCm = result.reading.signal_unit === "1/cm";
  // One unit for the column, so that the areas can be compared at a glance.
  const large = result.lines.some((line) => (line.area.value ?? 0) > LARGE_AREA);
  const columns = useMemo(
    () =>
      helper.columns([
        helper.accessor("n", {
          id: "n",
          header: "n",
          cell: ({ row }) => {
            const { n, significance } = row.original;
            const doubtful =
              significance < 5 ||
              notesOfLine(result.notes, row.index, n).some((note) => note.level === "doubt");
            return (
              <span className="line-name">
                <svg width="10" height="10" aria-hidden="true">
                  <rect
                    x="1"
                    y="1"
                    width="8"
                    height="8"
                    rx="1"
                    fill={doubtful ? "none" : colourOfN(n, mode)}
                    stroke={colourOfN(n, mode)}
                    strokeWidth="1.4"
                  />
                </svg>
                <span className="hidden">n = </span>
                {n}
                {doubtful && <span className="hidden">, in doubt</span>}
              </span>
            );
          },
        }),
        helper.accessor((line) => line.energy_eV.value ?? undefined, {
          id: "energy",
          header: "E / eV",
          cell: ({ row }) => shown(row.original.energy_eV, 1),
        }),
        helper.accessor((line) => line.width_eV.value ?? undefined, {
          id: "width",
          header: "Γ / µeV",
          cell: ({ row }) => shown(row.original.width_eV, 1e6),
        }),
        helper.accessor((line) => line.area.value ?? undefined, {
          id: "area",
          header: `A / ${perCm ? `(${large ? "meV" : "µeV"}/cm)` : large ? "meV" : "µeV"}`,
          cell: ({ row }) => shown(row.original.area, large ? 1e3 : 1e6),
        }),
        helper.accessor("significance", {
          id: "significance",
          header: "A/σ",
          cell: (cell) => cell.getValue().toFixed(0),
        }),
      ]),
    [perCm, large, mode, result.notes],
  );
  return (
    <SortedTable
      caption="Fitted lines; arrow keys choose one"
      columns={columns}
      data={result.lines}
      keyOf={(line) => line.n}
      prefix="line-row"
      lit={pointed}
      chosen={selected}
      onPoint={(n) => controller.point(n)}
      onChoose={(n) => controller.select(n)}
      marks={(line) => ({ "data-n": line.n })}
    />
  );
}
