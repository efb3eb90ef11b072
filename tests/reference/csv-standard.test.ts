import { describe, expect, it } from "vitest";
import { csvLine } from "../../app/report/index.ts";
import { splitOne } from "../../app/table/split-fields.ts";
import { splitLines } from "../../app/table/text-lines.ts";
import { readRecords } from "../../app/table/text-records.ts";

/** Text to fields with the parts that every table goes through. */
function fieldsOf(text: string): string[][] {
  const lines = splitLines(text);
  return readRecords(lines, 0, lines.count).records.map((record) => splitOne(record.text, ","));
}

const RFC_4180 = [
  // Source: RFC 4180 (2005), section 2, examples of rules 1 to 7
  [
    "1: records on lines",
    "aaa,bbb,ccc\r\nzzz,yyy,xxx\r\n",
    [
      ["aaa", "bbb", "ccc"],
      ["zzz", "yyy", "xxx"],
    ],
  ],
  [
    "2: no line break at the end",
    "aaa,bbb,ccc\r\nzzz,yyy,xxx",
    [
      ["aaa", "bbb", "ccc"],
      ["zzz", "yyy", "xxx"],
    ],
  ],
  [
    "3: a header line",
    "field_name,field_name,field_name\r\naaa,bbb,ccc\r\nzzz,yyy,xxx\r\n",
    [
      ["field_name", "field_name", "field_name"],
      ["aaa", "bbb", "ccc"],
      ["zzz", "yyy", "xxx"],
    ],
  ],
  ["4: fields by commas", "aaa,bbb,ccc", [["aaa", "bbb", "ccc"]]],
  [
    "5: quotes or none",
    '"aaa","bbb","ccc"\r\nzzz,yyy,xxx',
    [
      ["aaa", "bbb", "ccc"],
      ["zzz", "yyy", "xxx"],
    ],
  ],
  [
    "6: a line break in quotes",
    '"aaa","b\r\nbb","ccc"\r\nzzz,yyy,xxx',
    [
      ["aaa", "b\nbb", "ccc"],
      ["zzz", "yyy", "xxx"],
    ],
  ],
  ["7: a quote doubled", '"aaa","b""bb","ccc"', [["aaa", 'b"bb', "ccc"]]],
] as const;

const CSV_SPECTRUM = [
  // Source: the public collection csv-spectrum (github.com/max-mapper/csv-spectrum), cases by their file names; its
  // expected values as the library kantan.csv quotes them (SpectrumReaderLaws)
  [
    "comma_in_quotes",
    'John,Doe,120 any st.,"Anytown, WW",08123',
    [["John", "Doe", "120 any st.", "Anytown, WW", "08123"]],
  ],
  [
    "empty",
    '1,"",""\n2,3,4',
    [
      ["1", "", ""],
      ["2", "3", "4"],
    ],
  ],
  [
    "empty_crlf",
    '1,"",""\r\n2,3,4',
    [
      ["1", "", ""],
      ["2", "3", "4"],
    ],
  ],
  [
    "escaped_quotes",
    '1,"ha ""ha"" ha"\n3,4\n',
    [
      ["1", 'ha "ha" ha'],
      ["3", "4"],
    ],
  ],
  [
    "json",
    '1,"{""type"": ""Point"", ""coordinates"": [102.0, 0.5]}"\n',
    [["1", '{"type": "Point", "coordinates": [102.0, 0.5]}']],
  ],
  [
    "newlines",
    '1,2,3\n"Once upon \na time",5,6\n7,8,9\n',
    [
      ["1", "2", "3"],
      ["Once upon \na time", "5", "6"],
      ["7", "8", "9"],
    ],
  ],
  [
    "newlines_crlf",
    '1,2,3\r\n"Once upon \r\na time",5,6\r\n7,8,9\r\n',
    [
      ["1", "2", "3"],
      ["Once upon \na time", "5", "6"],
      ["7", "8", "9"],
    ],
  ],
  [
    "quotes_and_newlines",
    '1,"ha \n""ha"" \nha"\n3,4\n',
    [
      ["1", 'ha \n"ha" \nha'],
      ["3", "4"],
    ],
  ],
  ["simple", "1,2,3\n", [["1", "2", "3"]]],
  ["simple_crlf", "1,2,3\r\n", [["1", "2", "3"]]],
  [
    "utf8",
    "1,2,3\n4,5,ʤ",
    [
      ["1", "2", "3"],
      ["4", "5", "ʤ"],
    ],
  ],
] as const;

describe("comma-separated values", () => {
  // Departure that the cases carry: a line ending inside quotes is read as a line feed.
  it.each(RFC_4180)("RFC 4180, rule %s", (_, text, fields) => {
    expect(fieldsOf(text)).toEqual(fields);
  });

  it.each(CSV_SPECTRUM)("csv-spectrum, %s", (_, text, fields) => {
    expect(fieldsOf(text)).toEqual(fields);
  });

  it.each([...RFC_4180, ...CSV_SPECTRUM])("what is written is read back as it was: %s", (_, __, fields) => {
    const written = fields.map((row) => csvLine(row)).join("");
    expect(fieldsOf(written)).toEqual(fields);
    // Source: RFC 4180, section 2: lines end with CRLF, fields with comma, quote or line break stand in quotes
    expect(written.endsWith("\r\n")).toBe(true);
  });

  it("quotes only where the rules ask for them", () => {
    // Source: RFC 4180, section 2, rules 5 to 7
    expect(csvLine(["plain", "a,b", 'a"b', "a\nb", 1.5, null])).toBe('plain,"a,b","a""b","a\nb",1.5,\r\n');
  });
});
