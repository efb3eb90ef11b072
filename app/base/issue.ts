/**
 * A typed record of bad input. Rooms declare unions of these on `code` (for example `table/ragged-row`);
 * the facts are data, and the words stand in the room's `wording.ts`, so that every shell says the same.
 */
export interface Issue {
  readonly code: string;
  /** Where and what: file, line (1-based), column (1-based number or name), found, expected ... */
  readonly facts: Readonly<Record<string, string | number | boolean | null>>;
}

/** An issue in words: what is wrong (naming file, line and column where known) and what would help. */
export interface Wording {
  readonly message: string;
  readonly remedy: string;
}

/** Outcome of work on outside input: a value, or every issue that was found. */
export type Result<T, I extends Issue = Issue> =
  { readonly ok: true; readonly value: T } | { readonly ok: false; readonly issues: readonly I[] };

export function success<T>(value: T): { readonly ok: true; readonly value: T } {
  return { ok: true, value };
}

export function failure<I extends Issue>(
  ...issues: readonly I[]
): { readonly ok: false; readonly issues: readonly I[] } {
  return { ok: false, issues };
}
