import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { readTable, wordTableIssue } from "../../app/table/index.ts";
import type { Table, TableIssue } from "../../app/table/index.ts";

const encode = (text: string): Uint8Array => new TextEncoder().encode(text);

function checkTable(table: Table): void {
  expect(table.rows).toBeGreaterThanOrEqual(2);
  expect(table.columns.length).toBeGreaterThanOrEqual(2);
  for (const column of table.columns) {
    expect(column.values).toHaveLength(table.rows);
    expect(column.values.every((value) => Number.isNaN(value) || Number.isFinite(value))).toBe(true);
  }
  for (let i = 1; i < table.rows; i++) expect(table.rowLines[i]!).toBeGreaterThan(table.rowLines[i - 1]!);
}

function checkIssue(issue: TableIssue, file: string): void {
  expect(issue.code).toMatch(/^table\//);
  const { message, remedy } = wordTableIssue(issue);
  expect(message).toContain(file);
  expect(remedy.length).toBeGreaterThan(10);
}

function check(bytes: Uint8Array): void {
  const result = readTable("some file.csv", bytes);
  if (result.ok) checkTable(result.value);
  else for (const issue of result.issues) checkIssue(issue, "some file.csv");
}

describe("no input makes the reader throw", () => {
  const settings = { seed: 7, numRuns: 400 };

  it("random bytes", () => {
    fc.assert(fc.property(fc.uint8Array({ maxLength: 400 }), check), settings);
  });

  it("random text of the characters that tables are made of", () => {
    const characters = fc.constantFrom(..."0123456789.,;\t \n\r\"'#%-+eED/()[]:=abTµ".split(""));
    fc.assert(
      fc.property(fc.string({ unit: characters, maxLength: 200 }), (text) => check(encode(text))),
      settings,
    );
  });

  it("a good file cut after any byte", () => {
    const bytes = encode(
      '# T = 4.2 K, P = 5 µW\n"Energy (eV)","T, raw"\n2.10,0.51\n2.11,"0.50"\n2.12,4.9e-1\n2.13,0.48',
    );
    for (let n = 0; n <= bytes.length; n++) check(bytes.subarray(0, n));
  });

  it("a good file with any one byte changed", () => {
    const bytes = encode("# T = 4.2 K\nEnergy (eV);T\n2,10;0,51\n2,11;0,50\n2,12;0,49\n2,13;0,48\n");
    for (let i = 0; i < bytes.length; i++)
      for (const value of [0, 10, 13, 34, 44, 59, 128, 255]) {
        const spoilt = Uint8Array.from(bytes);
        spoilt[i] = value;
        check(spoilt);
      }
  });
});

describe("large and odd input stays in bounds", () => {
  it("a line of a million characters is refused", () => {
    const result = readTable("f.csv", encode("x".repeat(1_000_000)));
    expect(result.ok).toBe(false);
    if (!result.ok) expect(wordTableIssue(result.issues[0]!).message.length).toBeLessThan(300);
  });

  it("two hundred thousand rows keep their order, lines and last value", () => {
    const n = 200_000;
    const lines = ["Energy (eV),T"];
    for (let i = 0; i < n; i++) lines.push(`${(2 + i * 1e-6).toFixed(6)},${(i % 997) / 1000}`);
    const result = readTable("f.csv", encode(lines.join("\n") + "\n"));
    expect(result.ok).toBe(true);
    if (!result.ok) return;
    expect(result.value.rows).toBe(n);
    expect(result.value.skipped).toEqual([]);
    // Derived: row i is 2 + i 1e-6 written with six decimals, on line i + 2.
    expect(result.value.columns[0]!.values[n - 1]).toBe(2.199999);
    expect(result.value.rowLines[n - 1]).toBe(n + 1);
  });

  it("quotes, comments and blank lines at the borders of blocks keep their line numbers", () => {
    const lines = ["Energy (eV),T"];
    const expected: number[] = [];
    for (let i = 0; i < 13_000; i++) {
      if (i % 4096 === 4094) lines.push("# pause");
      if (i % 4099 === 5) lines.push("");
      lines.push(i % 4095 === 0 ? `"${2 + i / 1000}","0.5"` : `${2 + i / 1000},0.5`);
      expected.push(lines.length);
    }
    const result = readTable("f.csv", encode(lines.join("\n")));
    expect(result.ok && [...result.value.rowLines]).toEqual(expected);
    expect(result.ok && result.value.skipped.filter((s) => s.reason === "comment").length).toBe(3);
  });

  it("a hundred columns and rows without any number are no trouble", () => {
    const row = (i: number): string => Array.from({ length: 100 }, (_, j) => `${i + j / 100}`).join("\t");
    const result = readTable("f.txt", encode([row(1), row(2), "\t".repeat(99), row(3)].join("\n")));
    expect(result.ok && result.value.columns.length).toBe(100);
    expect(result.ok && result.value.skipped).toMatchObject([{ line: 3, column: null, reason: "blank" }]);
  });
});
