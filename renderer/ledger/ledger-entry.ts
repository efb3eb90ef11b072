import type { Note, Quantity } from "../../app/base/index.ts";

/** A symbol as a paper sets it: an upright or slanted letter with an upright subscript. */
export interface LedgerSymbol {
  readonly letter: string;
  readonly below?: string;
}

/** What the small card of a number says. */
export interface CardText {
  readonly definition: string;
  readonly formula: string;
  readonly source: string;
  readonly improve: string;
}

export interface CardTable {
  readonly caption: string;
  readonly head: readonly string[];
  readonly rows: readonly (readonly string[])[];
}

/** One number of the ledger; `scale` takes the quantity's unit to the printed one. */
export interface LedgerEntry {
  readonly id: string;
  readonly symbol: LedgerSymbol;
  readonly name: string;
  readonly quantity: Quantity;
  readonly unit: string;
  readonly scale: number;
  readonly notes: readonly Note[];
  readonly card: CardText;
  readonly correlations: readonly { readonly with: string; readonly value: number }[];
  /** A number without uncertainty of its own (a count, a chi square), printed as it is. */
  readonly plain?: string;
  readonly main?: boolean;
  /** What a number without an error is called: held by the protocol, given by the user. Default: exact. */
  readonly exactWord?: string;
  /** Digits of a number without an error. Default: as many as are typed for an energy. */
  readonly exactDigits?: number;
  /** Shown on the card. */
  readonly table?: CardTable;
}

export interface LedgerSection {
  readonly title: string;
  readonly entries: readonly LedgerEntry[];
  readonly remark?: string;
}

/** Notes about these paths and what lies below them; a path of one word means the whole and takes only itself. */
export function notesAbout(notes: readonly Note[], ...paths: readonly string[]): readonly Note[] {
  return notes.filter(({ about }) =>
    paths.some((path) => about === path || (path.includes(".") && about.startsWith(`${path}.`))),
  );
}
