import { assumption, doubt, type Note } from "../base/index.ts";
import type { Table } from "../table/index.ts";
import { energyFromReading } from "../units/index.ts";
import type { ChosenColumns } from "./choose-columns.ts";
import type { AxisReading } from "./read-axis.ts";

/** Rows in ascending order of energy, one per energy. */
export interface Points {
  readonly energy_eV: Float64Array;
  /** T as a fraction where a ratio was read, else the reading times its scale. */
  readonly value: Float64Array;
  /** In the unit of `value`; NaN where the column has none for this point; null without column. */
  readonly sigma: Float64Array | null;
  /** Known ratio of each point's noise to the common one: 1/sqrt(readings averaged). */
  readonly relative: Float64Array;
  /** |F - D| of each point where a ratio of counts was formed, else 1: the noise of a count becomes that of T with it. */
  readonly divisor: Float64Array;
  /** D of each point; null where there is no dark reading. */
  readonly dark: Float64Array | null;
  /** Line of the file of each point; the first where several rows were averaged. */
  readonly line: Int32Array;
  readonly dropped: number;
  readonly order: string;
  /** True where the light axis runs in both directions. */
  readonly turnsRound: boolean;
  readonly notes: readonly Note[];
}

interface Row {
  readonly line: number;
  readonly energy: number;
  readonly value: number;
  readonly sigma: number;
  readonly divisor: number;
  readonly dark: number;
}

/** Two energies closer than this part of the median step are one. */
const SAME = 1e-6;

export function gatherPoints(
  table: Table,
  chosen: ChosenColumns,
  axis: AxisReading,
  scale: number,
  sigmaScale: number,
): Points {
  const notes: Note[] = [];
  const read = readRows(table, chosen, axis, scale, sigmaScale, notes);
  const rows = withoutStrays(read, axis, notes);
  const sorted = rows.slice().sort((a, b) => a.energy - b.energy || a.line - b.line);
  const groups = groupRepeated(sorted, notes);
  const { order, turnsRound } = describeOrder(rows, groups, axis.scale.reversed, notes);
  const m = groups.length;
  const points = {
    energy_eV: new Float64Array(m),
    value: new Float64Array(m),
    sigma: chosen.sigma === null ? null : new Float64Array(m),
    relative: new Float64Array(m),
    divisor: new Float64Array(m),
    dark: chosen.dark === null ? null : new Float64Array(m),
  };
  for (let i = 0; i < m; i++) averageGroup(groups[i]!, points, i);
  const line = Int32Array.from(groups, (group) => group[0]!.line);
  return { ...points, line, dropped: table.rows - rows.length, order, turnsRound, notes };
}

function readRows(
  table: Table,
  chosen: ChosenColumns,
  axis: AxisReading,
  scale: number,
  sigmaScale: number,
  notes: Note[],
): Row[] {
  const rows: Row[] = [];
  const blank: number[] = [];
  const dark: number[] = [];
  const outside: number[] = [];
  const x = chosen.axis.column.values;
  const s = chosen.signal.column.values;
  const f = chosen.reference?.column.values ?? null;
  const d = chosen.dark?.column.values ?? null;
  const sd = chosen.sigma?.column.values ?? null;
  for (let i = 0; i < table.rows; i++) {
    const line = table.rowLines[i]!;
    const zero = d === null ? 0 : d[i]!;
    const divisor = f === null ? 1 : f[i]! - zero;
    const reading = s[i]! - zero;
    if (!Number.isFinite(x[i]!) || !Number.isFinite(reading) || !Number.isFinite(divisor)) {
      blank.push(line);
      continue;
    }
    const energy = energyFromReading(x[i]! * axis.factor, axis.scale);
    if (!Number.isFinite(energy)) {
      outside.push(line);
      continue;
    }
    if (!(divisor > 0)) {
      dark.push(line);
      continue;
    }
    const given = sd === null ? NaN : (sd[i]! * sigmaScale) / divisor;
    rows.push({
      line,
      energy,
      value: (reading * scale) / divisor,
      sigma: given > 0 && Number.isFinite(given) ? given : NaN,
      divisor,
      dark: zero,
    });
  }
  if (blank.length > 0)
    notes.push(
      doubt(
        "cells-missing",
        "reading.columns",
        `${count(blank.length, "row")} without a number in the axis or the signal left out: ${lines(blank)}${firstBadCell(table, blank[0]!)}`,
        "look at these lines of the file: each cell has to hold one number, with the same decimal mark everywhere",
      ),
    );
  if (outside.length > 0)
    notes.push(
      doubt(
        "axis-not-positive",
        "reading.columns",
        `${count(outside.length, "row")} with a light axis of zero or below left out: ${lines(outside)}`,
        "name the light axis with axis.column",
      ),
    );
  if (dark.length > 0)
    notes.push(
      doubt(
        "reference-too-weak",
        "reading.columns",
        `${count(dark.length, "row")} where the reference does not exceed the dark reading left out: ${lines(dark)}`,
        "measure the reference with more light, or cut the range with window_eV",
      ),
    );
  return rows;
}

/** What stands where the first of these rows should have a number. */
function firstBadCell(table: Table, line: number): string {
  const cell = table.skipped.find((one) => one.line === line && one.column !== null);
  if (cell === undefined) return "";
  return cell.found === ""
    ? `; column ${cell.column} of line ${line} is empty`
    : `; column ${cell.column} of line ${line} holds "${cell.found}"`;
}

/** A row counts as a stray where its energy misses the gap between its neighbours by more than this many steps. */
const STRAY_STEPS = 20;
/** More strays than this, or than a thousandth of all rows, are a file in another order and no slips. */
const MOST_STRAYS = 3;

/**
 * Rows of a file in order whose energy alone is out of it: a wrong digit or decimal mark. They are left out and said,
 * since nothing tells where they belong; a file that turns round otherwise is kept as it is.
 */
function withoutStrays(rows: readonly Row[], axis: AxisReading, notes: Note[]): readonly Row[] {
  const steps = rows.slice(1).map((row, i) => row.energy - rows[i]!.energy);
  const sizes = steps.map(Math.abs).sort((a, b) => a - b);
  const reach = STRAY_STEPS * (sizes[sizes.length >> 1] ?? 0);
  const direction = Math.sign(steps.reduce((sum, step) => sum + Math.sign(step), 0));
  if (direction === 0 || reach === 0) return rows;
  const strays = new Set<number>();
  for (let i = 1; i + 1 < rows.length; i++) {
    const before = direction * rows[i - 1]!.energy;
    const after = direction * rows[i + 1]!.energy;
    const here = direction * rows[i]!.energy;
    if (strays.has(i - 1) || !(before < after)) continue;
    if (here > after + reach || here < before - reach) strays.add(i);
  }
  if (strays.size === 0 || strays.size > Math.max(MOST_STRAYS, rows.length / 1000)) return rows;
  const kept = rows.filter((_, i) => !strays.has(i));
  if (kept.some((row, i) => i > 0 && direction * (row.energy - kept[i - 1]!.energy) < 0)) return rows;
  const first = [...strays][0]!;
  const say = (i: number): string => short(rows[i]!.energy);
  notes.push(
    doubt(
      "axis-row-out-of-order",
      "reading.columns",
      `${count(strays.size, "row")} left out whose light axis does not lie between its neighbours: ${lines([...strays].map((i) => rows[i]!.line))}; line ${rows[first]!.line} gives ${say(first)} eV between ${say(first - 1)} and ${say(first + 1)} eV${axis.scale.unit === "eV" ? "" : ` (read from ${axis.scale.unit})`}`,
      "correct a wrong digit or decimal mark in that line, or delete the line",
    ),
  );
  return kept;
}

function short(energy_eV: number): string {
  return String(Number(energy_eV.toPrecision(8)));
}

function describeOrder(
  rows: readonly Row[],
  groups: readonly (readonly Row[])[],
  reversed: boolean,
  notes: Note[],
): { readonly order: string; readonly turnsRound: boolean } {
  let up = 0;
  let down = 0;
  const turns: number[] = [];
  let last = 0;
  for (let i = 1; i < rows.length; i++) {
    const step = Math.sign(rows[i]!.energy - rows[i - 1]!.energy);
    if (step > 0) up++;
    if (step < 0) down++;
    if (step !== 0 && last !== 0 && step !== last) turns.push(rows[i]!.line);
    if (step !== 0) last = step;
  }
  const oneWay = (order: string) => ({ order, turnsRound: false });
  if (down === 0) return oneWay(reversed ? "the file runs down in wavelength" : "ascending in the file");
  if (up === 0)
    return oneWay(
      reversed
        ? "ascending wavelengths, reversed to ascending energy"
        : "descending in the file, reversed to ascending energy",
    );
  const averaged = groups.filter((group) => group.length > 1).length;
  const together =
    averaged === 0
      ? "all rows are sorted into one curve"
      : `all rows are sorted into one curve, in which the readings of ${count(averaged, "energy", "energies")} that ${averaged === 1 ? "occurs" : "occur"} more than once are averaged`;
  notes.push(
    doubt(
      "axis-not-monotonic",
      "series.gap_eV",
      `the light axis turns round ${count(turns.length, "time")} (${lines(turns)}): sweeps up and down, or files joined; ${together}, so hysteresis of the axis would broaden the lines, and whatever changed between the sweeps (power, temperature, place) is mixed`,
      "fit each sweep from a file of its own and compare",
    ),
  );
  return { order: "not in order, sorted to ascending energy", turnsRound: true };
}

function groupRepeated(sorted: readonly Row[], notes: Note[]): Row[][] {
  const steps: number[] = [];
  for (let i = 1; i < sorted.length; i++) {
    const step = sorted[i]!.energy - sorted[i - 1]!.energy;
    if (step > 0) steps.push(step);
  }
  steps.sort((a, b) => a - b);
  const same = SAME * (steps[steps.length >> 1] ?? 0);
  const groups: Row[][] = [];
  const repeated: number[] = [];
  for (const row of sorted) {
    const group = groups.at(-1);
    if (group !== undefined && row.energy - group[0]!.energy <= same) {
      if (group.length === 1) repeated.push(group[0]!.line);
      group.push(row);
    } else groups.push([row]);
  }
  if (repeated.length > 0)
    notes.push(
      assumption(
        "repeated-axis-averaged",
        "reading.columns",
        `${count(repeated.length, "place")} of the light axis stand more than once (${sorted.length} rows, ${groups.length} points) and are averaged, with weights where a standard deviation is given; first at ${lines(repeated)}`,
        "where these are sweeps or measurements joined in one file, split it and fit each alone; else write the light axis with more digits, so that neighbouring readings do not fall together",
      ),
    );
  return groups;
}

interface Arrays {
  readonly energy_eV: Float64Array;
  readonly value: Float64Array;
  readonly sigma: Float64Array | null;
  readonly relative: Float64Array;
  readonly divisor: Float64Array;
  readonly dark: Float64Array | null;
}

function averageGroup(group: readonly Row[], points: Arrays, i: number): void {
  const n = group.length;
  const weighted = group.every((row) => row.sigma > 0);
  let weights = 0;
  let energy = 0;
  let value = 0;
  let divisor = 0;
  for (const row of group) {
    const w = weighted ? 1 / (row.sigma * row.sigma) : 1;
    weights += w;
    energy += w * row.energy;
    value += w * row.value;
    divisor += row.divisor;
  }
  points.energy_eV[i] = n === 1 ? group[0]!.energy : energy / weights;
  points.value[i] = n === 1 ? group[0]!.value : value / weights;
  points.relative[i] = 1 / Math.sqrt(n);
  points.divisor[i] = divisor / n;
  if (points.dark !== null) points.dark[i] = group.reduce((sum, row) => sum + row.dark, 0) / n;
  if (points.sigma !== null) {
    const given = group.filter((row) => row.sigma > 0);
    points.sigma[i] = weighted
      ? 1 / Math.sqrt(weights)
      : given.reduce((sum, row) => sum + row.sigma, 0) / given.length / Math.sqrt(n);
  }
}

export function count(number: number, word: string, plural = `${word}s`): string {
  return `${number} ${number === 1 ? word : plural}`;
}

/** `line 7`, `lines 7, 9, 12`, and how many more. */
export function lines(numbers: readonly number[]): string {
  const shown = numbers.slice(0, 8).join(", ");
  const more = numbers.length > 8 ? ` and ${numbers.length - 8} more` : "";
  return `line${numbers.length === 1 ? "" : "s"} ${shown}${more}`;
}
