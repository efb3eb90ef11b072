import { defectAt, WIDTH, widthLaw, type WidthBase, type WidthFloorKind } from "../laws/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { fitWidths } from "../series/index.ts";
import { fitCurve, type CurveFit } from "./fit-curve.ts";
import {
  addForms,
  formCovariance,
  formsCovariance,
  placeOf,
  seriesOf,
  type LinearForm,
  type LineSeries,
} from "./line-table.ts";
import { distinct } from "./saturation.ts";
import { LINE_QUANTITIES, type LineTable } from "./types.ts";

/** Width of one line against power: at zero power, and how it grows beyond what the sweep itself does. */
export interface Broadening {
  readonly zero: number;
  readonly zeroForm: LinearForm;
  /** Relative initial growth per uW; null where the widths are shared by all powers. */
  readonly growth: { readonly value: number; readonly sigma: number; readonly form: LinearForm } | null;
  /** root: G_0 sqrt(1 + 2 t P), the power broadening of a two-level line; linear: G_0 (1 + t P). */
  readonly model: "root" | "linear";
  readonly highest: number;
}

/** Width over its value at zero power, without what the sweep does. */
export function broadeningAt(one: Broadening, power: number): number {
  const t = Math.max(0, one.growth?.value ?? 0);
  return one.model === "root" ? Math.sqrt(1 + 2 * t * power) : 1 + t * power;
}

/**
 * What      G(P) = G_0 b(P) sqrt(1 + 2 S_A P): b by the better of two laws of broadening with one parameter, the root
 *           only where the swept laser bleaches the line it reads (S_A then is the bleaching of the area, else 0).
 */
export function fitBroadening(table: LineTable, line: number, swept: Sweep | null): Broadening | null {
  const sweep = swept === null ? 0 : Math.max(0, swept.value);
  const one = broadeningWith(table, line, sweep);
  if (one === null || swept === null || one.growth === null) return one;
  // S itself is uncertain, and what is left as broadening moves against it.
  const step = swept.sigma;
  const moved = broadeningWith(table, line, sweep + step, one.model);
  if (moved === null || moved.growth === null || !(step > 0)) return one;
  const growthBySweep = (moved.growth.value - one.growth.value) / step;
  const zeroBySweep = (moved.zero - one.zero) / step;
  const growthForm = addForms([
    { form: one.growth.form, factor: 1 },
    { form: swept.form, factor: growthBySweep },
  ]);
  return {
    ...one,
    zeroForm: addForms([
      { form: one.zeroForm, factor: 1 },
      { form: swept.form, factor: zeroBySweep },
    ]),
    growth: {
      value: one.growth.value,
      sigma: Math.sqrt(Math.max(0, formCovariance(table, growthForm, growthForm))),
      form: growthForm,
    },
  };
}

/** Bleaching of the area by the sweep itself, with its standard error and form. */
export interface Sweep {
  readonly value: number;
  readonly sigma: number;
  readonly form: LinearForm;
}

function broadeningWith(
  table: LineTable,
  line: number,
  sweep: number,
  only?: "root" | "linear",
): Broadening | null {
  const series = seriesOf(table, LINE_QUANTITIES.width, line);
  if (series.values.length === 0) return null;
  const places = series.spectra.map((j) => placeOf(table, LINE_QUANTITIES.width, j, line));
  const highest = Math.max(...series.power);
  const lowest = series.power.indexOf(Math.min(...series.power));
  const alone = (): Broadening => ({
    zero: series.values[lowest]! / Math.sqrt(1 + 2 * sweep * series.power[lowest]!),
    zeroForm: {
      places: [places[lowest]!],
      weights: [1 / Math.sqrt(1 + 2 * sweep * series.power[lowest]!)],
    },
    growth: null,
    model: "root",
    highest,
  });
  const spread = Math.max(...series.values) - Math.min(...series.values);
  const shared = spread <= 1e-9 * Math.abs(series.values[0]!);
  if (shared || distinct(series.power) < 2) return alone();
  const root = only === "linear" ? null : fitOne(series, sweep, "root");
  const linear = only === "root" ? null : fitOne(series, sweep, "linear");
  const model = root === null || (linear !== null && linear.chi2 < root.chi2 - 4) ? "linear" : "root";
  const fit = model === "root" ? root : linear;
  if (fit === null || !(fit.values[0]! > 0)) return alone();
  const r = places.length;
  return {
    zero: fit.values[0]!,
    zeroForm: { places, weights: fit.gain.slice(0, r) },
    growth: {
      value: fit.values[1]!,
      sigma: Math.sqrt(fit.covariance[3]!),
      form: { places, weights: fit.gain.slice(r) },
    },
    model,
    highest,
  };
}

function fitOne(series: LineSeries, sweep: number, model: "root" | "linear"): CurveFit | null {
  const highest = Math.max(...series.power);
  return fitCurve({
    data: series.values,
    covariance: series.covariance,
    parameters: 2,
    at: (theta, i, out) => {
      const power = series.power[i]!;
      const swept = Math.sqrt(Math.max(0, 1 + 2 * sweep * power));
      const grown = model === "root" ? Math.sqrt(1 + 2 * theta[1]! * power) : 1 + theta[1]! * power;
      out[0] = swept * grown;
      out[1] = theta[0]! * swept * (model === "root" ? power / grown : power);
      return theta[0]! * swept * grown;
    },
    start: Float64Array.of(series.values[0]!, 0),
    lower: Float64Array.of(-Infinity, (model === "root" ? -0.45 : -0.9) / highest),
  });
}

export interface WidthsAtZero {
  /** Homogeneous width of each line, its form, and where it comes from. */
  readonly width: Float64Array;
  readonly forms: readonly (LinearForm | null)[];
  readonly from: readonly ("width-law" | "width" | "not determined")[];
  /** Part of the width that falls with n, of the whole, where the law has a floor that adds; 1 without one. */
  readonly fallingPart: Float64Array;
}

/**
 * What      Homogeneous widths at zero power: by the width law (series) where a line follows it, else its own. A floor
 *           that adds stays in (it may be dephasing: the lifetime is then a lower limit), a Gaussian one is taken out.
 */
export function widthsByLaw(
  table: LineTable,
  broadening: readonly (Broadening | null)[],
  protocol: Protocol,
  defect0: number,
  defect2: number,
): WidthsAtZero {
  const known = broadening.flatMap((one, line) => (one === null ? [] : [{ one, line }]));
  const k = table.n.length;
  const width = new Float64Array(k).fill(Number.NaN);
  const forms = new Array<LinearForm | null>(k).fill(null);
  const from = new Array<"width-law" | "width" | "not determined">(k).fill("not determined");
  const fallingPart = new Float64Array(k).fill(1);
  for (const { one, line } of known) {
    width[line] = one.zero;
    forms[line] = one.zeroForm;
    from[line] = "width";
  }
  const usable = known.filter(({ one }) => formCovariance(table, one.zeroForm, one.zeroForm) > 0);
  if (usable.length < 2) return { width, forms, from, fallingPart };
  const zeroForms = usable.map(({ one }) => one.zeroForm);
  const covariance = formsCovariance(table, zeroForms);
  const law = fitWidths({
    n: usable.map(({ line }) => table.n[line]!),
    width_eV: Float64Array.from(usable, ({ one }) => one.zero),
    covariance,
    exponent: protocol.width.exponent,
    base: protocol.width.base,
    floorKind: protocol.width.floor_kind,
    defect0,
    defect2,
    testExponent: false,
  });
  if (!law.ok || !law.value.converged) return { width, forms, from, fallingPart };
  const fit = law.value;
  const [floor, coefficient, exponent] = fit.estimates.values;
  const kind: WidthFloorKind = protocol.width.floor_kind === "gaussian" ? "gaussian" : "lorentzian";
  const out = new Float64Array(WIDTH.size);
  for (const { line } of usable) {
    const n = table.n[line]!;
    if (!fit.n.includes(n)) continue;
    const base: WidthBase = protocol.width.base;
    widthLaw(
      n,
      defectAt(n, defect0, defect2),
      {
        floor: kind === "gaussian" ? 0 : floor!,
        coefficient: coefficient!,
        exponent: exponent!,
        base,
        floorKind: kind,
      },
      out,
    );
    const value = out[WIDTH.width]!;
    if (!(value > 0)) continue;
    const by = [
      kind === "gaussian" ? 0 : out[WIDTH.byFloor]!,
      out[WIDTH.byCoefficient]!,
      out[WIDTH.byExponent]!,
    ];
    width[line] = value;
    from[line] = "width-law";
    if (kind === "lorentzian") fallingPart[line] = out[WIDTH.term]! / value;
    const r = fit.n.length;
    forms[line] = addForms(
      fit.n.map((m, at) => ({
        form: usable.find((u) => table.n[u.line] === m)!.one.zeroForm,
        factor: by.reduce((sum, d, i) => sum + d * fit.gain[i * r + at]!, 0),
      })),
    );
  }
  return { width, forms, from, fallingPart };
}
