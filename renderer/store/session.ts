import { produce } from "immer";
import type { AnalysedFile, AnalysedSeries, NamedBytes } from "../../app/tasks/index.ts";
import {
  mergeChoices,
  type ComparisonChoicesInput,
  type ProtocolInput,
  type RunglineResult,
} from "../../app/protocol/index.ts";

/** A file in the drawer. */
export interface LoadedFile {
  readonly id: string;
  readonly name: string;
  readonly bytes: Uint8Array;
}

/** A fit and the choices it was made with: it is out of date once the file's choices are others. */
export interface Fitted {
  readonly analysed: AnalysedFile;
  readonly choices: ProtocolInput;
}

/** The same of a power series. */
export interface PowerFitted {
  readonly analysed: AnalysedSeries;
  readonly choices: ProtocolInput;
  readonly fileIds: readonly string[];
}

/** A result that came as a file of its own, without its spectrum. */
export interface LoadedResult {
  readonly id: string;
  readonly result: RunglineResult;
}

/** Which samples stand side by side, and how they are compared. */
export interface CompareView {
  readonly choices: ComparisonChoicesInput;
  /** Batches that are left out. */
  readonly hidden: readonly string[];
  /** Bounds in kelvin; null: none. */
  readonly temperature: readonly [number | null, number | null];
  /** Bounds as dates, both days included; null: none. */
  readonly date: readonly [string | null, string | null];
}

/**
 * What undo goes back over: the files, the choices of each, the fits that stand, and which of them is shown. Plain, never
 * changed in place; `step` names the edit that led here, for the undo button.
 */
export interface Session {
  readonly files: readonly LoadedFile[];
  readonly currentId: string | null;
  readonly choices: Readonly<Record<string, ProtocolInput>>;
  readonly fits: Readonly<Record<string, Fitted>>;
  /** Files marked as one power series; a file stands in one at most. All of a series have the same choices. */
  readonly series: readonly (readonly string[])[];
  /** By the id of the series' first file. */
  readonly powerFits: Readonly<Record<string, PowerFitted>>;
  readonly results: readonly LoadedResult[];
  readonly compare: CompareView;
  readonly step: string;
}

export const EMPTY_SESSION: Session = {
  files: [],
  currentId: null,
  choices: {},
  fits: {},
  series: [],
  powerFits: {},
  results: [],
  compare: { choices: {}, hidden: [], temperature: [null, null], date: [null, null] },
  step: "start",
};

export const NO_CHOICES: ProtocolInput = {};

/** New files, each with the given choices; the first of them becomes the current one. */
export function addFiles(session: Session, added: readonly NamedBytes[], choices: ProtocolInput): Session {
  if (added.length === 0) return session;
  const taken = new Set(session.files.map((file) => file.id));
  const files = added.map(({ name, bytes }) => {
    let id = name;
    for (let copy = 2; taken.has(id); copy++) id = `${name} (${copy})`;
    taken.add(id);
    return { id, name, bytes };
  });
  return produce(session, (draft) => {
    // Bytes are never edited: the cast only tells immer's types that the drafts hold them as they are.
    draft.files.push(...(files as typeof draft.files));
    for (const { id } of files) draft.choices[id] = choices as (typeof draft.choices)[string];
    draft.currentId = files[0]!.id;
    draft.step = files.length === 1 ? `open ${files[0]!.name}` : `open ${files.length} files`;
  });
}

export function removeFile(session: Session, id: string): Session {
  const at = session.files.findIndex((file) => file.id === id);
  if (at < 0) return session;
  const without = <T>(record: Readonly<Record<string, T>>): Record<string, T> =>
    Object.fromEntries(Object.entries(record).filter(([key]) => key !== id));
  const files = session.files.filter((file) => file.id !== id);
  const next = files[Math.min(at, files.length - 1)]?.id ?? null;
  return {
    ...session,
    files,
    currentId: session.currentId === id ? next : session.currentId,
    choices: without(session.choices),
    fits: without(session.fits),
    series: session.series.flatMap((members) => {
      const left = members.filter((one) => one !== id);
      return left.length > 1 ? [left] : [];
    }),
    powerFits: without(session.powerFits),
    step: `close ${session.files[at]!.name}`,
  };
}

export function chooseFile(session: Session, id: string): Session {
  if (session.currentId === id || !session.files.some((file) => file.id === id)) return session;
  return { ...session, currentId: id, step: `choose ${id}` };
}

/** One more choice for the current file; `material` is replaced whole, since a preset brings its own values. */
export function editChoices(session: Session, change: ProtocolInput, step: string): Session {
  const id = session.currentId;
  if (id === null) return session;
  const before = session.choices[id] ?? NO_CHOICES;
  const cleared = change.material?.preset === undefined ? before : { ...before, material: {} };
  const after = mergeChoices(cleared, change) as ProtocolInput;
  if (JSON.stringify(after) === JSON.stringify(before)) return session;
  return { ...session, choices: withChoices(session, id, after), step };
}

/** The files that are fitted with this one as a power series: those marked with it, else itself. */
export function seriesOf(session: Session, id: string): readonly string[] {
  return session.series.find((members) => members.includes(id)) ?? [id];
}

function withChoices(session: Session, id: string, choices: ProtocolInput): Session["choices"] {
  const same = seriesOf(session, id).map((one) => [one, choices] as const);
  return { ...session.choices, ...Object.fromEntries(same) };
}

/** These files are one power series from now on, in the order of the drawer, with the choices of the first. */
export function markSeries(session: Session, ids: readonly string[]): Session {
  const members = session.files.flatMap((file) => (ids.includes(file.id) ? [file.id] : []));
  if (members.length < 2) return session;
  const others = session.series.flatMap((one) => {
    const left = one.filter((id) => !members.includes(id));
    return left.length > 1 ? [left] : [];
  });
  const marked = { ...session, series: [...others, members] };
  return {
    ...marked,
    choices: withChoices(marked, members[0]!, session.choices[members[0]!] ?? NO_CHOICES),
    currentId: members[0]!,
    step: `one power series of ${members.length} files`,
  };
}

export function partSeries(session: Session, id: string): Session {
  const series = session.series.filter((members) => !members.includes(id));
  return series.length === session.series.length
    ? session
    : { ...session, series, step: "files no longer one power series" };
}

export function keepPower(session: Session, id: string, fitted: PowerFitted): Session {
  const file = session.files.find((one) => one.id === id);
  if (file === undefined) return session;
  return {
    ...session,
    powerFits: { ...session.powerFits, [id]: fitted },
    step: `fit the power series ${file.name}`,
  };
}

export function replaceChoices(session: Session, choices: ProtocolInput, step: string): Session {
  const id = session.currentId;
  return id === null ? session : { ...session, choices: withChoices(session, id, choices), step };
}

/** The current file's choices for every file. */
export function shareChoices(session: Session): Session {
  const id = session.currentId;
  if (id === null) return session;
  const shared = session.choices[id] ?? NO_CHOICES;
  return {
    ...session,
    choices: Object.fromEntries(session.files.map((file) => [file.id, shared])),
    step: "use these choices for all files",
  };
}

export function keepFit(session: Session, id: string, fitted: Fitted): Session {
  const file = session.files.find((one) => one.id === id);
  if (file === undefined) return session;
  return { ...session, fits: { ...session.fits, [id]: fitted }, step: `fit ${file.name}` };
}

/** A fit whose choices differ from those before by `change` alone: both are kept as one step. */
export function keepDrawn(
  session: Session,
  id: string,
  fitted: Fitted,
  before: ProtocolInput,
  change: ProtocolInput,
  step: string,
): Session {
  const kept = keepFit(session, id, fitted);
  if (kept === session) return session;
  const present = session.choices[id] ?? NO_CHOICES;
  // What was chosen meanwhile stays chosen; the fit is then out of date.
  const after = present === before ? fitted.choices : (mergeChoices(present, change) as ProtocolInput);
  return { ...kept, choices: withChoices(session, id, after), step };
}

/** Results beside the files; one that is there already is not taken twice. */
export function addResults(session: Session, name: string, results: readonly RunglineResult[]): Session {
  const key = ({ source, protocol }: RunglineResult): string =>
    `${source.sha256} ${JSON.stringify(protocol)}`;
  const known = new Set(session.results.map(({ result }) => key(result)));
  const fresh = results.filter((result) => !known.has(key(result)) && known.add(key(result)));
  if (fresh.length === 0) return session;
  const taken = new Set(session.results.map(({ id }) => id));
  const added = fresh.map((result, i): LoadedResult => {
    const first = fresh.length === 1 ? name : `${name} [${i + 1}]`;
    let id = first;
    for (let copy = 2; taken.has(id); copy++) id = `${first} (${copy})`;
    taken.add(id);
    return { id, result };
  });
  return {
    ...session,
    results: [...session.results, ...added],
    step: fresh.length === 1 ? `open result ${name}` : `open ${fresh.length} results of ${name}`,
  };
}

export function removeResult(session: Session, id: string): Session {
  const results = session.results.filter((one) => one.id !== id);
  return results.length === session.results.length
    ? session
    : { ...session, results, step: `close result ${id}` };
}

export function editCompare(session: Session, change: Partial<CompareView>, step: string): Session {
  const compare = { ...session.compare, ...change };
  return JSON.stringify(compare) === JSON.stringify(session.compare)
    ? session
    : { ...session, compare, step };
}
