import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { readTable, wordTableIssue } from "../../../app/table/index.ts";
import { issueOf, rowsOf, tableOf } from "./reading.ts";

const HEAD = `##TITLE=Crystal 7, upper half
##JCAMP-DX=4.24 $$ written by hand
##DATA TYPE=UV/VIS SPECTRUM
##ORIGIN=Invented laboratory
##DATE=26/03/14
##PATHLENGTH=0.0034
##TEMPERATURE=-271.75
##$PUMP POWER=12 uW
##XUNITS=1/CM
##YUNITS=ABSORBANCE
`;

function file(data: string, more = ""): string {
  return `${HEAD}##XFACTOR=1\n##YFACTOR=0.5\n##FIRSTX=17500\n##LASTX=17509\n##NPOINTS=10\n${more}${data}\n##END=\n`;
}

describe("JCAMP-DX files", () => {
  it("give axis and signal with the units of their records, the factors applied", () => {
    const table = tableOf(file("##XYDATA=(X++(Y..Y))\n17500 1 2 3 3 2\n17505 1 0 -1 -2 -3"));
    expect(table.columns.map(({ name, unit }) => [name, unit])).toEqual([
      ["wavenumber", "cm-1"],
      ["absorbance", ""],
    ]);
    // Derived: FIRSTX + i (LASTX - FIRSTX)/(NPOINTS - 1), ordinates times YFACTOR = 0.5
    expect(rowsOf(table).slice(0, 3)).toEqual([
      [17500, 0.5],
      [17501, 1],
      [17502, 1.5],
    ]);
    // Derived: HEAD has ten lines, then six lines of structure
    expect(Array.from(table.rowLines)).toEqual([17, 17, 17, 17, 17, 18, 18, 18, 18, 18]);
    expect(table.comments).toEqual(["written by hand"]);
    expect(table.dialect.reasons.delimiter).toMatch(/JCAMP-DX 4.24/);
  });

  it("keep what they say about sample and measurement, with the units that the standard lays down", () => {
    const { facts } = tableOf(file("##XYDATA=(X++(Y..Y))\n17500 1 2 3 3 2 1 0 -1 -2 -3"));
    const fact = (label: string): unknown => {
      const found = facts.find((one) => one.label === label);
      return found && [found.key, found.value, found.unit];
    };
    expect(fact("DATE")![0 as never]).toBe("date");
    // Source: McDonald and Wilks 1988, section 6: PATHLENGTH in cm, TEMPERATURE in degrees C
    expect(fact("PATHLENGTH")).toEqual(["thickness", 0.0034, "cm"]);
    expect(fact("TEMPERATURE")).toEqual(["temperature", -271.75, "°C"]);
    expect(fact("PUMP POWER")).toEqual(["power", 12, "uW"]);
    expect(fact("FIRSTX")).toBeUndefined();
  });

  it("with pairs of numbers need no even steps", () => {
    const table = tableOf(
      `${HEAD}##NPOINTS=3\n##XYPOINTS=(XY..XY)\n17500, 0.1; 17502.5, 0.2\n17509 ?\n##END=\n`.replace(
        "1/CM",
        "NANOMETERS",
      ),
    );
    expect(table.columns[0]!.unit).toBe("nm");
    expect(rowsOf(table)).toEqual([
      [17500, 0.1],
      [17502.5, 0.2],
      [17509, NaN],
    ]);
    expect(table.skipped).toMatchObject([{ column: 2, reason: "not-finite", found: "?" }]);
  });

  it("are known by their beginning, whatever their name says, and read with any line ending", () => {
    const text = file("##XYDATA=(X++(Y..Y))\n17500 1BCCBA@abc").replaceAll("\n", "\r\n");
    const read = readTable("spectrum.txt", new TextEncoder().encode(text));
    expect(read.ok && read.value.rows).toBe(10);
  });

  it.each([
    ["a changed ordinate", "17500 1JJ%jj\n17504C jjjj j", /ordinate 3 where the line before ends with 1/, 18],
    ["a lost line", "17500 1 2 3 3\n17508 -2 -3", /abscissa 17508 where 17504 is due/, 18],
    ["too few points", "17500 1 2 3 3 2 1 0 -1", /8 points where ##NPOINTS= says 10/, 16],
    ["a strange character", "17500 1 2 3 x 2 1 0 -1 -2 -3", /"x" is no ordinate \(character 13\)/, 17],
    ["a repetition without end", "17500 1 2V999999999", /repetition of 4999999999, more than/, 17],
    ["a difference of nothing", "17500 JJ%jjjjjj", /difference without an ordinate/, 17],
    ["words", "17500 1 2 3\nnonsense", /does not begin with a number/, 18],
  ])("with %s are refused with the line", (_, data, found, line) => {
    const issue = issueOf(file(`##XYDATA=(X++(Y..Y))\n${data}`));
    expect(issue.code).toBe("table/jcamp");
    expect(issue.facts.found).toMatch(found);
    expect(issue.facts.line).toBe(line);
    expect(wordTableIssue(issue).remedy).toMatch(/export it again/);
  });

  it("with a first ordinate that is another are refused; given before the factor it is taken", () => {
    const data = "##XYDATA=(X++(Y..Y))\n17500 1 2 3 3 2 1 0 -1 -2 -3";
    expect(issueOf(file(data, "##FIRSTY=7\n")).facts.found).toMatch(/first ordinate 0.5/);
    expect(tableOf(file(data, "##FIRSTY=0.5\n")).rows).toBe(10);
    expect(tableOf(file(data, "##FIRSTY=1\n")).rows).toBe(10);
  });

  it("with several spectra, or with peaks alone, are refused by name", () => {
    const one = file("##XYDATA=(X++(Y..Y))\n17500 1 2 3 3 2 1 0 -1 -2 -3");
    expect(issueOf(`##TITLE=Both\n##DATA TYPE=LINK\n${one}${one}##END=\n`).facts.found).toMatch(
      /2 spectra in one file/,
    );
    expect(issueOf(file("##PEAK TABLE=(XY..XY)\n17500,1")).facts.found).toMatch(/PEAK TABLE/);
  });
});

/** Ordinates in DIFDUP form, ten to a line, each line begun with the ordinate that ended the one before. */
function inDifferences(values: readonly number[], first: number, step: number): string {
  const squeezed = (digits: string, value: number): string => {
    const [lead, ...rest] = String(Math.abs(value));
    const place = value < 0 ? Number(lead) + 9 : Number(lead);
    return digits[place]! + rest.join("");
  };
  const lines: string[] = [];
  for (let from = 0; from === 0 || from < values.length - 1; from += 10) {
    const part = values.slice(from, from + 11);
    let text = squeezed("@ABCDEFGHIabcdefghi", part[0]!);
    const differences = part.slice(1).map((value, i) => value - part[i]!);
    for (let i = 0; i < differences.length;) {
      let times = 1;
      while (differences[i + times] === differences[i]) times++;
      text += squeezed("%JKLMNOPQRjklmnopqr", differences[i]!);
      if (times > 1) text += "STUVWXYZs"[Number(String(times)[0]) - 1]! + String(times).slice(1);
      i += times;
    }
    lines.push(`${first + from * step}${text}`);
  }
  return [
    ...lines,
    `${first + (values.length - 1) * step}${squeezed("@ABCDEFGHIabcdefghi", values.at(-1)!)}`,
  ].join("\n");
}

describe("ordinates packed as differences", () => {
  it("come back as they were, whatever their size, sign and repetitions", () => {
    const random = makeRandom(5);
    for (let round = 0; round < 20; round++) {
      const count = 2 + Math.floor(60 * random.uniform());
      const size = 10 ** Math.floor(7 * random.uniform());
      const values: number[] = [];
      while (values.length < count) {
        const value = Math.round(size * (random.uniform() - 0.5));
        for (let k = 1 + Math.floor(14 * random.uniform() ** 3); k > 0 && values.length < count; k--)
          values.push(value);
      }
      const data = inDifferences(values, 17500, 2);
      const text = `${HEAD}##XFACTOR=1\n##YFACTOR=1\n##FIRSTX=17500\n##LASTX=${17500 + 2 * (count - 1)}\n##NPOINTS=${count}\n##XYDATA=(X++(Y..Y))\n${data}\n##END=\n`;
      const table = tableOf(text);
      expect(Array.from(table.columns[1]!.values, (value) => value + 0)).toEqual(
        values.map((value) => value + 0),
      );
    }
  });
});
