import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { readTable } from "../../../app/table/index.ts";
import type { DecimalMark, Delimiter, EncodingName } from "../../../app/table/index.ts";

const SETTINGS = { seed: 20260, numRuns: 300 };

interface Written {
  readonly delimiter: Delimiter;
  readonly decimal: DecimalMark;
  readonly encoding: EncodingName;
  readonly mark: boolean;
  readonly ending: string;
  readonly header: boolean;
  readonly comments: number;
  readonly rows: readonly (readonly number[])[];
  readonly digits: number;
  readonly lastEnding: boolean;
  readonly trailing: boolean;
  readonly exponent: boolean;
}

/** Every dialect that is not ambiguous by nature: no decimal comma between commas. */
const written: fc.Arbitrary<Written> = fc
  .record({
    delimiter: fc.constantFrom<Delimiter>(",", ";", "\t", " "),
    decimal: fc.constantFrom<DecimalMark>(".", ","),
    encoding: fc.constantFrom<EncodingName>("utf-8", "utf-16le", "utf-16be", "iso-8859-1"),
    mark: fc.boolean(),
    ending: fc.constantFrom("\n", "\r\n", "\r"),
    header: fc.boolean(),
    comments: fc.integer({ min: 0, max: 3 }),
    columns: fc.integer({ min: 2, max: 5 }),
    count: fc.integer({ min: 3, max: 40 }),
    digits: fc.integer({ min: 1, max: 9 }),
    lastEnding: fc.boolean(),
    trailing: fc.boolean(),
    exponent: fc.boolean(),
  })
  .filter((c) => !(c.delimiter === "," && c.decimal === ","))
  .chain((c) =>
    fc
      .array(
        fc.array(fc.double({ min: -99999, max: 99999, noNaN: true }), {
          minLength: c.columns,
          maxLength: c.columns,
        }),
        { minLength: c.count, maxLength: c.count },
      )
      .map((rows) => ({ ...c, rows, trailing: c.trailing && c.delimiter !== " " })),
  );

function cellOf(value: number, w: Written): string {
  const text = w.exponent ? value.toExponential(w.digits) : value.toFixed(w.digits);
  return w.decimal === "," ? text.replace(".", ",") : text;
}

function textOf(w: Written): string {
  const lines: string[] = [];
  for (let i = 0; i < w.comments; i++) lines.push(`# Leistung ${i}: ${i + 1} µW`);
  const names = w.rows[0]!.map((_, j) => (j === 0 ? "Energie(eV)" : `Signal${j}(1/cm)`));
  const end = w.trailing ? w.delimiter : "";
  if (w.header) lines.push(names.join(w.delimiter) + end);
  for (const row of w.rows) lines.push(row.map((value) => cellOf(value, w)).join(w.delimiter) + end);
  return lines.join(w.ending) + (w.lastEnding ? w.ending : "");
}

function bytesOf(text: string, encoding: EncodingName, mark: boolean): Uint8Array {
  if (encoding === "utf-8") return new TextEncoder().encode((mark ? "\ufeff" : "") + text);
  if (encoding === "iso-8859-1") return Uint8Array.from(text, (c) => c.charCodeAt(0));
  const full = (mark ? "\ufeff" : "") + text;
  const bytes = new Uint8Array(full.length * 2);
  const view = new DataView(bytes.buffer);
  for (let i = 0; i < full.length; i++) view.setUint16(2 * i, full.charCodeAt(i), encoding === "utf-16le");
  return bytes;
}

describe("whatever dialect a table is written in", () => {
  it("it is read back number for number, and nothing is skipped", () => {
    fc.assert(
      fc.property(written, (w) => {
        const result = readTable("f.txt", bytesOf(textOf(w), w.encoding, w.mark));
        if (!result.ok) throw new Error(JSON.stringify(result.issues));
        const table = result.value;
        expect(table.dialect.delimiter).toBe(w.delimiter);
        expect(table.dialect.decimal).toBe(w.decimal);
        expect(table.skipped).toEqual([]);
        expect(table.columns).toHaveLength(w.rows[0]!.length);
        // Derived: the number read is the double nearest to the text that was written.
        const expected = w.rows.map((row) =>
          row.map((value) => Number(cellOf(value, { ...w, decimal: "." }))),
        );
        const found = w.rows.map((_, i) => table.columns.map((column) => column.values[i]!));
        expect(found).toEqual(expected);
        expect(table.rows).toBe(w.rows.length);
        const first = w.comments + (w.header ? 1 : 0) + 1;
        expect([...table.rowLines]).toEqual(w.rows.map((_, i) => first + i));
        expect(table.facts).toHaveLength(w.comments);
        expect(table.columns.map((column) => column.unit)).toEqual(
          w.rows[0]!.map((_, j) => (w.header ? (j === 0 ? "eV" : "1/cm") : "")),
        );
      }),
      SETTINGS,
    );
  });

  it("reading twice gives the same table", () => {
    fc.assert(
      fc.property(written, (w) => {
        const bytes = bytesOf(textOf(w), w.encoding, w.mark);
        expect(readTable("f.txt", bytes)).toEqual(readTable("f.txt", bytes));
      }),
      { ...SETTINGS, numRuns: 40 },
    );
  });

  it("a spoilt cell costs that cell alone and is found where it is", () => {
    fc.assert(
      fc.property(written, fc.nat(), fc.nat(), fc.constantFrom("oops", "NaN", "1.2.3"), (w, i, j, spoilt) => {
        const row = 1 + (i % (w.rows.length - 1));
        const column = 1 + (j % (w.rows[0]!.length - 1));
        const lines = textOf({ ...w, lastEnding: true }).split(w.ending);
        const at = w.comments + (w.header ? 1 : 0) + row;
        const cells = lines[at]!.split(w.delimiter);
        cells[column] = spoilt;
        lines[at] = cells.join(w.delimiter);
        const result = readTable("f.txt", new TextEncoder().encode(lines.join(w.ending)));
        if (!result.ok) throw new Error(JSON.stringify(result.issues));
        const reason = spoilt === "NaN" ? "not-finite" : "non-numeric";
        expect(result.value.skipped).toEqual([{ line: at + 1, column: column + 1, reason, found: spoilt }]);
        expect(result.value.columns[column]!.values[row]).toBeNaN();
        expect(result.value.rows).toBe(w.rows.length);
      }),
      { ...SETTINGS, numRuns: 150 },
    );
  });
});
