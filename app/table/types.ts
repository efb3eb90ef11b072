import type { Issue } from "../base/index.ts";

export type EncodingName = "utf-8" | "utf-16le" | "utf-16be" | "windows-1252" | "iso-8859-1";
/** " " stands for one or more spaces or tabs. */
export type Delimiter = "," | ";" | "\t" | " ";
export type DecimalMark = "." | ",";

/** What the user has decided; everything left out is decided from the file. */
export interface TableChoices {
  readonly encoding?: EncodingName;
  readonly delimiter?: Delimiter;
  /** With delimiter "," too, unquoted fields are joined in pairs: 1,234,5,678 is then 1.234 and 5.678. */
  readonly decimal?: DecimalMark;
  /** 1-based; 0: the file has no header. */
  readonly headerLine?: number;
}

export interface TableColumn {
  /** 1-based place in the file. */
  readonly index: number;
  /** The header cell as written, "" if there is none. */
  readonly header: string;
  /** The header without its unit; "" where the cell is nothing but a unit. */
  readonly name: string;
  /** The unit as written, "" if there is none. */
  readonly unit: string;
  /** One number a row; NaN where the cell is blank or not a finite number. */
  readonly values: Float64Array;
}

export type FactKey =
  | "temperature"
  | "power"
  | "thickness"
  | "spot"
  | "sample"
  | "batch"
  | "date"
  | "exposure"
  | "accumulations"
  | "grating"
  | "slit"
  | "centre_wavelength"
  | "medium"
  | "gain"
  | "detector"
  | "polarisation"
  | "direction"
  | "field"
  | "scan_direction"
  | "scan_speed"
  | "pump_energy"
  | "other";

/** One statement of the file about itself. `value` is null where the text is no number or not surely one. */
export interface HeaderFact {
  readonly key: FactKey;
  /** The label as written. */
  readonly label: string;
  readonly text: string;
  readonly value: number | null;
  readonly unit: string | null;
  /** 1-based. */
  readonly line: number;
}

export type SkipReason =
  "blank" | "comment" | "non-numeric" | "ragged" | "truncated" | "not-finite" | "repeated-header";

/**
 * What was left out. `column` null: the whole line gave no row. `column` a number (1-based): the row was kept and
 * that cell is NaN. A column without any number at all is listed once, at its first row.
 */
export interface SkippedRow {
  readonly line: number;
  readonly column: number | null;
  readonly reason: SkipReason;
  /** The text found, shortened to 80 characters. */
  readonly found: string;
}

export type LineEnding = "LF" | "CRLF" | "CR" | "mixed" | "none";

export interface Dialect {
  readonly encoding: EncodingName;
  readonly byteOrderMark: boolean;
  readonly delimiter: Delimiter;
  readonly decimal: DecimalMark;
  /** The first mark between groups of three digits met in the data, "" where there is none. */
  readonly thousands: string;
  readonly lineEnding: LineEnding;
  readonly headerLine: number | null;
  readonly unitLine: number | null;
  readonly firstDataLine: number;
  /** True where the delimiter and decimal mark could be read in another way; `reasons.delimiter` says how. */
  readonly ambiguous: boolean;
  /** In plain words, why. */
  readonly reasons: { readonly encoding: string; readonly delimiter: string; readonly header: string };
}

export interface Table {
  readonly file: string;
  readonly bytes: number;
  readonly columns: readonly TableColumn[];
  readonly rows: number;
  /** 1-based line of each row. */
  readonly rowLines: Int32Array;
  readonly facts: readonly HeaderFact[];
  /** Comment and free lines that state no fact, without their mark, in order. */
  readonly comments: readonly string[];
  readonly skipped: readonly SkippedRow[];
  readonly dialect: Dialect;
}

export type TableIssueCode =
  | "table/empty"
  | "table/not-text"
  | "table/markup"
  | "table/other-format"
  | "table/jcamp"
  | "table/too-large"
  | "table/only-text"
  | "table/only-header"
  | "table/one-column"
  | "table/too-few-rows"
  | "table/no-such-line";

/** A file that is no table: which file, which line, what was found there. */
export interface TableIssue extends Issue {
  readonly code: TableIssueCode;
  readonly facts: Readonly<{
    file: string;
    line: number | null;
    found: string;
    [more: string]: string | number | boolean | null;
  }>;
}
