import type { AriaAttributes } from "react";
import {
  createColumnHelper,
  createSortedRowModel,
  rowSortingFeature,
  tableFeatures,
  useTable,
  type ColumnDef,
  type RowData,
} from "@tanstack/react-table";
import { rowByKey } from "./row-by-key.ts";

const features = tableFeatures({ rowSortingFeature, sortedRowModel: createSortedRowModel() });

export type SortedColumns<Row extends RowData> = ColumnDef<typeof features, Row>[];

/** Makes the columns of a `SortedTable`. */
export function sortedColumns<Row extends RowData>() {
  return createColumnHelper<typeof features, Row>();
}

interface Props<Row extends RowData> {
  readonly className?: string;
  /** Read out, not shown. */
  readonly caption: string;
  readonly columns: SortedColumns<Row>;
  readonly data: readonly Row[];
  /** What a row is chosen and lit by. */
  readonly keyOf: (row: Row) => number;
  /** Of the ids of the rows, which a page has once. */
  readonly prefix: string;
  readonly lit: number | null;
  readonly chosen: number | null;
  readonly onPoint: (key: number | null) => void;
  readonly onChoose: (key: number | null) => void;
  /** Enter on the chosen row, or two clicks on one. */
  readonly onOpen?: (key: number) => void;
  /** `data-` attributes of a row. */
  readonly marks?: (row: Row) => Readonly<Record<`data-${string}`, string | number>>;
}

/** Rows that are sorted by their heads, lit by the pointer and chosen by pointer or arrow keys; the first cell names its row. */
export function SortedTable<Row extends RowData>(props: Props<Row>) {
  const { columns, data, keyOf, prefix, lit, chosen, onPoint, onChoose, onOpen } = props;
  const table = useTable({ features, columns, data, getRowId: (row) => String(keyOf(row)) });
  const { rows } = table.getRowModel();
  return (
    <table
      className={`lines-table ${props.className ?? ""}`.trim()}
      role="grid"
      tabIndex={0}
      aria-activedescendant={chosen === null ? undefined : `${prefix}-${chosen}`}
      onKeyDown={(event) => {
        if (event.target !== event.currentTarget) return;
        if (event.key === "Enter" && chosen !== null && onOpen !== undefined) {
          event.preventDefault();
          onOpen(chosen);
          return;
        }
        const order = rows.map((row) => keyOf(row.original));
        const at = chosen === null ? -1 : order.indexOf(chosen);
        const next = rowByKey(event.key, at, order.length);
        if (next === undefined) return;
        event.preventDefault();
        onChoose(order[next] ?? null);
      }}
    >
      <caption className="hidden">{props.caption}</caption>
      <thead>
        {table.getHeaderGroups().map((group) => (
          <tr key={group.id}>
            {group.headers.map((header) => {
              const sorted = header.column.getIsSorted();
              return (
                <th key={header.id} scope="col" aria-sort={SORTED[sorted || "none"]}>
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
        {rows.map((row) => {
          const key = keyOf(row.original);
          return (
            <tr
              key={row.id}
              id={`${prefix}-${key}`}
              aria-selected={chosen === key}
              {...props.marks?.(row.original)}
              data-lit={lit === key || undefined}
              data-chosen={chosen === key || undefined}
              onPointerEnter={() => onPoint(key)}
              onPointerLeave={() => onPoint(null)}
              onClick={() => onChoose(chosen === key ? null : key)}
              onDoubleClick={() => onOpen?.(key)}
            >
              {row.getAllCells().map((cell, i) =>
                i === 0 ? (
                  <th key={cell.id} scope="row">
                    <table.FlexRender cell={cell} />
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

const SORTED = {
  asc: "ascending",
  desc: "descending",
  none: "none",
} as const satisfies Record<string, AriaAttributes["aria-sort"]>;
