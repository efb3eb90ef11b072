import { assumption, doubt, symmetric, type Note, type Quantity } from "../base/index.ts";
import type { ConstrainedParts, FittedValue, LineParameterName, SpectrumFit } from "../fit/index.ts";
import type { Protocol, RunglineResult } from "../protocol/index.ts";
import { chiSquareSurvival } from "../solve/index.ts";
import type { FullFit } from "./fit-full.ts";
import type { ProfileEnds } from "./spectrum-profile.ts";

const NAMES: readonly LineParameterName[] = ["energy", "width", "area", "asymmetry"];
const KEYS = { energy: "energy_eV", width: "width_eV", area: "area", asymmetry: "asymmetry" } as const;
const UNITS = { energy: " eV", width: " eV", area: "", asymmetry: "" } as const;
/** Below this probability the tied model is rejected against the free one. */
const REJECTED_BELOW = 0.01;
/** An extra line below this many standard errors is not seen. */
const LEAST_SEEN = 3;

/** Whether the user holds this parameter of line n. */
export function isHeld(fit: SpectrumFit, n: number, parameter: LineParameterName): boolean {
  return fit.constrained?.held[parameter].includes(n) ?? false;
}

export function heldQuantity(value: number): Quantity {
  return { value, sigma: 0, low: value, high: value };
}

/** Parameters that the fit had. */
export function parameterCount(fit: SpectrumFit): number {
  return fit.constrained?.parameters ?? fit.problem.nonlinear + fit.problem.linear;
}

function quantityOf({ value, sigma }: FittedValue, factor: number): Quantity {
  if (sigma === 0) return heldQuantity(value);
  return symmetric(value, Number.isFinite(sigma) ? sigma : null, factor);
}

/** The width law where it was fitted with the lines; chi square belongs to the whole fit. */
export function tiedWidthLaw(
  parts: ConstrainedParts | undefined,
  base: string,
  factor: number,
  exponentProfile: ProfileEnds | null,
): RunglineResult["width_law"] {
  const law = parts?.widthLaw ?? null;
  if (law === null) return null;
  const at = (i: number): Quantity =>
    quantityOf({ value: law.values[i]!, sigma: Math.sqrt(law.covariance[4 * i]!) }, factor);
  return {
    floor_eV: at(0),
    coefficient_eV: at(1),
    exponent: withEnds(at(2), exponentProfile),
    base,
    fit_n: [law.ns[0]!, law.ns[law.ns.length - 1]!],
    chi2: null,
    dof: 0,
    p: null,
  };
}

function withEnds(plain: Quantity, ends: ProfileEnds | null): Quantity {
  if (ends === null || ends.low === null || ends.high === null) return plain;
  return { ...plain, low: ends.low, high: ends.high };
}

export function tiedStrengthLaw(
  parts: ConstrainedParts | undefined,
  strength: Protocol["strength"],
  factor: number,
): RunglineResult["strength_law"] {
  const law = parts?.strengthLaw ?? null;
  if (law === null) return null;
  return {
    coefficient: quantityOf(law.coefficient, factor),
    law: strength.law,
    base: strength.base,
    fit_n: [law.ns[0]!, law.ns[law.ns.length - 1]!],
    chi2: null,
    dof: 0,
    p: null,
    half_at_n: null,
  };
}

export function describeExtra(fit: SpectrumFit, factor: number): NonNullable<RunglineResult["extra"]> {
  return (fit.constrained?.extra ?? []).map((series) => ({
    name: series.name,
    defect: series.defect.atBound
      ? { value: series.defect.value, sigma: null, low: null, high: null }
      : quantityOf(series.defect, factor),
    ...(series.asymmetry === null ? {} : { asymmetry: quantityOf(series.asymmetry, factor) }),
    lines: series.lines.map((line) => ({
      n: line.n,
      energy_eV: quantityOf(line.energy, factor),
      width_eV: quantityOf(line.width, factor),
      area: quantityOf(line.area, factor),
      significance: line.area.sigma > 0 ? line.area.value / line.area.sigma : 0,
    })),
  }));
}

/** What the user's constraints did: what is held, what ended at a bound, what was of no use. */
export function constraintNotes(full: FullFit, protocol: Protocol): Note[] {
  const notes: Note[] = [];
  const { fit, ties } = full;
  const parts = fit.constrained;
  const ns = fit.lines.ns;
  const unused = [
    ...new Set(protocol.lines.constraints.flatMap(({ n }) => (typeof n === "number" ? [n] : n))),
  ].filter((n) => !ns.includes(n));
  if (unused.length > 0)
    notes.push(
      doubt(
        "constraint-unused",
        "lines",
        `The protocol constrains n = ${unused.join(", ")}, which ${unused.length === 1 ? "is" : "are"} not among the fitted lines.`,
        "name the lines (lines.n), or take the constraint away",
      ),
    );
  if (parts !== undefined) notes.push(...partNotes(parts, fit));
  if (ties !== undefined && ties.dof > 0) {
    const p = chiSquareSurvival(Math.max(0, ties.chi2), ties.dof);
    if (p < REJECTED_BELOW)
      notes.push(
        doubt(
          "ties-rejected",
          "lines",
          `Tying ${ties.what} raises chi square by ${ties.chi2.toPrecision(4)} for ${ties.dof} degrees of freedom (p = ${p.toExponential(1)}): the lines do not follow ${ties.what.includes(" and ") ? "the laws" : "the law"}, and values and errors of the tied fit are not to be trusted.`,
          "free them (width.mode=free, strength.mode=free), or exempt single lines with lines.constraints (tie: free)",
        ),
      );
  }
  return notes;
}

function partNotes(parts: ConstrainedParts, fit: SpectrumFit): Note[] {
  const notes: Note[] = [];
  const ns = fit.lines.ns;
  const values = {
    energy: fit.lines.energy,
    width: fit.lines.width,
    area: fit.lines.area,
    asymmetry: fit.lines.asymmetry,
  };
  const held = NAMES.flatMap((name) =>
    parts.held[name].map((n) => `${name} of n = ${n} at ${values[name][ns.indexOf(n)]!}${UNITS[name]}`),
  );
  if (held.length > 0)
    notes.push(
      assumption(
        "parameters-held",
        "lines",
        `Held by the protocol, with no error of their own: ${held.join("; ")}. A held value does not speak for the laws of the series.`,
        "take the constraint away (lines.constraints) to have it fitted",
      ),
    );
  const tied = NAMES.filter((name) => parts.tied[name].length > 0).map(
    (name) => `${name} of n = ${parts.tied[name].join(", ")}`,
  );
  if (tied.length > 0)
    notes.push(
      assumption(
        "parameters-tied",
        "lines",
        `These follow from other parameters and are no measurements of their own: ${tied.join("; ")}.`,
        "see width.mode, strength.mode and lines.constraints",
      ),
    );
  for (const { n, parameter, side, bound } of parts.limited)
    notes.push(
      doubt(
        "constraint-at-bound",
        `lines[n=${n}].${KEYS[parameter]}`,
        `The ${parameter} of n = ${n} ended at the ${side === "low" ? "lower" : "upper"} bound that the protocol gives, ${bound}${UNITS[parameter]}: the data want it beyond.`,
        "widen the bound (lines.constraints), or look for a blend there",
      ),
    );
  for (const series of parts.extra) {
    if (series.defect.atBound)
      notes.push(
        doubt(
          "extra-defect-at-bound",
          "extra",
          `The quantum defect of the extra series ${series.name} ended at the end of its range, ${series.defect.value.toPrecision(4)}.`,
          "start it elsewhere (series.extra), or hold it (hold_defect)",
        ),
      );
    const unseen = series.lines.filter(({ area }) => !(Math.abs(area.value) > LEAST_SEEN * area.sigma));
    if (unseen.length > 0)
      notes.push(
        doubt(
          "extra-not-seen",
          "extra",
          `Of the extra series ${series.name}, n = ${unseen.map(({ n }) => n).join(", ")} ${unseen.length === 1 ? "is" : "are"} below ${LEAST_SEEN} standard errors.`,
          "take these n out of series.extra",
        ),
      );
  }
  return notes;
}
