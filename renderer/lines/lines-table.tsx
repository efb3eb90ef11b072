import { useMemo } from "react";
import {
  createColumnHelper,
  createSortedRowModel,
  rowSortingFeature,
  tableFeatures,
  useTable,
} from "@tanstack/react-table";
import type { Quantity } from "../../app/base/index.ts";
import type { LineResult, RunglineResult } from "../../app/protocol/index.ts";
import { valueText } from "../ledger/value-text.ts";
import { notesOfLine } from "../rungs/rung-layout.ts";
import { colourOfN } from "../plot/colours.ts";
import { useMode } from "../frame/theme.ts";
import { useController, useWindow } from "../store/context.ts";

const features = tableFeatures({ rowSortingFeature, sortedRowModel: createSortedRowModel() });
const helper = createColumnHelper<typeof features, LineResult>();

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
        helper.accessor("n", { id: "n", header: "n", cell: (cell) => cell.getValue() }),
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
    [perCm, large],
  );
  const table = useTable({ features, columns, data: result.lines, getRowId: (line) => String(line.n) });
  return (
    <table
      className="lines-table"
      role="grid"
      tabIndex={0}
      aria-activedescendant={selected === null ? undefined : `line-row-${selected}`}
      onKeyDown={(event) => {
        if (event.target !== event.currentTarget) return;
        const numbers = table.getRowModel().rows.map((row) => row.original.n);
        const at = selected === null ? -1 : numbers.indexOf(selected);
        const last = numbers.length - 1;
        const next = {
          ArrowDown: Math.min(last, at + 1),
          ArrowUp: at < 0 ? last : Math.max(0, at - 1),
          Home: 0,
          End: last,
          Escape: -1,
        }[event.key];
        if (next === undefined) return;
        event.preventDefault();
        controller.select(numbers[next] ?? null);
      }}
    >
      <caption className="hidden">Fitted lines; arrow keys choose one</caption>
      <thead>
        {table.getHeaderGroups().map((group) => (
          <tr key={group.id}>
            {group.headers.map((header) => {
              const sorted = header.column.getIsSorted();
              return (
                <th
                  key={header.id}
                  scope="col"
                  aria-sort={sorted === "asc" ? "ascending" : sorted === "desc" ? "descending" : "none"}
                >
                  <button type="button" onClick={header.column.getToggleSortingHandler()}>
                    <table.FlexRender header={header} />
                    <span aria-hidden="true" className="sort-mark">
                      {sorted === "asc" ? "↑" : sorted === "desc" ? "↓" : ""}
                    </span>
                  </button>
                </th>
              );
            })}
          </tr>
        ))}
      </thead>
      <tbody>
        {table.getRowModel().rows.map((row) => {
          const { n, significance } = row.original;
          const doubtful =
            significance < 5 ||
            notesOfLine(result.notes, row.index, n).some((note) => note.level === "doubt");
          return (
            <tr
              key={row.id}
              id={`line-row-${n}`}
              aria-selected={selected === n}
              data-n={n}
              data-lit={pointed === n || undefined}
              data-chosen={selected === n || undefined}
              onPointerEnter={() => controller.point(n)}
              onPointerLeave={() => controller.point(null)}
              onClick={() => controller.select(selected === n ? null : n)}
            >
              {row.getAllCells().map((cell) =>
                cell.column.id === "n" ? (
                  <th key={cell.id} scope="row" aria-label={`n = ${n}${doubtful ? ", in doubt" : ""}`}>
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
                      {n}
                    </span>
                  </th>
                ) : (
                  <td key={cell.id}>
                    <table.FlexRender cell={cell} />
                  </td>
                ),
              )}
            </tr>
          );
        })}
      </tbody>
    </table>
  );
}
