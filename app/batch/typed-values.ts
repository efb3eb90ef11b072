import type { ComparisonChoices } from "../protocol/index.ts";
import { readTextTable } from "../table/index.ts";

/**
 * Facts typed in a small table: the first column names a file or a sample, every other column is a fact, with its unit
 * in the header (`Growth rate / um/h`, `Temperature (K)`). Blank cells say nothing.
 */
export function typedValues(bytes: Uint8Array): ComparisonChoices["values"] {
  const { header, rows } = readTextTable(bytes);
  const columns = header.slice(1).map(columnHead);
  return rows.flatMap((row) => {
    const of = row[0] ?? "";
    if (of === "") return [];
    const facts: Record<string, string> = {};
    columns.forEach(({ name, unit }, j) => {
      const text = row[j + 1] ?? "";
      if (text !== "" && name !== "") facts[name] = unit === "" ? text : `${text} ${unit}`;
    });
    return [{ of, facts }];
  });
}

/** The unit behind a slash that stands apart, or in brackets at the end: any unit, not only those that spectra have. */
export function columnHead(header: string): { name: string; unit: string } {
  const match = /^(.+?)\s+\/\s*(\S.*)$/.exec(header) ?? /^(.+?)\s*[([]([^)\]]+)[)\]]$/.exec(header);
  return match === null ? { name: header, unit: "" } : { name: match[1]!.trim(), unit: match[2]!.trim() };
}
