import { useMemo } from "react";
import {
  createColumnHelper,
  createSortedRowModel,
  rowSortingFeature,
  tableFeatures,
  useTable,
} from "@tanstack/react-table";
import { dayNumber } from "../../app/batch/index.ts";
import type { ComparedSample, Comparison } from "../../app/protocol/index.ts";
import { formatNumber } from "../../app/report/index.ts";
import { useMode } from "../frame/theme.ts";
import { Symbol } from "../ledger/ledger.tsx";
import { useController } from "../store/context.ts";
import { batchLook } from "./batch-look.ts";
import { BatchMarkSign } from "./batch-mark.tsx";
import { measuredText } from "./batches-ledger.ts";
import { MAIN_PARAMETERS, PARAMETER_SYMBOLS, title, valueUnit } from "./parameter-words.ts";

/** A sample with its place in the comparison. */
interface Row {
  readonly sample: ComparedSample;
  readonly i: number;
}

const features = tableFeatures({ rowSortingFeature, sortedRowModel: createSortedRowModel() });
const helper = createColumnHelper<typeof features, Row>();

interface Props {
  readonly comparison: Comparison;
  readonly batches: readonly string[];
  readonly lit: number | null;
  readonly chosen: number | null;
  readonly onPoint: (i: number | null) => void;
  readonly onChoose: (i: number | null) => void;
  readonly onOpen: (i: number) => void;
}

/** All samples as a table: sortable, its rows light with the marks; statistical part in brackets, systematic behind it. */
export function BatchesTable({ comparison, batches, lit, chosen, onPoint, onChoose, onOpen }: Props) {
  const mode = useMode();
  const data = useMemo(() => comparison.samples.map((sample, i): Row => ({ sample, i })), [comparison]);
  const columns = useMemo(() => {
    const parts = MAIN_PARAMETERS.flatMap((name) =>
      comparison.parameters.filter((part) => part.name === name),
    );
    return helper.columns([
      helper.accessor((row) => row.sample.sample, { id: "sample", header: "Sample" }),
      helper.accessor((row) => row.sample.batch, { id: "batch", header: "Batch" }),
      helper.accessor((row) => dayOf(row.sample), {
        id: "date",
        header: "Date",
        cell: ({ row }) => row.original.sample.date ?? "",
      }),
      helper.accessor((row) => row.sample.temperature_K ?? undefined, {
        id: "temperature",
        header: "T / K",
        cell: ({ row }) => {
          const kelvin = row.original.sample.temperature_K;
          return kelvin === null ? "" : formatNumber(kelvin);
        },
      }),
      ...parts.map((part) => {
        const { unit, scale } = valueUnit(part, comparison);
        return helper.accessor((row) => row.sample.parameters[part.name]?.value ?? undefined, {
          id: part.name,
          header: () => (
            <span title={`${title(part.name)}: value(statistical)(systematic)`}>
              <span className="hidden">{title(part.name)}</span>
              <span aria-hidden="true">
                <Symbol symbol={PARAMETER_SYMBOLS[part.name]} />
              </span>
              {unit === "" ? "" : ` / ${unit}`}
            </span>
          ),
          cell: ({ row }) => {
            const one = row.original.sample.parameters[part.name];
            return (
              <>
                {part.name === "highest_n" ? (one?.value ?? "none seen") : measuredText(one, scale)}
                {one?.left_out !== null && one?.left_out !== undefined && (
                  <span title={`left out: ${one.left_out}`}> ◇</span>
                )}
              </>
            );
          },
        });
      }),
      helper.accessor((row) => row.sample.doubts.length, { id: "doubts", header: "Doubts" }),
    ]);
  }, [comparison]);
  const table = useTable({ features, columns, data, getRowId: (row) => String(row.i) });
  return (
    <div className="batches-scroll" tabIndex={0} role="group" aria-label="Samples">
      <table
        className="lines-table batches-table"
        role="grid"
        tabIndex={0}
        aria-activedescendant={chosen === null ? undefined : `sample-row-${chosen}`}
        onKeyDown={(event) => {
          if (event.target !== event.currentTarget) return;
          if (event.key === "Enter" && chosen !== null) {
            event.preventDefault();
            onOpen(chosen);
            return;
          }
          const order = table.getRowModel().rows.map((row) => row.original.i);
          const at = chosen === null ? -1 : order.indexOf(chosen);
          const last = order.length - 1;
          const next = {
            ArrowDown: Math.min(last, at + 1),
            ArrowUp: at < 0 ? last : Math.max(0, at - 1),
            Home: 0,
            End: last,
            Escape: -1,
          }[event.key];
          if (next === undefined) return;
          event.preventDefault();
          onChoose(order[next] ?? null);
        }}
      >
        <caption className="hidden">
          Samples side by side, value(statistical)(systematic part); arrow keys choose one, Enter opens it
        </caption>
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
            const { i, sample } = row.original;
            return (
              <tr
                key={row.id}
                id={`sample-row-${i}`}
                data-sample={sample.sample}
                aria-selected={chosen === i}
                data-lit={lit === i || undefined}
                data-chosen={chosen === i || undefined}
                onPointerEnter={() => onPoint(i)}
                onPointerLeave={() => onPoint(null)}
                onClick={() => onChoose(chosen === i ? null : i)}
                onDoubleClick={() => onOpen(i)}
              >
                {row.getAllCells().map((cell) =>
                  cell.column.id === "sample" ? (
                    <th key={cell.id} scope="row">
                      <span className="line-name">
                        <BatchMarkSign look={batchLook(batches.indexOf(sample.batch), mode)} />
                        <button
                          type="button"
                          className="sample-open"
                          title={`Open ${sample.sample}`}
                          onClick={(event) => {
                            event.stopPropagation();
                            onOpen(i);
                          }}
                        >
                          {sample.sample}
                        </button>
                        {sample.results.length > 1 && (
                          <span className="small">{sample.results.length} measurements</span>
                        )}
                      </span>
                    </th>
                  ) : cell.column.id === "doubts" ? (
                    <td key={cell.id} title={sample.doubts.join(", ")}>
                      {sample.doubts.length === 0 ? (
                        "none"
                      ) : (
                        <span className="mark-doubt">▲ {sample.doubts.length}</span>
                      )}
                    </td>
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
    </div>
  );
}

function dayOf({ date }: ComparedSample): number | undefined {
  return (date === null ? null : dayNumber(date)) ?? undefined;
}

/** Open the first measurement of a sample. */
export function useOpenSample(comparison: Comparison | null): (i: number) => void {
  const controller = useController();
  return (i) => {
    const found = comparison?.samples[i]?.results[0];
    if (found !== undefined) controller.openMeasured(found.file, found.sha256);
  };
}
