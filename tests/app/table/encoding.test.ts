import { describe, expect, it } from "vitest";
import { readTable } from "../../../app/table/index.ts";
import type { TableChoices } from "../../../app/table/index.ts";

const TEXT = "# Leistung: 5 µW\nWellenlänge [nm]\tT\n571,2\t0,5\n571,3\t0,4\n571,4\t0,3\n";

function wide(text: string, big: boolean, mark: boolean): Uint8Array {
  const units = (mark ? "\ufeff" : "") + text;
  const bytes = new Uint8Array(units.length * 2);
  for (let i = 0; i < units.length; i++) {
    const code = units.charCodeAt(i);
    bytes[2 * i + (big ? 1 : 0)] = code & 255;
    bytes[2 * i + (big ? 0 : 1)] = code >> 8;
  }
  return bytes;
}

const narrow = (text: string): Uint8Array => Uint8Array.from(text, (c) => c.charCodeAt(0));
const utf8 = (text: string): Uint8Array => new TextEncoder().encode(text);

describe("text is decoded by its mark, its zeros, its validity", () => {
  const CASES: readonly (readonly [string, Uint8Array, string, boolean, TableChoices?])[] = [
    ["UTF-8", utf8(TEXT), "utf-8", false],
    ["UTF-8 with a byte-order mark", utf8("\ufeff" + TEXT), "utf-8", true],
    ["UTF-16, little end first, with a mark", wide(TEXT, false, true), "utf-16le", true],
    ["UTF-16, big end first, with a mark", wide(TEXT, true, true), "utf-16be", true],
    ["UTF-16, little end first, without a mark", wide(TEXT, false, false), "utf-16le", false],
    ["UTF-16, big end first, without a mark", wide(TEXT, true, false), "utf-16be", false],
    ["Latin-1", narrow(TEXT), "iso-8859-1", false],
    ["Latin-1 as Windows-1252 by choice", narrow(TEXT), "windows-1252", false, { encoding: "windows-1252" }],
  ];
  for (const [title, bytes, encoding, mark, choices] of CASES)
    it(title, () => {
      const result = readTable("f.txt", bytes, choices);
      expect(result.ok).toBe(true);
      if (!result.ok) return;
      expect(result.value.dialect.encoding).toBe(encoding);
      expect(result.value.dialect.byteOrderMark).toBe(mark);
      expect(result.value.bytes).toBe(bytes.length);
      expect(result.value.columns.map((c) => [c.name, c.unit])).toEqual([
        ["Wellenlänge", "nm"],
        ["T", ""],
      ]);
      expect(result.value.facts[0]).toMatchObject({ key: "power", value: 5, unit: "µW", line: 1 });
      expect([...result.value.columns[0]!.values]).toEqual([571.2, 571.3, 571.4]);
    });

  it("bytes from 0x80 to 0x9F are characters of Windows-1252", () => {
    const bytes = narrow("# Probe \x96 \x80 \x99\nE (eV);T\n2.1;0.5\n2.2;0.4\n");
    const result = readTable("f.txt", bytes);
    expect(result.ok && result.value.dialect.encoding).toBe("windows-1252");
    // Source: WHATWG Encoding Standard, index windows-1252: 0x80 U+20AC, 0x96 U+2013, 0x99 U+2122
    expect(result.ok && result.value.comments).toEqual(["Probe \u2013 \u20ac \u2122"]);
  });

  it("plain characters need no decision", () => {
    const result = readTable("f.txt", utf8("1.5 2\n1.6 3\n"));
    expect(result.ok && result.value.dialect.reasons.encoding).toMatch(/same in every encoding/);
  });

  it("a wrong encoding by choice is refused, not read as nonsense", () => {
    const result = readTable("f.txt", utf8(TEXT), { encoding: "utf-16le" });
    expect(result.ok).toBe(false);
  });
});

describe("line endings", () => {
  // Derived: the same three rows whatever ends the lines.
  for (const [name, ending] of [
    ["LF", "\n"],
    ["CRLF", "\r\n"],
    ["CR", "\r"],
  ] as const)
    it(`${name}, with and without one at the end`, () => {
      for (const end of [ending, ""]) {
        const text = ["E (eV),T", "2.1,0.5", "2.2,0.4", "2.3,0.3"].join(ending) + end;
        const result = readTable("f.csv", utf8(text));
        expect(result.ok && result.value.dialect.lineEnding).toBe(name);
        expect(result.ok && [...result.value.rowLines]).toEqual([2, 3, 4]);
        expect(result.ok && [...result.value.columns[1]!.values]).toEqual([0.5, 0.4, 0.3]);
        expect(result.ok && result.value.skipped).toEqual([]);
      }
    });
});
