import type { Wording } from "../base/index.ts";
import type { TableIssue } from "./types.ts";

const EXPORT =
  "Export the spectrum as text with one row a point: comma, semicolon, tab or spaces between two or more columns.";

const REMEDIES: Readonly<Record<TableIssue["code"], (issue: TableIssue) => string>> = {
  "table/empty": () => "Check that the export finished and that this is the right file.",
  "table/not-text": (issue) =>
    issue.facts["kind"] === "spreadsheet"
      ? "Save the sheet as CSV (comma or semicolon separated text) and read that."
      : issue.facts["kind"] === "archive"
        ? "Unpack it and read the text file inside."
        : issue.facts["kind"] === "image" || issue.facts["kind"] === "document"
          ? `A picture of a spectrum holds no numbers that can be read. ${EXPORT}`
          : `${EXPORT} If it is text in an unusual encoding, name the encoding.`,
  "table/markup": (issue) =>
    issue.facts["kind"] === "web-page"
      ? "The address or the server gave a page instead of the data; fetch the data file itself."
      : issue.facts["kind"] === "json"
        ? `This is no table of a spectrum; a result or protocol goes in by its own option. ${EXPORT}`
        : EXPORT,
  "table/other-format": () =>
    `This format packs its numbers in a way of its own and is not read yet. ${EXPORT}`,
  "table/jcamp": () =>
    "A JCAMP-DX file has to hold one curve, in ##XYDATA=(X++(Y..Y)) or ##XYPOINTS=(XY..XY), whole as it was written: export it again, a spectrum a file, or as text with one row a point.",
  "table/too-large": () => "Split the file, or export fewer points.",
  "table/only-text": (issue) =>
    issue.facts["reason"] === "spoilt"
      ? "Export numbers with nothing else in the cell, no unit, sign of per cent or remark; the unit belongs into the heading, a remark into a line of its own after #."
      : issue.facts["reason"] === "mixed"
        ? "Write all numbers of the file with the same decimal mark."
        : `${EXPORT} If the numbers are there but were not seen, name the delimiter and the decimal mark.`,
  "table/only-header": () =>
    "The heading is there but no numbers follow: check that the measurement was stored.",
  "table/one-column": () =>
    "A spectrum needs an axis and a signal: export both columns. If two columns are there, name the delimiter and the decimal mark.",
  "table/too-few-rows": () =>
    "Two rows of numbers are the least that can be read; check that the export finished.",
  "table/no-such-line": () =>
    "Give a header line that exists and stands above the numbers, or 0 for no header.",
};

const STATEMENTS: Readonly<Record<TableIssue["code"], string>> = {
  "table/empty": "the file is empty",
  "table/not-text": "not a text file",
  "table/markup": "not a table",
  "table/other-format": "a format that is not read",
  "table/jcamp": "a JCAMP-DX file that cannot be read",
  "table/too-large": "the file is too large",
  "table/only-text": "no rows of numbers",
  "table/only-header": "a heading without rows",
  "table/one-column": "only one column of numbers",
  "table/too-few-rows": "too few rows of numbers",
  "table/no-such-line": "no such header line",
};

export function wordTableIssue(issue: TableIssue): Wording {
  const { file, line, found } = issue.facts;
  const where = line === null ? file : `${file}, line ${line}`;
  return {
    message: `${where}: ${STATEMENTS[issue.code]}; found ${found}.`,
    remedy: REMEDIES[issue.code](issue),
  };
}
