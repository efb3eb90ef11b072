import type { PowerLineResult, PowerResult } from "../../protocol/index.ts";
import { logarithmicAxis, linearAxis, quantumNumberAxis } from "./axis.ts";
import { ACCENT, DATA, INK, MUTED, paperColourOfN } from "./colours.ts";
import { FULL_WIDTH_MM, ONE_COLUMN_MM, type Figure, type LegendEntry, type Mark } from "./figure.ts";

/** Bleaching, its coefficient and the volume one exciton blocks, against power and n. */
export function powerFigures(power: PowerResult): readonly Figure[] {
  return [bleachingFigure(power), saturationFigure(power), volumeFigure(power)].filter(
    (figure) => figure !== null,
  );
}

function bleachingFigure(power: PowerResult): Figure | null {
  const curves = power.curves.lines.filter((curve) => curve.data.length > 0);
  if (curves.length === 0) return null;
  const zero = (n: number): number | null => power.lines.find((line) => line.n === n)?.area0.value ?? null;
  const marks: Mark[] = [];
  const values: (number | null)[] = [0, 1];
  const powers: number[] = [];
  for (const curve of curves) {
    const area0 = zero(curve.n);
    if (area0 === null || !(area0 > 0)) continue;
    const colour = paperColourOfN(curve.n);
    const share = (value: number | null): number | null => (value === null ? null : value / area0);
    marks.push({ kind: "line", x: power.curves.power_uW, y: curve.area.map(share), colour, width: 0.7 });
    const around = (sign: number): (number | null)[] =>
      curve.data.map(({ area, area_sigma }) =>
        area === null || area_sigma === null ? null : (area + sign * area_sigma) / area0,
      );
    marks.push({
      kind: "points",
      x: curve.data.map(({ power_uW }) => power_uW),
      y: curve.data.map(({ area }) => share(area)),
      low: around(-1),
      high: around(1),
      colour,
      size: 1.7,
    });
    const measured = curve.data.filter(
      ({ area, area_sigma }) => area !== null && (area_sigma ?? 0) < 0.5 * area0,
    );
    values.push(...measured.map(({ area }) => share(area)));
    powers.push(...curve.data.map(({ power_uW }) => power_uW).filter((one) => one > 0));
  }
  marks.push(...endLabels(power, curves, zero));
  return {
    name: "bleaching",
    caption:
      "Areas of the lines over their values at zero power, against power, with the saturation law. A spectrum at zero power has no place on the logarithmic axis.",
    width_mm: FULL_WIDTH_MM,
    height_mm: 82,
    legend: curves.map(({ n }) => ({ text: `*n* = ${n}`, colour: paperColourOfN(n), shape: "circle" })),
    panels: [
      {
        x: logarithmicAxis("Power / µW", [...powers, 1.25 * Math.max(...powers)]),
        y: linearAxis(
          "*A*_{n} / *A*_{n,0}",
          values.map((value) => (value === null ? null : Math.min(1.6, Math.max(-0.3, value)))),
        ),
        marks: [{ kind: "rule", y: 1, colour: MUTED, dash: "2 2" }, ...marks],
        share: 1,
      },
    ],
  };
}

/** n at the right end of its curve, as long as neighbours leave room: the colours alone are too alike. */
function endLabels(
  power: PowerResult,
  curves: PowerResult["curves"]["lines"],
  zero: (n: number) => number | null,
): Mark[] {
  const highest = Math.max(...curves.flatMap(({ data }) => data.map(({ power_uW }) => power_uW)));
  const at = power.curves.power_uW.findLastIndex((one) => one <= highest);
  let last = Infinity;
  return [...curves]
    .sort((a, b) => a.n - b.n)
    .flatMap(({ n, area }): Mark[] => {
      const [end, area0] = [area[at] ?? null, zero(n)];
      if (end === null || area0 === null || !(area0 > 0) || Math.abs(last - end / area0) < 0.06) return [];
      last = end / area0;
      return [
        {
          kind: "label",
          x: power.curves.power_uW[at]! * 1.06,
          y: last,
          text: `*n* = ${n}`,
          colour: paperColourOfN(n),
          anchor: "start",
          lift: 3,
        },
      ];
    });
}

function saturationFigure(power: PowerResult): Figure | null {
  const seen = power.lines.filter(
    (line) => line.reading === "bleaches" && (line.saturation_per_uW.value ?? 0) > 0,
  );
  const limits = power.lines.filter(
    (line) => line.reading === "not-seen" && (line.saturation_limit_per_uW ?? 0) > 0,
  );
  if (seen.length === 0) return null;
  const marks: Mark[] = [...limitMarks(limits, (line) => line.saturation_limit_per_uW)];
  const legend: LegendEntry[] = [{ text: "measured", colour: INK, shape: "circle" }];
  if (limits.length > 0) legend.push({ text: "upper limit (95 %)", colour: DATA, shape: "down" });
  const { exponent } = power;
  if (exponent !== null && exponent.exponent.value !== null) {
    const own = guide(seen, (line) => line.saturation_per_uW.value, exponent.exponent.value, exponent.fit_n);
    if (own !== null) {
      marks.push({ kind: "line", ...own, colour: INK, width: 0.7 });
      legend.push({ text: "power of *n* fitted", colour: INK });
    }
    if (exponent.predicted.value !== null) {
      const predicted = guide(
        seen,
        (line) => line.saturation_per_uW.value,
        exponent.predicted.value,
        exponent.fit_n,
      );
      if (predicted !== null) {
        marks.push({ kind: "line", ...predicted, colour: ACCENT, width: 0.7, dash: "3 2" });
        legend.push({ text: "exponent from widths and areas", colour: ACCENT, dash: "3 2" });
      }
    }
  }
  return {
    name: "saturation",
    caption: "Bleaching *S*_{n} at low power against *n*; both axes logarithmic.",
    width_mm: ONE_COLUMN_MM,
    height_mm: 70,
    legend,
    panels: [
      {
        x: quantumNumberAxis(
          [...seen, ...limits].map(({ n }) => n),
          "logarithmic",
        ),
        y: logarithmicAxis("*S*_{n} / µW^{−1}", [
          ...seen.map((line) => line.saturation_per_uW.value),
          ...limits.map((line) => line.saturation_limit_per_uW),
        ]),
        marks: [...marks, quantities(seen, (line) => line.saturation_per_uW)],
        share: 1,
      },
    ],
  };
}

function volumeFigure(power: PowerResult): Figure | null {
  const seen = power.lines.filter((line) => (line.blockade_volume_um3.value ?? 0) > 0);
  const limits = power.lines.filter(
    (line) => line.blockade_volume_um3.value === null && (line.blockade_volume_limit_um3 ?? 0) > 0,
  );
  if (seen.length === 0) return null;
  const marks: Mark[] = [...limitMarks(limits, (line) => line.blockade_volume_limit_um3)];
  const legend: LegendEntry[] = [{ text: "measured", colour: INK, shape: "circle" }];
  if (limits.length > 0) legend.push({ text: "upper limit (95 %)", colour: DATA, shape: "down" });
  const expected = power.lines.filter((line) => (line.expected_volume_um3.value ?? 0) > 0);
  if (expected.length > 1) {
    marks.push({
      kind: "line",
      x: expected.map(({ n }) => n),
      y: expected.map((line) => line.expected_volume_um3.value),
      colour: ACCENT,
      width: 0.8,
      dash: "3 2",
    });
    legend.push({ text: "expected of the interaction", colour: ACCENT, dash: "3 2" });
  }
  return {
    name: "volumes",
    caption:
      "Volume *V*_{n} that one exciton blocks, against *n*, with the volume expected of the interaction; both axes logarithmic.",
    width_mm: ONE_COLUMN_MM,
    height_mm: 70,
    legend,
    panels: [
      {
        x: quantumNumberAxis(
          [...seen, ...limits].map(({ n }) => n),
          "logarithmic",
        ),
        y: logarithmicAxis("*V*_{n} / µm^{3}", [
          ...seen.map((line) => line.blockade_volume_um3.value),
          ...limits.map((line) => line.blockade_volume_limit_um3),
          ...expected.map((line) => line.expected_volume_um3.value),
        ]),
        marks: [...marks, quantities(seen, (line) => line.blockade_volume_um3)],
        share: 1,
      },
    ],
  };
}

function quantities(
  lines: readonly PowerLineResult[],
  pick: (line: PowerLineResult) => { value: number | null; low: number | null; high: number | null },
): Mark {
  return {
    kind: "points",
    x: lines.map(({ n }) => n),
    y: lines.map((line) => pick(line).value),
    low: lines.map((line) => pick(line).low),
    high: lines.map((line) => pick(line).high),
    colour: lines.map(({ n }) => paperColourOfN(n)),
  };
}

function limitMarks(
  lines: readonly PowerLineResult[],
  pick: (line: PowerLineResult) => number | null,
): Mark[] {
  if (lines.length === 0) return [];
  return [
    {
      kind: "points",
      x: lines.map(({ n }) => n),
      y: lines.map(pick),
      colour: DATA,
      shape: "down",
      hollow: lines.map(() => true),
    },
  ];
}

/** A power of n through the geometric middle of the points. */
function guide(
  lines: readonly PowerLineResult[],
  pick: (line: PowerLineResult) => number | null,
  exponent: number,
  [from, to]: readonly [number, number],
): { x: number[]; y: number[] } | null {
  const used = lines.filter(({ n }) => n >= from && n <= to);
  if (used.length === 0) return null;
  const middle =
    used.reduce((sum, line) => sum + Math.log(pick(line)!) - exponent * Math.log(line.n), 0) / used.length;
  const x = [from * 0.95, to * 1.05];
  return { x, y: x.map((n) => Math.exp(middle + exponent * Math.log(n))) };
}
