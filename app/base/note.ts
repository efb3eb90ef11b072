/** How grave a note is: an assumption made for the user, or a doubt about a number. */
export type NoteLevel = "assumption" | "doubt";

/**
 * A statement attached to a number. `code` is stable (`standard-air-assumed`), `about` is the dotted path of the
 * result that it concerns (`series.gap_eV`, `lines[5].width_eV`, `source`), `text` says it in plain words,
 * `remedy` says what the user can do (a protocol key, a measurement).
 */
export interface Note {
  readonly code: string;
  readonly level: NoteLevel;
  readonly about: string;
  readonly text: string;
  readonly remedy: string;
}

export function assumption(code: string, about: string, text: string, remedy: string): Note {
  return { code, level: "assumption", about, text, remedy };
}

export function doubt(code: string, about: string, text: string, remedy: string): Note {
  return { code, level: "doubt", about, text, remedy };
}
