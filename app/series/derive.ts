import { assumption, doubt, NOT_DETERMINED, symmetric, type Note, type Quantity } from "../base/index.ts";
import {
  bohrRadiusFromMass,
  bohrRadiusFromRydberg,
  levelSpacing,
  lifetimeFromWidth,
  meanRadiusInDimension,
  rydbergFromBohrRadius,
} from "../laws/index.ts";
import { format, type LevelFit } from "./level-fit.ts";
import { bindingOf, lawAt, offsetFromLaw, type LineEnergies } from "./relation.ts";

/** One line as the spectrum fit gives it. */
export interface DerivedLineInput {
  readonly n: number;
  /** FWHM of the Lorentzian part, eV; area in eV times the unit of the signal; q. */
  readonly width_eV: number;
  readonly area: number;
  readonly asymmetry: number;
  /** (3 x 3, row-major) of width, area, asymmetry; zero rows where one is held. */
  readonly covariance: Float64Array;
  readonly significance: number;
  readonly bic_gain: number | null;
}

export interface DeriveInput {
  readonly material: {
    readonly dimension: number;
    readonly envelope: "S" | "P";
    readonly permittivity: number | null;
    readonly reduced_mass: number | null;
    readonly bohr_radius_nm: number | null;
    readonly index: number | null;
  };
  /** Null where no level law was fitted. */
  readonly levels: LevelFit | null;
  /** The same lines in the same order as `lines`. */
  readonly energies: LineEnergies;
  readonly lines: readonly DerivedLineInput[];
  readonly signalUnit: "1/cm" | "1";
  /** Half width of the intervals in standard errors; default 1. */
  readonly factor?: number | undefined;
}

export interface DerivedLine {
  readonly n: number;
  /** Highest point of the line alone, unit of the signal. */
  readonly peak: Quantity;
  readonly spacing_eV: number | null;
  readonly width_over_spacing: number | null;
  readonly lifetime_ps: Quantity;
  readonly law_offset_eV: Quantity;
  readonly in_level_fit: boolean;
  readonly area_n3: Quantity;
  /** Oscillator strength times density, 1/cm^3. */
  readonly strength_per_cm3: Quantity;
  /** Series limit minus line. */
  readonly binding_eV: Quantity;
}

export interface DerivedQuantities {
  readonly bohr_radius_nm: Quantity;
  readonly bohr_radius_from: string;
  readonly binding_eV: Quantity & { readonly n: number };
  readonly radius_um: readonly (Quantity & { readonly n: number })[];
  readonly highest_n: number | null;
  readonly highest_resolved_n: number | null;
  readonly apparent_gap_eV: Quantity;
}

/** Integrated absorption of one oscillator per cm^3: pi e^2 h/(4 pi eps0 m_e c 2 pi) in eV cm^2 (f-sum rule). */
const OSCILLATOR_AREA_EV_CM2 = 1.0976e-16;
const SIGNIFICANT = 5;
const BIC_GAIN = 10;

/**
 * What      What follows from the laws and the lines: Bohr radius and radii, binding energies, lifetimes, spacings, peaks,
 *           strengths, how far the series goes.
 *           Peak A [1 + sqrt(1 + 4 q^2)]/(pi G); lifetime hbar/G; N f = A n_b/1.0976e-16 eV cm^2 (A in eV/cm);
 *           apparent gap: the law at highest n + 1/2, where the lines that can be told apart end.
 * Units     as named.
 * Accuracy  errors to first order through the covariance of each line and of the level law with its lines;
 *           tests/app/series/derive.test.ts compares them with seeded resampling.
 */
export function deriveQuantities(input: DeriveInput): {
  readonly derived: DerivedQuantities | null;
  readonly lines: readonly DerivedLine[];
  readonly notes: readonly Note[];
} {
  const factor = input.factor ?? 1;
  const lines = input.lines.map((line, i) => deriveLine(input, line, i, factor));
  const levels = input.levels;
  if (levels === null || input.lines.length === 0) return { derived: null, lines, notes: [] };
  const highest = highestOf(input.lines);
  const resolved = highestResolved(input.lines, lines);
  const { radius, from, notes } = bohrRadius(input, levels);
  const l = input.material.envelope === "P" ? 1 : 0;
  const first = lines[0]!;
  const apparent = highest === null ? null : lawAt(levels, highest + 0.5);
  const derived: DerivedQuantities = {
    bohr_radius_nm: radius === null ? NOT_DETERMINED : symmetric(radius.value, radius.sigma, factor),
    bohr_radius_from: from,
    binding_eV: { n: first.n, ...first.binding_eV },
    radius_um:
      radius === null
        ? []
        : input.lines.map((line) => {
            const perBohr = meanRadiusInDimension(line.n, l, input.material.dimension, 1) / 1000;
            const sigma = radius.sigma === null ? null : perBohr * radius.sigma;
            return { n: line.n, ...symmetric(perBohr * radius.value, sigma, factor) };
          }),
    highest_n: highest,
    highest_resolved_n: resolved,
    apparent_gap_eV: apparent === null ? NOT_DETERMINED : symmetric(apparent.value, apparent.sigma, factor),
  };
  return { derived, lines, notes: [...notes, ...reachNotes(input, levels, highest, resolved)] };
}

function deriveLine(input: DeriveInput, line: DerivedLineInput, i: number, factor: number): DerivedLine {
  const { levels, material } = input;
  const { width_eV: width, area, asymmetry: q, covariance } = line;
  const sigmaWidth = Math.sqrt(covariance[0]!);
  const sigmaArea = Math.sqrt(covariance[4]!);
  const root = Math.sqrt(1 + 4 * q * q);
  const peak = (area * (1 + root)) / (Math.PI * width);
  // Relative derivatives: -1/G, 1/A, [4 q/root]/(1 + root).
  const gradient = [-peak / width, (1 + root) / (Math.PI * width), (peak * 4 * q) / (root * (1 + root))];
  let variance = 0;
  for (let a = 0; a < 3; a++)
    for (let b = 0; b < 3; b++) variance += gradient[a]! * gradient[b]! * covariance[a * 3 + b]!;
  const tau = lifetimeFromWidth(width);
  const cube = line.n ** 3;
  const perArea =
    input.signalUnit === "1/cm" && material.index !== null ? material.index / OSCILLATOR_AREA_EV_CM2 : null;
  const offset = levels === null ? null : offsetFromLaw(levels, input.energies, i);
  const binding = levels === null ? null : bindingOf(levels, input.energies, i);
  const spacing = levels === null ? null : spacingAt(levels, line.n);
  return {
    n: line.n,
    peak: symmetric(peak, Math.sqrt(Math.max(0, variance)), factor),
    spacing_eV: spacing,
    width_over_spacing: spacing === null ? null : width / spacing,
    lifetime_ps: symmetric(tau, (tau * sigmaWidth) / width, factor),
    law_offset_eV: offset === null ? NOT_DETERMINED : symmetric(offset.value, offset.sigma, factor),
    in_level_fit: levels !== null && levels.n.includes(line.n),
    area_n3: symmetric(area * cube, sigmaArea * cube, factor),
    strength_per_cm3:
      perArea === null ? NOT_DETERMINED : symmetric(area * perArea, sigmaArea * perArea, factor),
    binding_eV: binding === null ? NOT_DETERMINED : symmetric(binding.value, binding.sigma, factor),
  };
}

function spacingAt(levels: LevelFit, n: number): number {
  const [, rydberg, defect0, defect2, defect4] = levels.estimates.values;
  return levelSpacing(n, rydberg!, defect0, defect2, defect4);
}

function highestOf(lines: readonly DerivedLineInput[]): number | null {
  let highest: number | null = null;
  for (const line of lines) {
    const seen = line.significance > SIGNIFICANT && (line.bic_gain === null || line.bic_gain > BIC_GAIN);
    if (seen && (highest === null || line.n > highest)) highest = line.n;
  }
  return highest;
}

function highestResolved(lines: readonly DerivedLineInput[], derived: readonly DerivedLine[]): number | null {
  let highest: number | null = null;
  lines.forEach((line, i) => {
    const ratio = derived[i]!.width_over_spacing;
    const apart = ratio !== null && ratio < 1 && line.significance > SIGNIFICANT;
    if (apart && (highest === null || line.n > highest)) highest = line.n;
  });
  return highest;
}

/** Given; else permittivity and mass; else Rydberg energy and permittivity. */
function bohrRadius(
  input: DeriveInput,
  levels: LevelFit,
): { radius: { value: number; sigma: number | null } | null; from: string; notes: Note[] } {
  const { bohr_radius_nm: given, permittivity, reduced_mass: mass } = input.material;
  const rydberg = levels.estimates.values[1]!;
  const sigma = Math.sqrt(levels.estimates.covariance[6]!);
  const fromSeries =
    permittivity === null || !(rydberg > 0) ? null : bohrRadiusFromRydberg(rydberg, permittivity);
  if (given !== null) {
    const notes: Note[] = [];
    if (fromSeries !== null && permittivity !== null && Math.abs(fromSeries / given - 1) > 0.02) {
      const implied = rydbergFromBohrRadius(given, permittivity);
      notes.push(
        assumption(
          "bohr-radius-given",
          "derived.bohr_radius_nm",
          `The Bohr radius ${format(given)} nm is the given one; this Rydberg energy and permittivity ${format(permittivity)} give ${format(fromSeries)} nm, and ${format(given)} nm implies a Rydberg energy of ${format(implied * 1000)} meV.`,
          "set material.bohr_radius_nm to null to take it from the series, or change material.permittivity",
        ),
      );
    }
    return { radius: { value: given, sigma: null }, from: "given", notes };
  }
  if (permittivity !== null && mass !== null) {
    const radius = { value: bohrRadiusFromMass(mass, permittivity), sigma: null };
    return { radius, from: "permittivity and reduced mass", notes: [] };
  }
  if (fromSeries !== null) {
    const radius = { value: fromSeries, sigma: (fromSeries * sigma) / rydberg };
    return { radius, from: "Rydberg energy and permittivity", notes: [] };
  }
  return {
    radius: null,
    from: "not determined",
    notes: [
      assumption(
        "bohr-radius-unknown",
        "derived.bohr_radius_nm",
        "Neither a Bohr radius nor a permittivity is known, so no sizes are given.",
        "set material.permittivity or material.bohr_radius_nm",
      ),
    ],
  };
}

function reachNotes(
  input: DeriveInput,
  levels: LevelFit,
  highest: number | null,
  resolved: number | null,
): Note[] {
  const notes: Note[] = [];
  if (highest !== null && (resolved === null || resolved < highest)) {
    notes.push(
      doubt(
        "highest-line-blended",
        "derived.highest_n",
        `Lines above n = ${resolved ?? input.lines[0]!.n - 1} are broader than their spacing: n = ${highest} is significant, but not resolved.`,
        "quote highest_resolved_n for what can be seen by eye; narrow the slit or cool the crystal",
      ),
    );
  }
  const defect = levels.estimates.values[2]!;
  if (input.material.dimension <= 2 && levels.defect !== "none" && defect < 0.4) {
    notes.push(
      doubt(
        "screened-sheet",
        "series.defect0",
        `The defect ${format(defect)} is far below the 0.5 of an ideal sheet: screening by the surroundings bends the series, and Rydberg energy and gap are those of the fitted ladder only.`,
        "compare with a screened (Rytova-Keldysh) calculation before quoting a reduced mass",
      ),
    );
  }
  return notes;
}
