import { useMemo } from "react";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { SortedTable, sortedColumns } from "../controls/sorted-table.tsx";
import { Subscripts } from "./subscripts.tsx";
import { useController, useWindow } from "../store/context.ts";

type Influence = NonNullable<RunglineResult["diagnostics"]>["influence"][number];

const helper = sortedColumns<Influence>();

const fixed = (value: number | null): string =>
  value === null ? "not det." : value.toFixed(2).replace("-", "−");
const cellOf = (key: Exclude<keyof Influence, "n">, header: string) =>
  helper.accessor((row) => row[key] ?? undefined, {
    id: key,
    header: () => <Subscripts text={header} />,
    cell: ({ row }) => fixed(row.original[key]),
  });

/** What each line does to the series, its rows lit and chosen with the rungs. */
export function InfluenceTable({ result }: { readonly result: RunglineResult }) {
  const controller = useController();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const influence = result.diagnostics?.influence;
  const rows = useMemo(() => influence ?? [], [influence]);
  const columns = useMemo(
    () =>
      helper.columns([
        helper.accessor("n", { id: "n", header: "n", cell: ({ row }) => row.original.n }),
        cellOf("leverage", "lever"),
        cellOf("residual", "resid."),
        cellOf("gap_eV", "E_g"),
        cellOf("rydberg_eV", "Ry"),
        cellOf("defect0", "δ₀"),
      ]),
    [],
  );
  return (
    <SortedTable
      className="influence-table"
      caption="Leverage, residual and influence of each line on gap, Rydberg energy and quantum defect; arrow keys choose one"
      columns={columns}
      data={rows}
      keyOf={(row) => row.n}
      prefix="influence-row"
      lit={pointed}
      chosen={selected}
      onPoint={(n) => controller.point(n)}
      onChoose={(n) => controller.select(n)}
      marks={(row) => ({ "data-n": row.n })}
    />
  );
}
