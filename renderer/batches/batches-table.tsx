import { useCallback, useMemo } from "react";
import { dayNumber } from "../../app/batch/index.ts";
import type { ComparedParameter, ComparedSample, Comparison } from "../../app/protocol/index.ts";
import { formatNumber, formatQuantity } from "../../app/report/index.ts";
import { SortedTable, sortedColumns } from "../controls/sorted-table.tsx";
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

const helper = sortedColumns<Row>();

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
      helper.accessor((row) => row.sample.sample, {
        id: "sample",
        header: "Sample",
        cell: ({ row: { original } }) => (
          <SampleName
            row={original}
            look={batchLook(batches.indexOf(original.sample.batch), mode)}
            onOpen={onOpen}
          />
        ),
      }),
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
      ...(comparison.quality === null
        ? []
        : [
            helper.accessor((row) => comparison.quality!.samples[row.i]?.figure.value ?? undefined, {
              id: "quality",
              header: () => <span title="Figure of quality: value(statistical)">Quality</span>,
              cell: ({ row }) => {
                const one = comparison.quality!.samples[row.original.i];
                return (
                  <span title={one === undefined ? "" : contributionsText(one.contributions)}>
                    {one === undefined || one.figure.value === null
                      ? "not determined"
                      : formatQuantity(one.figure.value, one.figure.sigma, "")}
                  </span>
                );
              },
            }),
          ]),
      helper.accessor((row) => row.sample.doubts.length, {
        id: "doubts",
        header: "Doubts",
        cell: ({ row }) => {
          const { doubts } = row.original.sample;
          return doubts.length === 0 ? (
            "none"
          ) : (
            <span className="mark-doubt" title={doubts.join(", ")}>
              ▲ {doubts.length}
            </span>
          );
        },
      }),
    ]);
  }, [comparison, batches, mode, onOpen]);
  return (
    <div className="batches-scroll" tabIndex={0} role="group" aria-label="Samples">
      <SortedTable
        className="batches-table"
        caption="Samples side by side, value(statistical)(systematic part); arrow keys choose one, Enter opens it"
        columns={columns}
        data={data}
        keyOf={(row) => row.i}
        prefix="sample-row"
        lit={lit}
        chosen={chosen}
        onPoint={onPoint}
        onChoose={onChoose}
        onOpen={onOpen}
        marks={(row) => ({ "data-sample": row.sample.sample })}
      />
    </div>
  );
}

function contributionsText(contributions: Readonly<Partial<Record<ComparedParameter, number>>>): string {
  return (Object.entries(contributions) as [ComparedParameter, number][])
    .map(([name, size]) => `${title(name)} ${formatNumber(size, 3)}`)
    .join(", ");
}

interface NameProps {
  readonly row: Row;
  readonly look: ReturnType<typeof batchLook>;
  readonly onOpen: (i: number) => void;
}

function SampleName({ row: { sample, i }, look, onOpen }: NameProps) {
  return (
    <span className="line-name">
      <BatchMarkSign look={look} />
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
      {sample.results.length > 1 && <span className="small">{sample.results.length} results</span>}
    </span>
  );
}

function dayOf({ date }: ComparedSample): number | undefined {
  return (date === null ? null : dayNumber(date)) ?? undefined;
}

/** Open the first measurement of a sample. */
export function useOpenSample(comparison: Comparison | null): (i: number) => void {
  const controller = useController();
  return useCallback(
    (i) => {
      const found = comparison?.samples[i]?.results[0];
      if (found !== undefined) controller.openMeasured(found.file, found.sha256);
    },
    [controller, comparison],
  );
}
