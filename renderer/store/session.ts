import { produce } from "immer";
import type { AnalysedFile, NamedBytes } from "../../app/tasks/index.ts";
import { mergeChoices, type ProtocolInput } from "../../app/protocol/index.ts";

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

/**
 * What undo goes back over: the files, the choices of each, the fits that stand, and which of them is shown. Plain, never
 * changed in place; `step` names the edit that led here, for the undo button.
 */
export interface Session {
  readonly files: readonly LoadedFile[];
  readonly currentId: string | null;
  readonly choices: Readonly<Record<string, ProtocolInput>>;
  readonly fits: Readonly<Record<string, Fitted>>;
  readonly step: string;
}

export const EMPTY_SESSION: Session = {
  files: [],
  currentId: null,
  choices: {},
  fits: {},
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
    files,
    currentId: session.currentId === id ? next : session.currentId,
    choices: without(session.choices),
    fits: without(session.fits),
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
  return { ...session, choices: { ...session.choices, [id]: after }, step };
}

export function replaceChoices(session: Session, choices: ProtocolInput, step: string): Session {
  const id = session.currentId;
  return id === null ? session : { ...session, choices: { ...session.choices, [id]: choices }, step };
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
