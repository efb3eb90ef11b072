import { doubt, type Note } from "../base/index.ts";
import type { FactKey, HeaderFact, Table } from "../table/index.ts";
import type { SpectrumIssue } from "./issue.ts";

/** What makes two measurements of it, where a file states it twice. */
const TELLING: ReadonlySet<FactKey> = new Set([
  "temperature",
  "power",
  "thickness",
  "spot",
  "sample",
  "batch",
  "polarisation",
  "field",
  "pump_energy",
]);
/** Readings that drift by less than this part are one state, logged twice. */
const DRIFT = 0.05;

/**
 * What      Facts that a file states again, and otherwise, below its first numbers. Where rows follow and the light axis
 *           starts again these are several measurements in one file, which would be averaged into one curve: an issue.
 *           Else a doubt.
 */
export function repeatedFacts(
  table: Table,
  turnsRound: boolean,
): { readonly issue: SpectrumIssue | null; readonly notes: readonly Note[] } {
  const notes: Note[] = [];
  const said = new Set<FactKey>();
  const lastRow = table.rowLines[table.rows - 1] ?? 0;
  for (const later of table.facts) {
    if (!TELLING.has(later.key) || later.line <= table.dialect.firstDataLine || said.has(later.key)) continue;
    const first = table.facts.find(({ key }) => key === later.key)!;
    if (first === later || isSame(first, later)) continue;
    if (later.line < lastRow && turnsRound)
      return {
        issue: {
          code: "spectrum/several-measurements",
          facts: {
            file: table.file,
            key: later.key,
            line: later.line,
            found: quoted(later),
            first_line: first.line,
            first: quoted(first),
          },
        },
        notes: [],
      };
    said.add(later.key);
    notes.push(
      doubt(
        "header-facts-differ",
        "reading.facts",
        `line ${first.line} says ${quoted(first)}, line ${later.line} says ${quoted(later)}: the first one is taken`,
        "correct the header; where these are two measurements split the file",
      ),
    );
  }
  return { issue: null, notes };
}

function isSame(a: HeaderFact, b: HeaderFact): boolean {
  if (a.value !== null && b.value !== null && (a.unit ?? "") === (b.unit ?? ""))
    return Math.abs(a.value - b.value) <= DRIFT * Math.max(Math.abs(a.value), Math.abs(b.value));
  return a.text.trim().toLowerCase() === b.text.trim().toLowerCase();
}

function quoted({ label, text }: HeaderFact): string {
  return `"${label}: ${text}"`;
}
