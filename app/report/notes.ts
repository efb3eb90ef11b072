import type { Note } from "../base/index.ts";

/** Doubts before assumptions, each group in the order in which it was raised. */
export function gravestFirst<N extends Pick<Note, "level">>(notes: readonly N[]): readonly N[] {
  return [
    ...notes.filter((note) => note.level === "doubt"),
    ...notes.filter((note) => note.level !== "doubt"),
  ];
}

/** One note on one line, for standard error. */
export function noteLine(note: Note): string {
  return `${note.level} ${note.code} (${note.about}): ${note.text}${note.remedy === "" ? "" : ` Remedy: ${note.remedy}`}`;
}
