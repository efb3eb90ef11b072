import { assumption, failure, success, type Note, type Result } from "../base/index.ts";
import type { Table, TableColumn } from "../table/index.ts";
import { describeColumn, findColumn } from "./find-column.ts";
import { readHeader, type HeaderMeaning } from "./header-words.ts";
import type { SpectrumIssue } from "./issue.ts";
import { lookAtValues, type ValueLook } from "./look-at-values.ts";
import type { ColumnRole, ReadingChoices } from "./spectrum.ts";

export interface Candidate {
  readonly column: TableColumn;
  readonly meaning: HeaderMeaning;
  readonly look: ValueLook;
}

export interface ChosenColumns {
  readonly axis: Candidate;
  readonly signal: Candidate;
  readonly sigma: Candidate | null;
  readonly reference: Candidate | null;
  readonly dark: Candidate | null;
  readonly roles: readonly ColumnRole[];
  readonly notes: readonly Note[];
}

type Part = "axis" | "signal" | "sigma" | "reference" | "dark";
type Chosen = { candidate: Candidate; reason: string };
type Named = Partial<Record<Part, Chosen>>;

const KEYS = {
  axis: "axis.column",
  signal: "signal.column",
  sigma: "signal.sigma_column",
  reference: "signal.reference_column",
  dark: "signal.dark_column",
} as const;

/** Which column is what: the choices first, then the words of the headers, then the numbers. */
export function chooseColumns(table: Table, choices: ReadingChoices): Result<ChosenColumns, SpectrumIssue> {
  const candidates = table.columns.map((column): Candidate => ({
    column,
    meaning: readHeader(column.name, column.unit, column.header),
    look: lookAtValues(column.values),
  }));
  const named = namedColumns(table, choices, candidates);
  if (!named.ok) return named;
  const taken = (): ReadonlySet<Candidate> =>
    new Set(Object.values(named.value).map((chosen) => chosen.candidate));

  const notes: Note[] = [];
  const axis = named.value.axis ? success(named.value.axis) : findAxis(table, candidates, taken());
  if (!axis.ok) return axis;
  named.value.axis = axis.value;

  const signal = named.value.signal
    ? success(named.value.signal)
    : findSignal(table, candidates, taken(), choices, notes);
  if (!signal.ok) return signal;
  named.value.signal = signal.value;
  const refused = refuseSignal(table, signal.value.candidate, choices);
  if (refused !== null) return failure(refused);

  addCompanions(candidates, named.value);
  const roles = candidates.map((candidate) => roleOf(candidate, named.value));
  return success({
    axis: axis.value.candidate,
    signal: signal.value.candidate,
    sigma: named.value.sigma?.candidate ?? null,
    reference: named.value.reference?.candidate ?? null,
    dark: named.value.dark?.candidate ?? null,
    roles,
    notes,
  });
}

function namedColumns(
  table: Table,
  choices: ReadingChoices,
  candidates: readonly Candidate[],
): Result<Named, SpectrumIssue> {
  const wanted: Record<Part, number | string | null> = {
    axis: choices.axis.column,
    signal: choices.signal.column,
    sigma: choices.signal.sigma_column,
    reference: choices.signal.reference_column,
    dark: choices.signal.dark_column,
  };
  const named: Named = {};
  const issues: SpectrumIssue[] = [];
  for (const part of Object.keys(wanted) as Part[]) {
    const choice = wanted[part];
    if (choice === null) continue;
    const found = findColumn(table, KEYS[part], choice);
    if (!found.ok) {
      issues.push(...found.issues);
      continue;
    }
    const candidate = candidates.find((one) => one.column === found.value)!;
    const double = (Object.keys(named) as Part[]).find((other) => named[other]!.candidate === candidate);
    if (double !== undefined)
      issues.push({
        code: "spectrum/same-column",
        facts: { file: table.file, key: KEYS[part], other: KEYS[double], found: describeColumn(found.value) },
      });
    named[part] = { candidate, reason: `named in the protocol (${KEYS[part]})` };
  }
  return issues.length > 0 ? failure(...issues) : success(named);
}

function findAxis(
  table: Table,
  candidates: readonly Candidate[],
  taken: ReadonlySet<Candidate>,
): Result<Chosen, SpectrumIssue> {
  const free = candidates.filter((one) => !taken.has(one) && one.look.count > 0);
  const worded = free.filter((one) => one.meaning.kind === "axis");
  // A header that names a light axis is believed before one that only carries a unit.
  const first = worded.find((one) => one.meaning.light !== null) ?? worded[0];
  if (first !== undefined) {
    const what = first.meaning.light ?? `unit ${first.column.unit}`;
    const others = worded.filter((one) => one !== first && one.meaning.light !== null);
    const more =
      others.length === 0
        ? ""
        : `; first of several light axes (also ${others.map((one) => describeColumn(one.column)).join(", ")})`;
    return success({ candidate: first, reason: `the header names a light axis (${what})${more}` });
  }
  const pixel = free.find((one) => one.meaning.kind === "pixel");
  const silent = free.filter((one) => one.meaning.kind === "nothing");
  const running = silent.find(
    (one) =>
      one.look.monotonic > 0.9 && one.look.min > 0 && !one.look.counting && one.look.max > one.look.min,
  );
  if (running !== undefined && pixel === undefined)
    return success({
      candidate: running,
      reason: `no header names a light axis; its values run in one direction from ${short(running.column.values[0]!)}`,
    });
  const counting = pixel ?? silent.find((one) => one.look.counting);
  if (counting !== undefined)
    return failure({
      code: "spectrum/pixel-axis",
      facts: { file: table.file, column: counting.column.index, found: describeColumn(counting.column) },
    });
  // Up and down sweeps: the first column may turn round several times.
  const turning = silent.find(
    (one) => one === candidates[0] && one.look.min > 0 && one.look.max > one.look.min,
  );
  if (turning !== undefined && candidates.length > 1)
    return success({
      candidate: turning,
      reason: "no header names a light axis and no column runs in one direction; the first column is taken",
    });
  return failure({
    code: "spectrum/no-axis",
    facts: { file: table.file, columns: table.columns.map(describeColumn).join(", ") },
  });
}

function findSignal(
  table: Table,
  candidates: readonly Candidate[],
  taken: ReadonlySet<Candidate>,
  choices: ReadingChoices,
  notes: Note[],
): Result<Chosen, SpectrumIssue> {
  const free = candidates.filter((one) => !taken.has(one) && one.look.count > 0);
  const wanted = choices.signal.quantity;
  const isSignal = (one: Candidate): boolean => one.meaning.kind === "signal";
  // A second column with a bare 1/cm beside the axis is an absorption coefficient.
  const isBare = (one: Candidate): boolean =>
    one.meaning.kind === "axis" && one.meaning.light === null && one.meaning.signalUnit !== null;
  const groups: (readonly [readonly Candidate[], string])[] = [
    [
      free.filter((one) => isSignal(one) && wanted !== null && one.meaning.quantity === wanted),
      `the header says ${wanted}`,
    ],
    [free.filter((one) => isSignal(one) && one.meaning.quantity !== "counts"), "the header names a signal"],
    [free.filter(isBare), "its unit is that of an absorption coefficient"],
    [free.filter(isSignal), "the header names a reading of a detector"],
    [
      free.filter((one) => one.meaning.kind === "nothing" && !one.look.counting),
      "no header names a signal; it is the first column of numbers beside the axis",
    ],
  ];
  const lively = (one: Candidate): boolean => one.look.max > one.look.min;
  // A column with one value all along is a setting; it is the signal only where nothing else is left.
  const ordered = [...groups.map(([group, reason]) => [group.filter(lively), reason] as const), ...groups];
  for (const [group, reason] of ordered) {
    const first = group[0];
    if (first === undefined) continue;
    const others = group.slice(1);
    if (others.length > 0)
      notes.push(
        assumption(
          "several-signals",
          "reading.columns",
          `${group.length} columns may be the signal: ${group.map((one) => describeColumn(one.column)).join(", ")}; the first is taken`,
          `name another with signal.column, e.g. signal.column=${others[0]!.column.index}`,
        ),
      );
    return success({
      candidate: first,
      reason: first.meaning.quantity ? `${reason} (${first.meaning.quantity})` : reason,
    });
  }
  const wrong = free.find((one) => one.meaning.kind === "reflectance" || one.meaning.kind === "emission");
  if (wrong !== undefined) return success({ candidate: wrong, reason: "the only reading in the file" });
  // A lone reference or reading that is an error by its words only: better than nothing where the user says what it is.
  const last = free.find((one) => one.meaning.kind === "reference" || one.meaning.kind === "sigma");
  if (last !== undefined && wanted !== null)
    return success({ candidate: last, reason: "the only reading in the file" });
  return failure({
    code: "spectrum/no-signal",
    facts: { file: table.file, columns: table.columns.map(describeColumn).join(", ") },
  });
}

function refuseSignal(table: Table, signal: Candidate, choices: ReadingChoices): SpectrumIssue | null {
  const { kind } = signal.meaning;
  if (kind !== "reflectance" && kind !== "emission") return null;
  // The user may know better than a header, but has to say both which column and what it holds.
  if (choices.signal.column !== null && choices.signal.quantity !== null) return null;
  return {
    code: kind === "reflectance" ? "spectrum/reflectance" : "spectrum/emission",
    facts: { file: table.file, column: signal.column.index, found: describeColumn(signal.column) },
  };
}

/** Standard deviation, reference and dark reading that belong to the signal. */
function addCompanions(candidates: readonly Candidate[], named: Named): void {
  const taken = (one: Candidate): boolean => Object.values(named).some((chosen) => chosen.candidate === one);
  const usable = candidates.filter((one) => !taken(one) && one.look.count > 0);
  const signal = named.signal!.candidate;
  if (named.sigma === undefined) {
    const sigmas = usable.filter((one) => one.meaning.kind === "sigma");
    const signals = candidates.filter((one) => one === signal || one.meaning.kind === "signal");
    const next = signals.find((one) => one.column.index > signal.column.index);
    const own = sigmas.find(
      (one) =>
        one.column.index > signal.column.index &&
        (next === undefined || one.column.index < next.column.index),
    );
    const candidate = own ?? (sigmas.length === 1 && signals.length === 1 ? sigmas[0] : undefined);
    if (candidate !== undefined)
      named.sigma = { candidate, reason: `the header names a standard deviation, beside the signal` };
  }
  // A ratio is formed only where the signal is a bare reading: a transmission beside its own lamp is finished.
  if (
    signal.meaning.kind === "signal" &&
    signal.meaning.quantity !== "counts" &&
    named.reference === undefined
  )
    return;
  for (const part of ["reference", "dark"] as const) {
    if (named[part] !== undefined) continue;
    const candidate = usable.find((one) => one.meaning.kind === part);
    if (candidate !== undefined && (part === "reference" || named.reference !== undefined))
      named[part] = {
        candidate,
        reason:
          part === "reference" ? "the header names a reference reading" : "the header names a dark reading",
      };
  }
}

function roleOf(candidate: Candidate, named: Named): ColumnRole {
  const { index: column, header } = candidate.column;
  for (const part of Object.keys(named) as Part[]) {
    const chosen = named[part]!;
    if (chosen.candidate === candidate) return { role: part, column, header, reason: chosen.reason };
  }
  const { kind } = candidate.meaning;
  const reason =
    candidate.look.count === 0
      ? "holds no numbers"
      : kind === "other"
        ? "the header names something that is not needed"
        : kind === "nothing"
          ? "not needed"
          : `not needed (the header says ${kind})`;
  return { role: "other", column, header, reason };
}

function short(value: number): string {
  return String(Number(value.toPrecision(6)));
}
