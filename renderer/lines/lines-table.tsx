import { useMemo } from "react";
import type { Quantity } from "../../app/base/index.ts";
import { resolveProtocol, type LineResult, type RunglineResult } from "../../app/protocol/index.ts";
import { SortedTable, sortedColumns } from "../controls/sorted-table.tsx";
import { valueText } from "../ledger/value-text.ts";
import { isDoubtful } from "../rungs/rung-layout.ts";
import { colourOfN } from "../plot/colours.ts";
import { useMode } from "../frame/theme.ts";
import { currentChoices, useController, useWindow } from "../store/context.ts";
import { markOf, RESULT_KEYS, type LineParameter } from "./line-rules.ts";
import { lineUnits } from "./line-units.ts";
import { RuleMarkSign } from "./rule-mark.tsx";

const helper = sortedColumns<LineResult>();

const shown = (quantity: Quantity, scale: number): string => valueText({ quantity, scale, unit: "" }).value;

/** The lines as a table: sortable, its rows light with the rungs. */
export function LinesTable({ result }: { readonly result: RunglineResult }) {
  const controller = useController();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const mode = useMode();
  const choices = useWindow(currentChoices);
  const columns = useMemo(() => {
    const units = lineUnits(result);
    const resolved = resolveProtocol(choices);
    const chosen = resolved.ok ? resolved.value : result.protocol;
    const mark = (line: LineResult, parameter: LineParameter, named = false) => {
      const found = markOf(result, chosen, line.n, parameter, units);
      return found !== null && <RuleMarkSign mark={found} {...(named && { of: parameter })} />;
    };
    const cell = (line: LineResult, parameter: LineParameter) => (
      <span className="ruled">
        {mark(line, parameter)}
        {shown(line[RESULT_KEYS[parameter]], units[parameter].scale)}
      </span>
    );
    return helper.columns([
      helper.accessor("n", {
        id: "n",
        header: "n",
        cell: ({ row }) => {
          const { n } = row.original;
          const doubtful = isDoubtful(result, row.index);
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
        cell: ({ row }) => cell(row.original, "energy"),
      }),
      helper.accessor((line) => line.width_eV.value ?? undefined, {
        id: "width",
        header: "Γ / µeV",
        cell: ({ row }) => cell(row.original, "width"),
      }),
      helper.accessor((line) => line.area.value ?? undefined, {
        id: "area",
        header: `A / ${units.area.unit.includes("/") ? `(${units.area.unit})` : units.area.unit}`,
        cell: ({ row }) => cell(row.original, "area"),
      }),
      helper.accessor("significance", {
        id: "significance",
        header: "A/σ",
        // A held area has no error that it could be compared with. The asymmetry has no column: its mark stands behind.
        cell: ({ row }) => (
          <span className="ruled ruled-behind">
            {row.original.area.sigma === 0 ? "held" : row.original.significance.toFixed(0)}
            {mark(row.original, "asymmetry", true)}
          </span>
        ),
      }),
    ]);
  }, [result, choices, mode]);
  return (
    <SortedTable
      className="ruled-table"
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
