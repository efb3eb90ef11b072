import type { LineResult, RunglineResult } from "../../protocol/index.ts";
import { linearAxis, logarithmicAxis, quantumNumberAxis } from "./axis.ts";
import { ACCENT, DATA, INK, MUTED, paperColourOfN } from "./colours.ts";
import { ONE_COLUMN_MM, type Figure, type LegendEntry, type Mark } from "./figure.ts";

type Quantity = LineResult["energy_eV"];

/** The figures that a referee asks of one series; empty where no line was found. */
export function seriesFigures(result: RunglineResult): readonly Figure[] {
  if (result.lines.length === 0) return [];
  return [
    ...(result.series === null ? [] : [levelFigure(result)]),
    widthFigure(result),
    strengthFigure(result),
    asymmetryFigure(result),
    ...(result.series !== null && result.series.ranges.length > 1 ? [rangesFigure(result)] : []),
  ].filter((figure) => figure !== null);
}

/** n minus its total shift delta_0 + delta_2/(n - delta_0)^2. */
function effectiveN(n: number, result: RunglineResult): number {
  const first = result.series?.defect0.value ?? 0;
  return n - first - (result.series?.defect2.value ?? 0) / (n - first) ** 2;
}

function ends(
  quantities: readonly Quantity[],
  factor: number,
): { low: (number | null)[]; high: (number | null)[] } {
  return {
    low: quantities.map(({ value, sigma, low }) =>
      scaled(low ?? (value !== null && sigma !== null ? value - sigma : null), factor),
    ),
    high: quantities.map(({ value, sigma, high }) =>
      scaled(high ?? (value !== null && sigma !== null ? value + sigma : null), factor),
    ),
  };
}

function scaled(value: number | null, factor: number): number | null {
  return value === null ? null : value * factor;
}

function linePoints(
  lines: readonly LineResult[],
  x: (line: LineResult) => number,
  quantity: (line: LineResult) => Quantity,
  factor: number,
  leftOut: (line: LineResult) => boolean = (line) => !line.in_level_fit,
): Mark & { kind: "points" } {
  const quantities = lines.map(quantity);
  return {
    kind: "points",
    x: lines.map(x),
    y: quantities.map(({ value }) => scaled(value, factor)),
    ...ends(quantities, factor),
    colour: lines.map(({ n }) => paperColourOfN(n)),
    hollow: lines.map(leftOut),
  };
}

const LAW: LegendEntry = { text: "law", colour: INK };
const HOLLOW = "Hollow: not in the fit of the level law.";
const HOLLOW_IN_LAW = "Hollow: not in the fit of this law.";

/** Lines outside the range of n of the law that is drawn. */
function outside(law: { readonly fit_n: readonly [number, number] } | null): (line: LineResult) => boolean {
  return ({ n }) => law !== null && (n < law.fit_n[0] || n > law.fit_n[1]);
}

function levelFigure(result: RunglineResult): Figure {
  const { lines } = result;
  const series = result.series!;
  const x = (line: LineResult): number => effectiveN(line.n, result) ** -2;
  const [gap, rydberg] = [series.gap_eV.value, series.rydberg_eV.value];
  const widest = Math.max(...lines.map(x));
  const offsets = linePoints(lines, x, (line) => line.law_offset_eV, 1e6);
  // A level outside the fitted range may lie far off and would press the others flat.
  const fitted = lines.filter((line) => line.in_level_fit).map((line) => line.law_offset_eV);
  const reach =
    Math.max(...fitted.map(({ value, sigma }) => Math.abs(value ?? 0) + 1.3 * (sigma ?? 0)), 1e-9) * 1e6;
  const far = lines.filter((line) => Math.abs(line.law_offset_eV.value ?? 0) * 1e6 > 1.3 * reach);
  const law: Mark[] =
    gap === null || rydberg === null
      ? []
      : [
          {
            kind: "line",
            x: [0, 1.05 * widest],
            y: [gap, gap - 1.05 * widest * rydberg],
            colour: INK,
            width: 0.7,
          },
        ];
  const across = { ...linearAxis("1/(*n* − *δ*)^{2}", [0, widest], { fromZero: true }) };
  return {
    name: "levels",
    caption: `Line energies *E*_{n} against 1/(*n* − *δ*)^{2} with the level law fitted to *n* = ${series.fit_n[0]} to ${series.fit_n[1]}, and their distance to it. ${HOLLOW}${
      far.length === 0 ? "" : ` Outside the lower panel: *n* = ${far.map(({ n }) => n).join(", ")}.`
    }`,
    width_mm: ONE_COLUMN_MM,
    height_mm: 78,
    legend: [],
    panels: [
      {
        x: { ...across, title: "", ticks: across.ticks.map(({ at }) => ({ at, label: "" })) },
        y: linearAxis("*E*_{n} / eV", [...lines.map((line) => line.energy_eV.value), gap]),
        marks: [
          ...law,
          linePoints(lines, x, (line) => line.energy_eV, 1),
          ...labelsOfN(lines, x, (line) => line.energy_eV.value, across.high),
        ],
        share: 1.5,
      },
      {
        x: across,
        y: linearAxis("(*E*_{n} − law) / µeV", [-1.2 * reach, 1.2 * reach], { pad: 0, count: 4 }),
        marks: [{ kind: "rule", y: 0, colour: MUTED }, offsets],
        share: 1,
      },
    ],
  };
}

/** The n beside its point, as long as neighbours leave room. */
function labelsOfN(
  lines: readonly LineResult[],
  x: (line: LineResult) => number,
  y: (line: LineResult) => number | null,
  high: number,
): Mark[] {
  let last = Infinity;
  return [...lines]
    .sort((a, b) => a.n - b.n)
    .flatMap((line): Mark[] => {
      const at = x(line);
      const value = y(line);
      if (value === null || (last - at) / high < 0.07) return [];
      last = at;
      return [{ kind: "label", x: at, y: value, text: String(line.n), colour: MUTED, lift: 4.5 }];
    });
}

function fineN(lines: readonly LineResult[]): number[] {
  const [first, last] = [
    Math.min(...lines.map(({ n }) => n)) * 0.93,
    Math.max(...lines.map(({ n }) => n)) * 1.05,
  ];
  return Array.from({ length: 60 }, (_, i) => first * (last / first) ** (i / 59));
}

function widthFigure(result: RunglineResult): Figure {
  const { lines, width_law: law } = result;
  const n = fineN(lines);
  const first = lines.find((line) => line.width_eV.value !== null);
  const marks: Mark[] = [];
  const legend: LegendEntry[] = [];
  if (first !== undefined) {
    const start = first.width_eV.value! * first.n ** 3 * 1e6;
    marks.push({
      kind: "line",
      x: n,
      y: n.map((one) => start * one ** -3),
      colour: DATA,
      width: 0.7,
      dash: "3 2",
    });
    legend.push({ text: "*n*^{−3} through the first", colour: DATA, dash: "3 2" });
  }
  const [floor, coefficient, exponent] = [
    law?.floor_eV.value,
    law?.coefficient_eV.value,
    law?.exponent.value,
  ];
  if (law !== null && typeof coefficient === "number" && typeof exponent === "number") {
    const gaussian = result.protocol.width.floor_kind === "gaussian";
    const base = (one: number): number =>
      law.base === "p-envelope"
        ? ((one * one - 1) / one ** 5) ** (exponent / 3)
        : (one - (law.base === "n-delta" ? (result.series?.defect0.value ?? 0) : 0)) ** -exponent;
    const width = (one: number): number => {
      const own = coefficient * base(one);
      return 1e6 * (gaussian ? Math.hypot(own, floor ?? 0) : own + (floor ?? 0));
    };
    marks.push({ kind: "line", x: n, y: n.map(width), colour: INK, width: 0.8 });
    legend.push(LAW);
  }
  const values = lines.map((line) => scaled(line.width_eV.value, 1e6));
  return {
    name: "widths",
    caption: `Full widths at half maximum *Γ*_{n} (Lorentzian part) with the width law${
      law === null ? " not determined" : ` fitted to *n* = ${law.fit_n[0]} to ${law.fit_n[1]}`
    }; both axes logarithmic.${law === null ? "" : ` ${HOLLOW_IN_LAW}`}`,
    width_mm: ONE_COLUMN_MM,
    height_mm: 62,
    legend,
    panels: [
      {
        x: quantumNumberAxis(
          lines.map((line) => line.n),
          "logarithmic",
        ),
        y: logarithmicAxis("*Γ*_{n} / µeV", values),
        marks: [
          ...marks,
          linePoints(
            lines,
            (line) => line.n,
            (line) => line.width_eV,
            1e6,
            outside(law),
          ),
        ],
        share: 1,
      },
    ],
  };
}

function strengthFigure(result: RunglineResult): Figure {
  const { lines, strength_law: law } = result;
  const n = fineN(lines);
  const coefficient = law?.coefficient.value ?? null;
  const marks: Mark[] = [];
  const legend: LegendEntry[] = [];
  if (law !== null && coefficient !== null) {
    const delta = law.base === "n-delta" ? (result.series?.defect0.value ?? 0) : 0;
    const shape = (one: number): number =>
      law.law === "p-envelope"
        ? (one * one - 1) / one ** 5
        : law.law === "sheet"
          ? (one - 0.5) ** -3
          : (one - delta) ** -3;
    marks.push({
      kind: "line",
      x: n,
      y: n.map((one) => 1e3 * coefficient * shape(one)),
      colour: INK,
      width: 0.8,
    });
    legend.push(LAW);
  }
  const unit = result.reading.signal_unit === "1/cm" ? "(meV/cm)" : "meV";
  return {
    name: "strengths",
    caption: `Areas *A*_{n} of the lines with the strength law${
      law === null ? " not determined" : ` fitted to *n* = ${law.fit_n[0]} to ${law.fit_n[1]}`
    }; both axes logarithmic.${law === null ? "" : ` ${HOLLOW_IN_LAW}`}`,
    width_mm: ONE_COLUMN_MM,
    height_mm: 62,
    legend,
    panels: [
      {
        x: quantumNumberAxis(
          lines.map((line) => line.n),
          "logarithmic",
        ),
        y: logarithmicAxis(
          `*A*_{n} / ${unit}`,
          lines.map((line) => scaled(line.area.value, 1e3)),
        ),
        marks: [
          ...marks,
          linePoints(
            lines,
            (line) => line.n,
            (line) => line.area,
            1e3,
            outside(law),
          ),
        ],
        share: 1,
      },
    ],
  };
}

function asymmetryFigure(result: RunglineResult): Figure | null {
  const { lines, protocol } = result;
  // One shared or held value is a number and no figure.
  if (new Set(lines.map((line) => line.asymmetry.value)).size < 2) return null;
  const q = linePoints(
    lines,
    (line) => line.n,
    (line) => line.asymmetry,
    1,
    () => false,
  );
  return {
    name: "asymmetries",
    caption: `Asymmetry *q*_{n} of the lines (protocol: ${protocol.lines.asymmetry}).`,
    width_mm: ONE_COLUMN_MM,
    height_mm: 55,
    legend: [],
    panels: [
      {
        x: quantumNumberAxis(
          lines.map((line) => line.n),
          "linear",
        ),
        y: linearAxis("*q*_{n}", [...q.low!, ...q.high!, 0]),
        marks: [{ kind: "rule", y: 0, colour: MUTED }, q],
        share: 1,
      },
    ],
  };
}

function rangesFigure(result: RunglineResult): Figure {
  const series = result.series!;
  const highest = Math.max(...series.ranges.map((one) => one.n_max));
  const ranges = series.ranges.filter((one) => one.n_max === highest);
  const centre = series.gap_eV.value ?? 0;
  const factor = 1e6;
  const moved = (value: number | null): number | null => (value === null ? null : (value - centre) * factor);
  const x = ranges.map((one) => one.n_min);
  const defects = ranges.map((one) => one.defect0);
  const gaps: Mark = {
    kind: "points",
    x,
    y: ranges.map((one) => moved(one.gap_eV.value)),
    low: ranges.map((one) => moved(one.gap_eV.low)),
    high: ranges.map((one) => moved(one.gap_eV.high)),
    colour: INK,
    hollow: ranges.map((one) => one.n_min !== series.fit_n[0]),
  };
  const across = quantumNumberAxis(x, "linear", "first *n* of the fit");
  return {
    name: "ranges",
    caption: `Gap (its distance to the result) and quantum defect when the level law is fitted from another first *n*, up to *n* = ${highest}. Filled: the range chosen. The gap axis is cut where the law fails.`,
    width_mm: ONE_COLUMN_MM,
    height_mm: 78,
    legend: [],
    panels: [
      {
        x: { ...across, title: "", ticks: across.ticks.map(({ at }) => ({ at, label: "" })) },
        y: linearAxis("(*E*_{g} − result) / µeV", cutAt(gaps.low!.concat(gaps.high!)), { count: 4 }),
        marks: [{ kind: "rule", y: 0, colour: ACCENT, dash: "3 2" }, gaps],
        share: 1,
      },
      {
        x: across,
        y: linearAxis("*δ*", cutAt(defects.flatMap(({ low, high }) => [low, high])), { count: 4 }),
        marks: [
          ...(series.defect0.value === null
            ? []
            : [{ kind: "rule" as const, y: series.defect0.value, colour: ACCENT, dash: "3 2" }]),
          {
            kind: "points",
            x,
            y: defects.map(({ value }) => value),
            low: defects.map(({ low }) => low),
            high: defects.map(({ high }) => high),
            colour: INK,
            hollow: ranges.map((one) => one.n_min !== series.fit_n[0]),
          },
        ],
        share: 1,
      },
    ],
  };
}

/** The few ends that would press all others flat do not stretch the axis: five times the middle spread is shown. */
function cutAt(values: readonly (number | null)[]): number[] {
  const known = values.filter((value): value is number => value !== null).sort((a, b) => a - b);
  if (known.length < 4) return known;
  const middle = known[Math.floor(known.length / 2)]!;
  const reach =
    2.5 * Math.max(known[Math.floor(0.75 * known.length)]! - known[Math.floor(0.25 * known.length)]!, 1e-12);
  return known.filter((value) => Math.abs(value - middle) <= reach);
}
