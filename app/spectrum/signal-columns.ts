import { success, type Result } from "../base/index.ts";
import type { Table } from "../table/index.ts";
import { chooseColumns } from "./choose-columns.ts";
import { readHeader } from "./header-words.ts";
import type { SpectrumIssue } from "./issue.ts";
import { lookAtValues } from "./look-at-values.ts";
import type { ReadingChoices } from "./spectrum.ts";

export interface SignalColumn {
  /** 1-based. */
  readonly column: number;
  readonly header: string;
  /** Column of its standard deviation: the next one to its right that is no signal; null where there is none. */
  readonly sigma: number | null;
}

/**
 * Every column of a table that may be a signal of its own, left to right: several spectra on one axis. `also` says which
 * headers are signals beside those whose words say so (a power, for example).
 */
export function signalColumns(
  table: Table,
  choices: ReadingChoices,
  also: (header: string) => boolean,
): Result<readonly SignalColumn[], SpectrumIssue> {
  const chosen = chooseColumns(table, choices);
  if (!chosen.ok) return chosen;
  const companions = [chosen.value.axis, chosen.value.reference, chosen.value.dark].map(
    (one) => one?.column.index,
  );
  const columns = table.columns
    .filter((column) => !companions.includes(column.index))
    .map((column) => ({
      column,
      kind: readHeader(column.name, column.unit, column.header).kind,
      look: lookAtValues(column.values),
    }))
    .filter(({ look }) => look.count > 0);
  const sigmas = columns.filter(({ kind }) => kind === "sigma");
  const lively = columns.filter(({ kind, look }) => kind !== "sigma" && look.max > look.min);
  const marked = lively.filter(({ column }) => also(column.header));
  const worded = lively.filter(
    ({ kind, column }) => kind === "signal" || column === chosen.value.signal.column,
  );
  const silent = lively.filter(
    ({ kind, look, column }) =>
      (kind === "nothing" && !look.counting) || column === chosen.value.signal.column,
  );
  const signals = marked.length > 0 ? marked : worded.length > 1 ? worded : silent;
  return success(
    signals.map(({ column }, i): SignalColumn => {
      const next = signals[i + 1]?.column.index ?? Infinity;
      const own = sigmas.find((one) => one.column.index > column.index && one.column.index < next);
      const common =
        sigmas.length === 1 && signals.length > 1 && i < signals.length - 1 ? sigmas[0] : undefined;
      return {
        column: column.index,
        header: column.header,
        sigma: own?.column.index ?? common?.column.index ?? null,
      };
    }),
  );
}
