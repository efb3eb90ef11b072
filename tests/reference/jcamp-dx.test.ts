import { describe, expect, it } from "vitest";
import { decodeLine, type DecodedLine } from "../../app/table/jcamp-values.ts";
import { readTable } from "../../app/table/index.ts";

function ordinates(line: string): readonly number[] {
  const decoded = decodeLine(line);
  if ("fault" in decoded) throw new Error(decoded.fault);
  return decoded.ordinates;
}

// Source: McDonald and Wilks, Appl. Spectrosc. 42, 151 (1988), table VII: one line of ordinates in every form
const TABLE_VII = [1, 2, 3, 3, 2, 1, 0, -1, -2, -3];

describe("the compressed forms of JCAMP-DX 4.24", () => {
  it.each([
    ["FIX", "1  2  3  3  2  1  0 -1 -2 -3"],
    ["PAC", "1+2+3+3+2+1+0-1-2-3"],
    ["SQZ", "1BCCBA@abc"],
    ["DIF", "1JJ%jjjjjj"],
    ["DIFDUP", "1JT%jX"],
  ])("%s decodes to the ordinates of table VII", (_, line) => {
    expect(ordinates(`0 ${line}`)).toEqual(TABLE_VII);
  });

  // Source: the same, table VI: 53 ordinates in DIFDUP form and the line that checks the last of them
  const LINES = ["599.860@VKT%TLkj%J%KLJ%njKjL%kL%jJULJ%kLK1%lLMNPNPRLJ0QTOJ1P", "700.158A28"];

  it("table VI: differences with repetitions, the abscissa not set apart, the check at the end", () => {
    const first = decodeLine(LINES[0]!) as DecodedLine;
    expect(first.x).toBe(599.86);
    expect(first.ordinates).toHaveLength(53);
    expect(first.ordinates.slice(0, 10)).toEqual([0, 0, 0, 0, 2, 4, 4, 4, 7, 5]);
    expect(first.ordinates.at(-1)).toBe(128);
    expect(first.endsWithDifference).toBe(true);
    expect(ordinates(LINES[1]!)).toEqual([128]);
  });

  it("a whole file of it is read, its checks met", () => {
    const text = `##TITLE=Table VI\n##JCAMP-DX=4.24\n##XUNITS=1/CM\n##YUNITS=ABSORBANCE\n##XFACTOR=1.0\n##YFACTOR=1\n##FIRSTX=599.860\n##LASTX=700.158\n##NPOINTS=53\n##XYDATA=(X++(Y..Y))\n${LINES.join("\n")}\n##END=\n`;
    const read = readTable("table-vi.jdx", new TextEncoder().encode(text));
    if (!read.ok) throw new Error(JSON.stringify(read.issues));
    const [x, y] = read.value.columns;
    expect(read.value.rows).toBe(53);
    expect([x!.values[0], y!.values[52]]).toEqual([599.86, 128]);
    expect(x!.values[52]).toBeCloseTo(700.158, 9);
  });

  it("E with a sign is an exponent, E without one the digit five", () => {
    // Source: the same, section 5.3 (AFFN) and table VII (SQZ digits)
    expect(ordinates("1 1.5E+02 -2.0E-01")).toEqual([150, -0.2]);
    expect(ordinates("1 E3e")).toEqual([53, -5]);
  });

  it("lines of large differences end where the next one begins", () => {
    // Source: documentation of the public package readJDX 0.6.4, decompLines, first lines of its example
    const lines = [
      "482A885145L989378k853295J46714q39581j382088R41076k774051J365135l135709P53917",
      "472a903359j71857q18832K573831k615133L481852l395846L894844l478693M916433",
    ].map((line) => decodeLine(line) as DecodedLine);
    expect(lines.map(({ x }) => x)).toEqual([482, 472]);
    expect(lines[0]!.ordinates.at(-1)).toBe(-1903359);
    expect(lines[1]!.ordinates[0]).toBe(-1903359);
    // Source: the same; its third line begins 463B483240
    expect(lines[1]!.ordinates.at(-1)).toBe(2483240);
  });
});
