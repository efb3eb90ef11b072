import { dayNumber, nameResult, type NamedResult } from "../../app/batch/index.ts";
import {
  resolveComparisonChoices,
  type ComparisonChoices,
  type ComparisonChoicesInput,
  type RunglineResult,
} from "../../app/protocol/index.ts";
import type { CompareView, LoadedResult, Session } from "./session.ts";

/** One result of the session with the facts that name it, and whether the filters let it stand. */
export interface Gathered {
  /** Of its file, of the first file of its power series, or of the result that was opened alone. */
  readonly id: string;
  readonly of: "file" | "series" | "result";
  readonly result: RunglineResult;
  readonly named: NamedResult;
  readonly shown: boolean;
  /** Fitted with other choices than the present ones. */
  readonly old: boolean;
}

const known = new WeakMap<Session, readonly Gathered[]>();

/** Every fit of the session's files, results that came alone, power series where there are several; the same list for the same session. */
export function gather(session: Session): readonly Gathered[] {
  const before = known.get(session);
  if (before !== undefined) return before;
  const choices = comparisonChoices(session.compare.choices);
  const make = (id: string, of: Gathered["of"], result: RunglineResult, old: boolean): Gathered => {
    const named = nameResult(result, choices);
    return { id, of, result, named, shown: isShown(named, session.compare), old };
  };
  const gathered = [
    ...session.files.flatMap(({ id }) => {
      const fit = session.fits[id];
      return fit === undefined
        ? []
        : [make(id, "file", fit.analysed.result, fit.choices !== session.choices[id])];
    }),
    ...session.results.map(({ id, result }: LoadedResult) => make(id, "result", result, false)),
  ];
  const series = Object.entries(session.powerFits).map(([id, { analysed, choices: made }]) =>
    make(id, "series", analysed.result, made !== session.choices[id]),
  );
  // One power series by itself has nothing to stand beside.
  if (series.length + gathered.filter(({ result }) => (result.power ?? null) !== null).length > 1)
    gathered.push(...series);
  known.set(session, gathered);
  return gathered;
}

/** Choices of the window are edited one by one and never break the schema. */
function comparisonChoices(input: ComparisonChoicesInput): ComparisonChoices {
  const resolved = resolveComparisonChoices(input);
  if (!resolved.ok) throw new Error("choices of the comparison break their schema");
  return resolved.value;
}

/** A bound leaves out what does not say the fact that it is about. */
function isShown({ batch, temperature_K: kelvin, date }: NamedResult, view: CompareView): boolean {
  if (view.hidden.includes(batch)) return false;
  const day = date === null ? null : dayNumber(date);
  const [from, to] = view.date.map((text) => (text === null ? null : dayNumber(text)));
  return within(kelvin, ...view.temperature) && within(day, from ?? null, to ?? null);
}

function within(value: number | null, low: number | null, high: number | null): boolean {
  if (low === null && high === null) return true;
  return value !== null && (low === null || value >= low) && (high === null || value <= high);
}

/** All batches in the order of their samples, left out or not: what colours and marks go by. */
export function batchesOf(gathered: readonly Gathered[]): readonly string[] {
  return [...new Set(gathered.map(({ named }) => named.batch))];
}

/** Files whose fit is missing or was made with other choices. */
export function unfittedFiles({ files, fits, choices }: Session): readonly string[] {
  return files.flatMap(({ id }) => (fits[id] === undefined || fits[id].choices !== choices[id] ? [id] : []));
}
