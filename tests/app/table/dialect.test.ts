import { describe, expect, it } from "vitest";
import type { TableChoices } from "../../../app/table/index.ts";
import { rowsOf, skippedOf, tableOf } from "./reading.ts";

interface Case {
  readonly title: string;
  readonly text: string;
  readonly choices?: TableChoices;
  readonly dialect: string;
  readonly rows: readonly (readonly number[])[];
}

// Derived: the numbers are those written in the text, read by eye; the dialect is delimiter, decimal, thousands mark.
const CASES: readonly Case[] = [
  {
    title: "comma and point",
    text: "1.5,2.5\n1.6,2.6\n",
    dialect: ",|.|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "whole numbers with a comma",
    text: "500,1023\n501,1022\n",
    dialect: ",|.|",
    rows: [
      [500, 1023],
      [501, 1022],
    ],
  },
  {
    title: "semicolon and decimal comma",
    text: "1,5;2,5\n1,6;2,6\n",
    dialect: ";|,|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "semicolon and point",
    text: "1.5;2.5\n1.6;2.6\n",
    dialect: ";|.|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "spaces and decimal comma",
    text: "1,5 2,5\n1,6 2,6\n",
    dialect: " |,|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "tab and decimal comma",
    text: "1,5\t2,5\n1,6\t2,6\n",
    dialect: "\t|,|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "tab and point",
    text: "1.5\t2.5\n1.6\t2.6\n",
    dialect: "\t|.|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "runs of spaces and tabs, padded on both sides",
    text: "  1.5 \t  2.5  \n  1.6     2.6\n",
    dialect: " |.|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "runs of spaces, padded on both sides",
    text: "   1.5    2.5  \n  10.6   2.6\n",
    dialect: " |.|",
    rows: [
      [1.5, 2.5],
      [10.6, 2.6],
    ],
  },
  {
    title: "comma and spaces after it",
    text: "1.5, 2.5\n1.6, 2.6\n",
    dialect: ",|.|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "whole numbers, comma and space",
    text: "10, 20\n11, 21\n",
    dialect: ",|.|",
    rows: [
      [10, 20],
      [11, 21],
    ],
  },
  {
    title: "decimal commas in quoted fields",
    text: '"1,5","2,5"\n"1,6","2,6"\n',
    dialect: ",|,|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "a space groups thousands beside a tab",
    text: "17 300,5\t0,5\n17 301,5\t0,6\n",
    dialect: "\t|,| ",
    rows: [
      [17300.5, 0.5],
      [17301.5, 0.6],
    ],
  },
  {
    title: "a narrow space groups thousands beside spaces",
    text: "17\u202f300.5 0.5\n17\u202f301.5 0.6\n",
    dialect: " |.|\u202f",
    rows: [
      [17300.5, 0.5],
      [17301.5, 0.6],
    ],
  },
  {
    title: "a non-breaking space groups thousands",
    text: "17\u00a0300.5;0.5\n1\u00a0017\u00a0301.5;0.6\n",
    dialect: ";|.|\u00a0",
    rows: [
      [17300.5, 0.5],
      [1017301.5, 0.6],
    ],
  },
  {
    title: "points group thousands before a decimal comma",
    text: "17.300,5;0,5\n17.301,5;0,6\n",
    dialect: ";|,|.",
    rows: [
      [17300.5, 0.5],
      [17301.5, 0.6],
    ],
  },
  {
    title: "commas group thousands in quoted fields",
    text: '"17,300.5",0.5\n"17,301.5",0.6\n',
    dialect: ",|.|,",
    rows: [
      [17300.5, 0.5],
      [17301.5, 0.6],
    ],
  },
  {
    title: "three decimals are decimals, not thousands",
    text: "1,500;2,500\n1,600;2,600\n",
    dialect: ";|,|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "three decimals beside spaces",
    text: "1,500 250,5\n1,600 260,5\n",
    dialect: " |,|",
    rows: [
      [1.5, 250.5],
      [1.6, 260.5],
    ],
  },
  {
    title: "several signals",
    text: "1,5;2,5;3\n1,6;2,6;4\n",
    dialect: ";|,|",
    rows: [
      [1.5, 2.5, 3],
      [1.6, 2.6, 4],
    ],
  },
  {
    title: "separators at the end of each line",
    text: "1.5,2.5,\n1.6,2.6,\n",
    dialect: ",|.|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
  {
    title: "decimal commas between commas, when the user says so",
    text: "1,234,5,678\n1,235,5,679\n",
    choices: { delimiter: ",", decimal: "," },
    dialect: ",|,|",
    rows: [
      [1.234, 5.678],
      [1.235, 5.679],
    ],
  },
  {
    title: "decimal commas between commas, when the heading names half as many columns",
    text: "Energy (eV),T\n1,234,5,678\n1,235,5,679\n",
    dialect: ",|,|",
    rows: [
      [1.234, 5.678],
      [1.235, 5.679],
    ],
  },
  {
    title: "a delimiter chosen against the evidence",
    text: "1,5;2,5\n1,6;2,6\n",
    choices: { delimiter: ";", decimal: "," },
    dialect: ";|,|",
    rows: [
      [1.5, 2.5],
      [1.6, 2.6],
    ],
  },
];

describe("delimiter and decimal mark are decided together", () => {
  for (const { title, text, choices, dialect, rows } of CASES)
    it(title, () => {
      const table = tableOf(text, choices);
      const { delimiter, decimal, thousands } = table.dialect;
      expect([delimiter, decimal, thousands].join("|")).toBe(dialect);
      expect(rowsOf(table)).toEqual(rows);
      expect(table.skipped).toEqual([]);
    });

  it("commas that could be either are read as separators and said to be ambiguous", () => {
    const table = tableOf("1,234,5,678\n1,235,5,679\n");
    expect(rowsOf(table)[0]).toEqual([1, 234, 5, 678]);
    expect(table.dialect.ambiguous).toBe(true);
    expect(table.dialect.reasons.delimiter).toMatch(/ambiguous.*2 columns/);
    expect(tableOf("500,1023\n501,1022\n").dialect.ambiguous).toBe(true);
  });

  it("a heading with a name a column, or a decimal point anywhere, settles it", () => {
    expect(tableOf("Pixel,Counts\n500,1023\n501,1022\n").dialect.ambiguous).toBe(false);
    expect(tableOf("500,1023\n501,1022.5\n").dialect.ambiguous).toBe(false);
  });

  it("a column of times is kept as a column without numbers and listed once", () => {
    const table = tableOf("Time;E;T\n12:00:01;2,1;0,5\n12:00:02;2,2;0,4\n12:00:03;2,3;0,3\n");
    expect(table.columns.map((column) => column.name)).toEqual(["Time", "E", "T"]);
    expect(table.rows).toBe(3);
    expect(table.columns[0]!.values.every(Number.isNaN)).toBe(true);
    expect(skippedOf(table)).toEqual([[2, 1, "non-numeric"]]);
  });

  it("the decision holds over many rows, whatever the first ones look like", () => {
    const lines = Array.from({ length: 3000 }, (_, i) => (i < 500 ? `${i};${i + 1}` : `${i},5;${i + 1},25`));
    const table = tableOf(lines.join("\n"));
    expect(table.dialect.decimal).toBe(",");
    expect(rowsOf(table)[2999]).toEqual([2999.5, 3000.25]);
    expect(table.skipped).toEqual([]);
  });
});

describe("numbers as instruments write them", () => {
  // Derived: the value is the decimal number that the cell denotes.
  const NUMBERS: readonly (readonly [string, number])[] = [
    ["+1.5", 1.5],
    ["-1.5", -1.5],
    ["\u22121.5", -1.5],
    ["\u20131.5", -1.5],
    [".5", 0.5],
    ["5.", 5],
    ["1.5E-3", 0.0015],
    ["1.5e+3", 1500],
    ["1.0D-3", 0.001],
    ["1.0d+02", 100],
    ["1.25-103", 1.25e-103],
    ["007", 7],
    ["-0.0", -0],
  ];
  for (const [cell, value] of NUMBERS)
    it(`${cell} is ${value}`, () => {
      const table = tableOf(`x;y\n1.5;2.5\n2.5;${cell}\n3.5;2.5\n`);
      expect(table.columns[1]!.values[1]).toBe(value);
      expect(table.skipped).toEqual([]);
    });

  const REFUSED: readonly (readonly [string, string])[] = [
    ["", "blank"],
    ["   ", "blank"],
    ["NaN", "not-finite"],
    ["nan", "not-finite"],
    ["-Inf", "not-finite"],
    ["Infinity", "not-finite"],
    ["\u221e", "not-finite"],
    ["1.#INF", "not-finite"],
    ["-1.#IND", "not-finite"],
    ["1e999", "not-finite"],
    ["n/a", "non-numeric"],
    ["--", "non-numeric"],
    ["0x1F", "non-numeric"],
    ["1.2.3", "non-numeric"],
    ["1,234", "non-numeric"],
    ["2 5", "non-numeric"],
    ["12 34", "non-numeric"],
    ["2.5 eV", "non-numeric"],
    ["45%", "non-numeric"],
    ["1e", "non-numeric"],
    ["++1", "non-numeric"],
    ["overflow", "non-numeric"],
  ];
  for (const [cell, reason] of REFUSED)
    it(`"${cell}" is no number (${reason}) and stands with its line and column`, () => {
      const table = tableOf(`x;y\n1.5;2.5\n2.5;${cell}\n3.5;2.5\n4.5;2.5\n`);
      expect(table.rows).toBe(4);
      expect(table.columns[1]!.values[1]).toBeNaN();
      expect(table.skipped).toEqual([{ line: 3, column: 2, reason, found: cell.trim() }]);
    });
});
