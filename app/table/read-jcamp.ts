import { failure, success, type Result } from "../base/index.ts";
import { makeFact } from "./header-fact.ts";
import { readRecords, type JcampBlock, type LabelledRecord } from "./jcamp-records.ts";
import { decodeLine } from "./jcamp-values.ts";
import type { TextLines } from "./text-lines.ts";
import type { Dialect, HeaderFact, SkippedRow, Table, TableColumn, TableIssue } from "./types.ts";

/** Records that describe the numbers; all others are facts about the measurement. */
const STRUCTURE = new Set(
  (
    "JCAMPDX XUNITS YUNITS XFACTOR YFACTOR FIRSTX LASTX FIRSTY LASTY DELTAX NPOINTS MAXX MINX MAXY MINY BLOCKS BLOCKID " +
    "XYDATA XYPOINTS XLABEL YLABEL CHECKSUM DATACLASS"
  ).split(" "),
);
const TABLES = new Set(["XYDATA", "XYPOINTS", "PEAKTABLE", "PEAKASSIGNMENTS", "RADATA", "NTUPLES"]);
/** Units that the standard lays down where a value stands without one. */
const STANDARD_UNITS: Readonly<Record<string, string>> = { TEMPERATURE: "°C", PATHLENGTH: "cm" };

const X_UNITS: readonly (readonly [RegExp, string, string])[] = [
  [/^(1\/CM|CM\^?-1|RECIPROCAL CM|WAVENUMBERS?( \(CM-1\))?)$/, "wavenumber", "cm-1"],
  [/^(NANOMETERS?|NM|NANOMETRES?|WAVELENGTH \(NM\))$/, "wavelength", "nm"],
  [/^(MICROMETERS?|MICRONS?|UM|MICROMETRES?)$/, "wavelength", "um"],
  [/^(ANGSTROMS?)$/, "wavelength", "Angstrom"],
  [/^(EV|ELECTRON ?VOLTS?)$/, "energy", "eV"],
  [/^(THZ|TERAHERTZ)$/, "frequency", "THz"],
];

interface Fault {
  readonly line: number | null;
  readonly found: string;
}
interface Points {
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly lines: Int32Array;
}

/**
 * What      A JCAMP-DX file with one spectrum as a table of two columns: `(X++(Y..Y))` in all its compressed forms and
 *           `(XY..XY)`. The checks that the standard builds in are made: ordinate repeated after a line of
 *           differences, abscissa at the head of each line, first ordinate, number of points.
 * Units     as XUNITS and YUNITS say; ordinates times YFACTOR, abscissas evenly from FIRSTX to LASTX.
 * Domain    Damage gives an issue with its line. Several spectra, peak tables and n-tuples are refused.
 * Source    McDonald and Wilks, Appl. Spectrosc. 42, 151 (1988) (JCAMP-DX 4.24); labels of spectra by UV and visible
 *           light as there.
 */
export function readJcamp(
  file: string,
  bytes: number,
  lines: TextLines,
  decoded: Pick<Dialect, "encoding" | "byteOrderMark"> & { readonly reason: string },
): Result<Table, TableIssue> {
  const refuse = ({ line, found }: Fault): Result<Table, TableIssue> =>
    failure({ code: "table/jcamp", facts: { file, line, found } });
  const { blocks, comments } = readRecords(lines);
  const chosen = chooseBlock(blocks);
  if ("found" in chosen) return refuse(chosen);
  const { block, data } = chosen;
  const points =
    data.label === "XYPOINTS" || isPairs(data) ? readPairs(block, data) : readOrdinates(block, data);
  if ("found" in points) return refuse(points);
  if (points.x.length < 2)
    return refuse({ line: data.line, found: `${points.x.length} point in ##${data.written}=` });

  const skipped: SkippedRow[] = [];
  points.y.forEach((value, i) => {
    if (Number.isNaN(value))
      skipped.push({ line: points.lines[i]!, column: 2, reason: "not-finite", found: "?" });
  });
  const version = textOf(block, "JCAMPDX") ?? "of no stated version";
  return success({
    file,
    bytes,
    columns: [axisColumn(block, points.x), signalColumn(block, points.y)],
    rows: points.x.length,
    rowLines: points.lines,
    facts: factsOf(block),
    comments,
    skipped,
    dialect: {
      encoding: decoded.encoding,
      byteOrderMark: decoded.byteOrderMark,
      delimiter: " ",
      decimal: ".",
      thousands: "",
      lineEnding: lines.lineEnding,
      headerLine: null,
      unitLine: null,
      firstDataLine: points.lines[0]!,
      ambiguous: false,
      reasons: {
        encoding: decoded.reason,
        delimiter: `JCAMP-DX ${version}, numbers in ##${data.written}=${data.lines[0]?.text ?? ""}`,
        header: "units from the records XUNITS and YUNITS",
      },
    },
  });
}

function chooseBlock(blocks: readonly JcampBlock[]): { block: JcampBlock; data: LabelledRecord } | Fault {
  const found = blocks.flatMap((block) =>
    block.records.filter(({ label }) => TABLES.has(label)).map((data) => ({ block, data })),
  );
  const curves = found.filter(({ data }) => data.label === "XYDATA" || data.label === "XYPOINTS");
  if (curves.length === 1) return curves[0]!;
  if (curves.length > 1)
    return {
      line: curves[1]!.data.line,
      found: `${curves.length} spectra in one file (${curves.map(({ block }) => `"${block.title}"`).join(", ")})`,
    };
  const other = found[0];
  if (other !== undefined) return { line: other.data.line, found: `##${other.data.written}= and no curve` };
  return { line: blocks[0]?.line ?? 1, found: "no ##XYDATA= and no ##XYPOINTS=" };
}

function isPairs(data: LabelledRecord): boolean {
  return /^\(\s*XY\s*\.\.\s*XY\s*\)/i.test(data.lines[0]?.text ?? "");
}

/** The record's data: what follows its variable list. */
function body(data: LabelledRecord): LabelledRecord["lines"] {
  const [first, ...rest] = data.lines;
  if (first === undefined || !first.text.startsWith("(")) return data.lines;
  const behind = first.text.replace(/^\((?:[^()]|\([^()]*\))*\)/, "").trim();
  return behind === "" ? rest : [{ line: first.line, text: behind }, ...rest];
}

function readPairs(block: JcampBlock, data: LabelledRecord): Points | Fault {
  const [xFactor, yFactor] = [factor(block, "XFACTOR"), factor(block, "YFACTOR")];
  if (typeof xFactor !== "number") return xFactor;
  if (typeof yFactor !== "number") return yFactor;
  const x: number[] = [];
  const y: number[] = [];
  const at: number[] = [];
  for (const { line, text } of body(data)) {
    const cells = text.split(/[\s,;]+/).filter((cell) => cell !== "");
    for (let i = 0; i < cells.length; i += 2) {
      const first = Number(cells[i]);
      const second = cells[i + 1] === "?" ? NaN : Number(cells[i + 1]);
      if (!Number.isFinite(first) || (!Number.isFinite(second) && cells[i + 1] !== "?"))
        return { line, found: `"${cells.slice(i, i + 2).join(" ")}" where a pair of numbers should be` };
      x.push(first * xFactor);
      y.push(second * yFactor);
      at.push(line);
    }
  }
  const wrong = countFault(block, x.length, data);
  return wrong ?? { x: Float64Array.from(x), y: Float64Array.from(y), lines: Int32Array.from(at) };
}

function readOrdinates(block: JcampBlock, data: LabelledRecord): Points | Fault {
  if (!/^\(\s*X\s*\+\+\s*\(\s*Y\s*\.\.\s*Y\s*\)\s*\)/i.test(data.lines[0]?.text ?? ""))
    return {
      line: data.line,
      found: `##${data.written}=${data.lines[0]?.text ?? ""} where (X++(Y..Y)) should be`,
    };
  const values: Record<string, number> = {};
  for (const label of ["FIRSTX", "LASTX", "NPOINTS"]) {
    const value = numberOf(block, label);
    if (value === null) return { line: data.line, found: `##XYDATA= without a number in ##${label}=` };
    values[label] = value;
  }
  const count = values["NPOINTS"]!;
  if (!Number.isInteger(count) || count < 2)
    return { line: recordOf(block, "NPOINTS")!.line, found: `##NPOINTS=${count}` };
  const [xFactor, yFactor] = [factor(block, "XFACTOR"), factor(block, "YFACTOR")];
  if (typeof xFactor !== "number") return xFactor;
  if (typeof yFactor !== "number") return yFactor;
  const first = values["FIRSTX"]!;
  const step = (values["LASTX"]! - first) / (count - 1);
  const y: number[] = [];
  const at: number[] = [];
  let check: number | null = null;
  for (const { line, text } of body(data)) {
    const decoded = decodeLine(text, count + 1);
    if ("fault" in decoded) return { line, found: `${decoded.fault} (character ${decoded.at})` };
    let { ordinates } = decoded;
    if (check !== null) {
      const repeated = ordinates[0];
      if (repeated === undefined || repeated !== check)
        return {
          line,
          found: `ordinate ${repeated ?? "nothing"} where the line before ends with ${check}: a line is damaged or missing`,
        };
      ordinates = ordinates.slice(1);
    }
    const written = decoded.x * xFactor;
    const rounding = Math.abs(xFactor) * 10 ** -decimals(decoded.xText);
    // It belongs to the first ordinate of the line, but some programs give that of the first new one.
    const due = [...(check === null ? [] : [y.length - 1]), y.length].map((place) => first + place * step);
    const expected = due[0]!;
    if (due.every((one) => Math.abs(written - one) > rounding + Math.abs(step) / 2))
      return {
        line,
        found: `abscissa ${written} where ${Number(expected.toPrecision(10))} is due: points are damaged or missing`,
      };
    for (const value of ordinates) {
      y.push(value);
      at.push(line);
    }
    check = decoded.endsWithDifference ? y[y.length - 1]! : null;
  }
  const wrong = countFault(block, y.length, data) ?? firstFault(block, y[0]!, yFactor, at[0] ?? data.line);
  if (wrong !== null) return wrong;
  return {
    x: Float64Array.from(y, (_, i) => first + i * step),
    y: Float64Array.from(y, (value) => value * yFactor),
    lines: Int32Array.from(at),
  };
}

function countFault(block: JcampBlock, count: number, data: LabelledRecord): Fault | null {
  const wanted = numberOf(block, "NPOINTS");
  if (wanted === null || wanted === count) return null;
  const why = block.ended ? "" : ", and no ##END= follows: the file is cut off";
  return { line: data.line, found: `${count} points where ##NPOINTS= says ${wanted}${why}` };
}

/** FIRSTY is the ordinate itself; some programs write it before the factor. */
function firstFault(block: JcampBlock, first: number, yFactor: number, line: number): Fault | null {
  const text = textOf(block, "FIRSTY");
  const wanted = numberOf(block, "FIRSTY");
  if (text === null || wanted === null || Number.isNaN(first)) return null;
  const rounding = 10 ** -decimals(text) + 1e-6 * Math.abs(wanted);
  const fits = [first * yFactor, first].some(
    (value) => Math.abs(value - wanted) <= rounding + Math.abs(yFactor),
  );
  return fits ? null : { line, found: `first ordinate ${first * yFactor} where ##FIRSTY= says ${wanted}` };
}

function decimals(text: string): number {
  const [, fraction = "", power = "0"] =
    /\.?(\d*)(?:[Ee]([+-]?\d+))?$/.exec(text.includes(".") ? text : `${text}.`) ?? [];
  return fraction.length - Number(power);
}

function recordOf(block: JcampBlock, label: string): LabelledRecord | undefined {
  return block.records.find((record) => record.label === label);
}

function textOf(block: JcampBlock, label: string): string | null {
  const text = recordOf(block, label)
    ?.lines.map((line) => line.text)
    .join(" ");
  return text === undefined || text === "" ? null : text;
}

function numberOf(block: JcampBlock, label: string): number | null {
  const text = textOf(block, label);
  const value = text === null ? NaN : Number(text);
  return Number.isFinite(value) ? value : null;
}

function factor(block: JcampBlock, label: string): number | Fault {
  const record = recordOf(block, label);
  if (record === undefined) return 1;
  const value = numberOf(block, label);
  return value === null || value === 0
    ? { line: record.line, found: `no number in ##${record.written}=` }
    : value;
}

function axisColumn(block: JcampBlock, values: Float64Array): TableColumn {
  const written = textOf(block, "XUNITS") ?? "";
  const known = X_UNITS.find(([pattern]) => pattern.test(written.toUpperCase().trim()));
  return {
    index: 1,
    header: written === "" ? "x" : `XUNITS=${written}`,
    name: known?.[1] ?? "x",
    unit: known?.[2] ?? written,
    values,
  };
}

function signalColumn(block: JcampBlock, values: Float64Array): TableColumn {
  const written = textOf(block, "YUNITS") ?? "";
  const percent = /%|PERCENT/i.test(written);
  return {
    index: 2,
    header: written === "" ? "y" : `YUNITS=${written}`,
    name: /ARBITRARY|COUNTS/i.test(written)
      ? "signal"
      : /^%\s*T$/i.test(written)
        ? "transmittance"
        : written === ""
          ? "y"
          : written
              .replace(/%|PERCENT/gi, "")
              .trim()
              .toLowerCase(),
    unit: percent ? "%" : "",
    values,
  };
}

function factsOf(block: JcampBlock): HeaderFact[] {
  const facts: HeaderFact[] = block.title === "" ? [] : [makeFact("TITLE", block.title, block.line, ".")];
  for (const record of block.records) {
    if (STRUCTURE.has(record.label) || TABLES.has(record.label)) continue;
    const text = record.lines.map((line) => line.text).join(" ");
    if (text === "") continue;
    const label = record.written.replace(/^[$.]/, "");
    const unit = STANDARD_UNITS[record.label];
    const bare = unit !== undefined && /^[+-]?[\d.]+$/.test(text);
    const fact = makeFact(label, bare ? `${text} ${unit}` : text, record.line, ".");
    facts.push(record.label === "PATHLENGTH" ? { ...fact, key: "thickness" } : fact);
  }
  return facts;
}
