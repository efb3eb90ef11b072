import { levelEnergy, LEVEL, levelLaw, strength, WIDTH, widthLaw } from "../laws/index.ts";
import { linePair, linePairWithDerivatives, turnPair } from "../lines/index.ts";
import type { CondensedProblem, SeparableProblem } from "../solve/index.ts";
import { ASYMMETRY_BOUND, FACTOR_BOUND, WIDTH_BOUND_FACTOR } from "./bounds.ts";
import { condenseWith, featuresAt, lineReach } from "./condense-spectrum.ts";
import type { ConstraintSpec, LineParameterName, Rule } from "./constraint-spec.ts";
import type { FitPoints, LevelValues, WidthValues } from "./model-spec.ts";
import type { SpectrumProblem } from "./spectrum-problem.ts";
import type { Feature } from "./transmittance-grid.ts";

/** One nonlinear parameter of the constrained problem. */
export interface OwnParameter {
  readonly start: number;
  readonly low: number;
  readonly high: number;
  /** Whose bound it is: null where the program set it, else the line and parameter that the user bounded. */
  readonly user: { readonly n: number; readonly parameter: LineParameterName } | null;
}

/** An extra line: which series, which n, and where its energy and width stand in the wide theta. */
interface ExtraLine {
  readonly series: number;
  readonly place: number;
  readonly n: number;
  readonly energyAt: number;
  readonly widthAt: number;
}

/** The defect of an extra series may move this far from where the user puts it. */
const DEFECT_REACH = 0.35;
const MOST_EXPONENT = 8;

/**
 * What      A spectrum problem whose parameters are held, bounded, shared or tied line by line, and which may have lines of
 *           other series. The wide parameters (theta, c) of the plain model follow from fewer: theta = g(u),
 *           c = M(u) c' + b(u), so that derivatives are exact by the chain rule:
 *             d model/du = D(theta, c) dg/du + Phi (dM/du c' + db/du).
 *           Held: a constant. Bounded: a parameter u with bounds (a bounded area leaves the linear ones). Shared: one
 *           parameter for several lines. Tied: the law's value, from parameters of its own or from the free lines.
 *           Asymmetries: B_j = (q_j - q) A_j beside the model's common q.
 * Shapes    u (nonlinear), c' (linear); wide theta (P + 2 X), wide c (L + X), X extra lines.
 * Units     those of SpectrumProblem.
 * Accuracy  derivatives to rounding: tests/app/fit/constrained-problem.test.ts.
 */
export class ConstrainedProblem implements SeparableProblem {
  readonly rows: number;
  readonly nonlinear: number;
  readonly linear: number;
  readonly data: Float64Array;
  readonly weights: Float64Array;
  readonly inner: SpectrumProblem;
  readonly own: readonly OwnParameter[];
  readonly spec: ConstraintSpec;
  readonly extraLines: readonly ExtraLine[];
  /** Wide sizes. */
  readonly wideNonlinear: number;
  readonly wideLinear: number;
  private readonly points: FitPoints;
  private readonly innerStart: Float64Array;
  /** u of each wide theta, -1 where it is derived or held. */
  private readonly ownAt: Int32Array;
  /** Constants of held entries. */
  private readonly base: Float64Array;
  private readonly widthLawAt: readonly number[];
  private readonly asymmetryLawAt: number;
  private readonly defectAt: Int32Array;
  /** Place in u of the asymmetry of an extra series, or -1: that of the main series. */
  private readonly extraOddAt: Int32Array;
  /** By line: place in u of its own q, or -1; place in u of a bounded area, or -1; place in c' of its area, or -1. */
  private readonly qAt: Int32Array;
  private readonly areaAt: Int32Array;
  private readonly coefficientAt: Int32Array;
  /** Place in c' of the odd areas that are free, and of all behind them. */
  private readonly oddAt: Int32Array;
  private readonly strengthAt: number;
  private readonly behindAt: number;
  private readonly wide: Float64Array;
  private readonly at: Float64Array;
  private readonly energyDerived: readonly number[];
  private readonly scratch: Float64Array[];
  private readonly tailN: number;

  constructor(points: FitPoints, inner: SpectrumProblem, spec: ConstraintSpec, start: Float64Array) {
    this.points = points;
    this.innerStart = start;
    this.inner = inner;
    this.spec = spec;
    this.rows = inner.rows;
    this.data = inner.data;
    this.weights = inner.weights;
    const { layout } = inner;
    const { ns } = inner.spec;
    const k = ns.length;
    const p = layout.count;
    const { rules, links } = spec;
    this.tailN = (ns[k - 1] ?? 0) + 1;

    const extraLines: ExtraLine[] = [];
    spec.extra.forEach((series, s) =>
      series.ns.forEach((n, place) => {
        const at = p + 2 * extraLines.length;
        extraLines.push({ series: s, place, n, energyAt: at, widthAt: at + 1 });
      }),
    );
    this.extraLines = extraLines;
    this.wideNonlinear = p + 2 * extraLines.length;
    this.wideLinear = inner.linear + extraLines.length;

    const own: OwnParameter[] = [];
    const add = (value: number, low: number, high: number, user: OwnParameter["user"] = null): number =>
      own.push({ start: Math.min(high, Math.max(low, value)), low, high, user }) - 1;
    this.ownAt = new Int32Array(this.wideNonlinear).fill(-1);
    this.base = new Float64Array(this.wideNonlinear);
    for (let i = 0; i < p; i++) this.base[i] = start[i]!;

    for (let i = 0; i < layout.lawCount; i++)
      this.ownAt[i] = add(start[i]!, i === 1 ? 1e-9 : -Infinity, Infinity);
    const place = (
      parameter: "energy" | "width",
      list: readonly Rule[],
      atOf: (j: number) => number,
      low: (value: number) => number,
      high: (value: number) => number,
    ): void => {
      const groups = new Map<number, number>();
      list.forEach((rule, j) => {
        const at = atOf(j);
        if (at < 0 || rule.kind === "law") return;
        const value = start[at]!;
        if (rule.kind === "held") this.base[at] = rule.value;
        else if (rule.kind === "bounded")
          this.ownAt[at] = add(value, rule.low, rule.high, { n: ns[j]!, parameter });
        else if (rule.kind === "shared" && groups.has(rule.group)) this.ownAt[at] = groups.get(rule.group)!;
        else {
          this.ownAt[at] = add(value, low(value), high(value));
          if (rule.kind === "shared") groups.set(rule.group, this.ownAt[at]);
        }
      });
    };
    // The reach of free energies is set by the caller (parameterBounds); here they have none.
    place(
      "energy",
      rules.energy,
      (j) => layout.energyAt[j]!,
      () => -Infinity,
      () => Infinity,
    );
    place(
      "width",
      rules.width,
      (j) => layout.widthAt[j]!,
      (value) => value / WIDTH_BOUND_FACTOR,
      (value) => value * WIDTH_BOUND_FACTOR,
    );
    this.energyDerived = ns
      .map((_, j) => j)
      .filter((j) => layout.energyAt[j]! >= 0 && rules.energy[j]!.kind === "law");

    const widthTied = rules.width.some((rule) => rule.kind === "law");
    this.widthLawAt =
      widthTied && spec.widthLaw.from === "own"
        ? [
            spec.widthLaw.floorFree ? add(links.widths.floor, 0, Infinity) : -1,
            add(links.widths.coefficient, 0, Infinity),
            spec.widthLaw.exponentFree ? add(links.widths.exponent, 0, MOST_EXPONENT) : -1,
          ]
        : [];
    const q = layout.asymmetryAt;
    this.asymmetryLawAt = spec.asymmetryLaw
      ? add(q >= 0 ? start[q]! : 0, -ASYMMETRY_BOUND, ASYMMETRY_BOUND)
      : -1;
    if (spec.asymmetryLaw) add(0, -Infinity, Infinity);
    else if (q >= 0) this.ownAt[q] = add(start[q]!, -ASYMMETRY_BOUND, ASYMMETRY_BOUND);
    if (layout.factorAt >= 0) this.ownAt[layout.factorAt] = add(start[layout.factorAt]!, 0, FACTOR_BOUND);
    this.qAt = new Int32Array(k).fill(-1);
    const asymmetryGroups = new Map<number, number>();
    rules.asymmetry.forEach((rule, j) => {
      const value = q >= 0 ? start[q]! : 0;
      if (rule.kind === "bounded")
        this.qAt[j] = add(value, rule.low, rule.high, { n: ns[j]!, parameter: "asymmetry" });
      if (rule.kind === "shared") {
        const known = asymmetryGroups.get(rule.group);
        this.qAt[j] = known ?? add(value, -ASYMMETRY_BOUND, ASYMMETRY_BOUND);
        asymmetryGroups.set(rule.group, this.qAt[j]);
      }
    });
    this.areaAt = new Int32Array(k).fill(-1);
    rules.area.forEach((rule, j) => {
      if (rule.kind === "bounded")
        this.areaAt[j] = add(0, rule.low, rule.high, {
          n: ns[j]!,
          parameter: "area",
        });
    });
    this.defectAt = Int32Array.from(spec.extra, (series) =>
      series.defectHeld ? -1 : add(series.defect, series.defect - DEFECT_REACH, series.defect + DEFECT_REACH),
    );
    const odd = inner.spec.asymmetry !== "zero";
    this.extraOddAt = Int32Array.from(spec.extra, (series) =>
      odd && series.ownAsymmetry ? add(q >= 0 ? start[q]! : 0, -ASYMMETRY_BOUND, ASYMMETRY_BOUND) : -1,
    );
    for (const line of extraLines) {
      const series = spec.extra[line.series]!;
      if (series.width === "law") continue;
      const width = series.startWidth[line.place]!;
      this.ownAt[line.widthAt] = add(width, width / WIDTH_BOUND_FACTOR, width * WIDTH_BOUND_FACTOR);
    }
    this.own = own;
    this.nonlinear = own.length;

    let count = 0;
    this.coefficientAt = new Int32Array(k).fill(-1);
    const areaGroups = new Map<number, number>();
    rules.area.forEach((rule, j) => {
      if (rule.kind === "free") this.coefficientAt[j] = count++;
      if (rule.kind !== "shared") return;
      const known = areaGroups.get(rule.group);
      this.coefficientAt[j] = known ?? count++;
      areaGroups.set(rule.group, this.coefficientAt[j]);
    });
    const areasTied = rules.area.some((rule) => rule.kind === "law");
    this.strengthAt = areasTied && spec.strengthLaw === "own" ? count++ : -1;
    const freeOdd = inner.spec.asymmetry === "free";
    this.oddAt = Int32Array.from(rules.asymmetry, (rule) =>
      freeOdd && rule.kind === "free" && !spec.asymmetryLaw ? count++ : -1,
    );
    this.behindAt = count;
    this.linear = count + (inner.linear - inner.backgroundAt) + extraLines.length;
    this.wide = new Float64Array(this.rows * this.wideLinear);
    this.at = new Float64Array(this.nonlinear).fill(NaN);
    this.scratch = Array.from({ length: extraLines.length > 0 ? 6 : 0 }, () => new Float64Array(this.rows));
  }

  start(): Float64Array {
    return Float64Array.from(this.own, (one) => one.start);
  }

  /** The start with bounded areas at these (wide coefficients), as near as their bounds allow. */
  startWith(wide: Float64Array): Float64Array {
    const u = this.start();
    this.areaAt.forEach((at, j) => {
      if (at >= 0) u[at] = Math.min(this.own[at]!.high, Math.max(this.own[at]!.low, wide[j]!));
    });
    return u;
  }

  /** Wide theta at u. */
  thetaOf(u: Float64Array): Float64Array {
    return this.parametersAt(u, false).theta;
  }

  /** The plain problem's few rows, with the extra lines among its features. */
  condense(u: Float64Array): CondensedProblem | null {
    const { inner, spec, innerStart, extraLines } = this;
    const features = (at: Float64Array): Feature[] => {
      const theta = this.thetaOf(at);
      const reach = lineReach(inner.spec);
      const extra = extraLines.map((line) => ({
        energy: theta[line.energyAt]!,
        width: theta[line.widthAt]! + reach,
      }));
      return [...featuresAt(inner, theta.subarray(0, inner.nonlinear)), ...extra];
    };
    const few = condenseWith(inner, features, u);
    if (few === null) return null;
    const { lost, serves } = few;
    return { problem: new ConstrainedProblem(few.points, few.inner, spec, innerStart), lost, serves };
  }

  columns(u: Float64Array, phi: Float64Array): void {
    this.fillWide(u);
    const map = this.coefficientMap(u, null, false).matrix;
    this.combine(map, phi, this.linear);
  }

  offset(u: Float64Array, out: Float64Array): void {
    this.fillWide(u);
    const { constant } = this.coefficientMap(u, null, false);
    out.fill(0);
    const { rows: m, wide } = this;
    constant.forEach((value, row) => {
      if (value === 0) return;
      for (let i = 0; i < m; i++) out[i]! += value * wide[row * m + i]!;
    });
  }

  derivatives(u: Float64Array, reduced: Float64Array, out: Float64Array): void {
    this.fillWide(u);
    const { rows: m, inner, wide, extraLines, points } = this;
    const p = inner.nonlinear;
    const { theta, jacobian } = this.parametersAt(u, true);
    const { coefficients, slopes } = this.coefficientsAt(u, reduced);
    const wideDerivative = new Float64Array(m * this.wideNonlinear);
    inner.columns(theta.subarray(0, p), this.innerColumns());
    inner.derivatives(
      theta.subarray(0, p),
      coefficients.subarray(0, inner.linear),
      wideDerivative.subarray(0, m * p),
    );
    const qAt = inner.layout.asymmetryAt;
    out.fill(0);
    extraLines.forEach((line, x) => {
      const ownAt = this.extraOddAt[line.series]!;
      const q = ownAt >= 0 ? u[ownAt]! : inner.asymmetryOf(theta);
      const [l, d, lE, lG, dE, dG] = this.scratch as [
        Float64Array,
        Float64Array,
        Float64Array,
        Float64Array,
        Float64Array,
        Float64Array,
      ];
      const { energy, width } = this.extraPlace(line, theta);
      linePairWithDerivatives(points.energy, 0, m, energy, width, inner.spec.gaussStd, l, d, lE, lG, dE, dG);
      if (inner.spec.partner === true)
        for (const [x, y] of [
          [l, d],
          [lE, dE],
          [lG, dG],
        ] as const)
          turnPair(x, y);
      const a = coefficients[inner.linear + x]!;
      for (let i = 0; i < m; i++) {
        wideDerivative[line.energyAt * m + i] = a * (lE[i]! + 2 * q * dE[i]!);
        wideDerivative[line.widthAt * m + i] = a * (lG[i]! + 2 * q * dG[i]!);
        if (ownAt >= 0) out[ownAt * m + i]! += 2 * a * d[i]!;
        else if (qAt >= 0) wideDerivative[qAt * m + i]! += 2 * a * d[i]!;
      }
    });
    const n = this.nonlinear;
    for (let i = 0; i < this.wideNonlinear; i++)
      for (let a = 0; a < n; a++) addScaled(out, a * m, wideDerivative, i * m, jacobian[i * n + a]!, m);
    for (let row = 0; row < this.wideLinear; row++)
      for (let a = 0; a < n; a++) addScaled(out, a * m, wide, row * m, slopes[row * n + a]!, m);
  }

  /** Wide theta, and d theta/du (wide x nonlinear, row-major). */
  parametersAt(u: Float64Array, slopes: boolean): { theta: Float64Array; jacobian: Float64Array } {
    const { inner, spec, ownAt } = this;
    const { layout } = inner;
    const { ns } = inner.spec;
    const k = ns.length;
    const n = this.nonlinear;
    const theta = this.base.slice();
    const jacobian = new Float64Array(slopes ? this.wideNonlinear * n : 0);
    for (let i = 0; i < this.wideNonlinear; i++) {
      const at = ownAt[i]!;
      if (at < 0) continue;
      theta[i] = u[at]!;
      if (slopes) jacobian[i * n + at] = 1;
    }
    const chain = (row: number, from: number, factor: number): void => {
      if (!slopes || factor === 0) return;
      for (let a = 0; a < n; a++) jacobian[row * n + a]! += factor * jacobian[from * n + a]!;
    };
    const link = (
      row: number,
      gain: Float64Array,
      parameters: number,
      slope: (parameter: number) => number,
      at: Int32Array,
    ): void => {
      for (let i = 0; i < parameters; i++) {
        const s = slope(i);
        if (s !== 0) for (let j = 0; j < k; j++) if (at[j]! >= 0) chain(row, at[j]!, s * gain[i * k + j]!);
      }
    };
    const levels = (): LevelValues => {
      if (layout.lawCount > 0) return inner.tiedLaw(theta);
      return fromLevelLink(spec.links, layout.energyAt, theta);
    };
    const levelOut = new Float64Array(LEVEL.size);
    const energyLinks = (row: number, slope: (parameter: number) => number): void => {
      if (layout.lawCount > 0) for (let i = 0; i < layout.lawCount; i++) chain(row, i, slope(i));
      else {
        const { gain, parameters } = spec.links.levelLink;
        link(row, gain, parameters, slope, layout.energyAt);
      }
    };
    // Tied energies first use the free ones only (their gains are zero for tied lines).
    const law = levels();
    for (const j of this.energyDerived) {
      levelLaw(ns[j]!, { ...law, defect4: 0 }, levelOut);
      const row = layout.energyAt[j]!;
      theta[row] = levelOut[LEVEL.energy]!;
      energyLinks(row, (i) => levelOut[1 + i]!);
    }
    const widthOut = new Float64Array(WIDTH.size);
    const widthsAt = (values: WidthValues, lineN: number): number => {
      widthLaw(lineN, law.defect0, values, widthOut);
      return widthOut[WIDTH.width]!;
    };
    const own = this.widthLawAt;
    const widths: WidthValues =
      own.length > 0
        ? {
            ...spec.links.widths,
            floor: own[0]! >= 0 ? u[own[0]!]! : spec.links.widths.floor,
            coefficient: u[own[1]!]!,
            exponent: own[2]! >= 0 ? u[own[2]!]! : spec.links.widths.exponent,
          }
        : fromWidthLink(spec.links, layout.widthAt, theta);
    const tieWidth = (row: number, lineN: number): void => {
      theta[row] = widthsAt(widths, lineN);
      if (own.length > 0) {
        if (slopes) own.forEach((at, i) => at >= 0 && (jacobian[row * n + at] = widthOut[1 + i]!));
      } else {
        const { gain, parameters } = spec.links.widthLink;
        link(row, gain, parameters, (i) => widthOut[1 + i]!, layout.widthAt);
      }
    };
    spec.rules.width.forEach((rule, j) => {
      if (rule.kind === "law") tieWidth(layout.widthAt[j]!, ns[j]!);
    });
    for (const line of this.extraLines) {
      const series = spec.extra[line.series]!;
      const at = this.defectAt[line.series]!;
      const defect = at >= 0 ? u[at]! : series.defect;
      theta[line.energyAt] = levelEnergy(line.n, law.gap, law.rydberg, defect, 0);
      const nu = line.n - defect;
      energyLinks(line.energyAt, (i) => (i === 0 ? 1 : i === 1 ? -1 / (nu * nu) : 0));
      if (slopes && at >= 0) jacobian[line.energyAt * n + at] = (-2 * law.rydberg) / nu ** 3;
      if (series.width === "law") tieWidth(line.widthAt, line.n);
    }
    if (this.asymmetryLawAt >= 0 && layout.asymmetryAt >= 0) {
      const at = this.asymmetryLawAt;
      const x = 1 / (this.tailN * this.tailN);
      theta[layout.asymmetryAt] = u[at]! + u[at + 1]! * x;
      if (slopes) {
        jacobian[layout.asymmetryAt * n + at] = 1;
        jacobian[layout.asymmetryAt * n + at + 1] = x;
      }
    }
    return { theta, jacobian };
  }

  /** Wide coefficients at u and c', with d/du at fixed c' (wide x nonlinear) and d/dc' (wide x linear). */
  coefficientsAt(
    u: Float64Array,
    reduced: Float64Array,
  ): { coefficients: Float64Array; slopes: Float64Array; matrix: readonly (readonly [number, number])[][] } {
    const { matrix, constant, slopes } = this.coefficientMap(u, reduced, true);
    const coefficients = constant.slice();
    matrix.forEach((row, i) => {
      for (const [at, factor] of row) coefficients[i]! += factor * reduced[at]!;
    });
    return { coefficients, slopes, matrix };
  }

  /** c' whose wide coefficients are nearest in the entries that are free. */
  reduce(wide: Float64Array): Float64Array {
    const out = new Float64Array(this.linear);
    const { inner } = this;
    const k = inner.spec.ns.length;
    this.coefficientAt.forEach((at, j) => {
      if (at >= 0) out[at] = wide[j]!;
    });
    if (this.strengthAt >= 0) {
      const j = this.spec.rules.area.findIndex((rule) => rule.kind === "law");
      out[this.strengthAt] = wide[j]! / this.strengthOf(j);
    }
    this.oddAt.forEach((at, j) => {
      if (at >= 0) out[at] = wide[k + j]!;
    });
    for (let b = inner.backgroundAt; b < wide.length; b++)
      out[this.behindAt + b - inner.backgroundAt] = wide[b]!;
    return out;
  }

  /** Value and place in u of the width law's parameters where it is fitted with the lines; null else. */
  get widthLawPlaces(): readonly number[] | null {
    return this.widthLawAt.length > 0 ? this.widthLawAt : null;
  }

  /** Place in c' of the strength law's coefficient, or -1. */
  get strengthPlace(): number {
    return this.strengthAt;
  }

  get asymmetryLawPlace(): number {
    return this.asymmetryLawAt;
  }

  /** Place in u of the defect of an extra series, or -1. */
  defectPlace(series: number): number {
    return this.defectAt[series]!;
  }

  /** Place in u of the asymmetry of an extra series, or -1. */
  extraAsymmetryPlace(series: number): number {
    return this.extraOddAt[series]!;
  }

  /** Bounds that the caller knows better, by wide theta. */
  narrowed(lower: Float64Array, upper: Float64Array): { lower: Float64Array; upper: Float64Array } {
    const low = Float64Array.from(this.own, (one) => one.low);
    const high = Float64Array.from(this.own, (one) => one.high);
    this.inner.spec.ns.forEach((_, j) => {
      const at = this.inner.layout.energyAt[j]!;
      if (at < 0 || this.ownAt[at]! < 0 || this.own[this.ownAt[at]!]!.user !== null) return;
      low[this.ownAt[at]!] = lower[at]!;
      high[this.ownAt[at]!] = upper[at]!;
    });
    return { lower: low, upper: high };
  }

  /** u behind a wide theta, or -1. */
  placeOf(wide: number): number {
    return this.ownAt[wide]!;
  }

  private strengthOf(j: number): number {
    const { law, base } = this.spec.links.strength;
    return strength(this.inner.spec.ns[j]!, this.spec.links.levels.defect0, law, base);
  }

  private coefficientMap(
    u: Float64Array,
    reduced: Float64Array | null,
    slopesWanted: boolean,
  ): { matrix: [number, number][][]; constant: Float64Array; slopes: Float64Array } {
    const { inner, spec } = this;
    const { rules } = spec;
    const { ns } = inner.spec;
    const k = ns.length;
    const n = this.nonlinear;
    const matrix: [number, number][][] = Array.from({ length: this.wideLinear }, () => []);
    const constant = new Float64Array(this.wideLinear);
    const slopes = new Float64Array(slopesWanted ? this.wideLinear * n : 0);
    for (let j = 0; j < k; j++) {
      const rule = rules.area[j]!;
      if (this.coefficientAt[j]! >= 0) matrix[j]!.push([this.coefficientAt[j]!, 1]);
      else if (rule.kind === "held") constant[j] = rule.value;
      else if (this.areaAt[j]! >= 0) {
        constant[j] = u[this.areaAt[j]!]!;
        if (slopesWanted) slopes[j * n + this.areaAt[j]!] = 1;
      } else if (this.strengthAt >= 0) matrix[j]!.push([this.strengthAt, this.strengthOf(j)]);
    }
    if (spec.strengthLaw === "others")
      rules.area.forEach((rule, j) => {
        if (rule.kind !== "law") return;
        const s = this.strengthOf(j);
        spec.links.strengthShare.forEach((share, i) => {
          if (share === 0 || rules.area[i]!.kind === "law") return;
          for (const [at, factor] of matrix[i]!) matrix[j]!.push([at, s * share * factor]);
          constant[j]! += s * share * constant[i]!;
          if (slopesWanted && this.areaAt[i]! >= 0) slopes[j * n + this.areaAt[i]!]! += s * share;
        });
      });
    if (inner.spec.asymmetry === "free" || inner.spec.asymmetry === "each")
      this.oddCoefficients(u, reduced, matrix, constant, slopes);
    const behind = this.wideLinear - inner.backgroundAt;
    for (let b = 0; b < behind; b++) matrix[inner.backgroundAt + b]!.push([this.behindAt + b, 1]);
    return { matrix, constant, slopes };
  }

  /** B_j = (q_j - q) A_j. */
  private oddCoefficients(
    u: Float64Array,
    reduced: Float64Array | null,
    matrix: [number, number][][],
    constant: Float64Array,
    slopes: Float64Array,
  ): void {
    const { inner, spec } = this;
    const { ns } = inner.spec;
    const k = ns.length;
    const n = this.nonlinear;
    const law = this.asymmetryLawAt;
    const xTail = 1 / (this.tailN * this.tailN);
    const commonAt = inner.layout.asymmetryAt < 0 ? -1 : this.ownAt[inner.layout.asymmetryAt]!;
    const common = inner.layout.asymmetryAt < 0 ? 0 : law >= 0 ? u[law]! + u[law + 1]! * xTail : u[commonAt]!;
    for (let j = 0; j < k; j++) {
      if (this.oddAt[j]! >= 0) {
        matrix[k + j]!.push([this.oddAt[j]!, 1]);
        continue;
      }
      const rule = spec.rules.asymmetry[j]!;
      // difference = q_j - q, and its slopes by u.
      let difference = 0;
      const by: [number, number][] = [];
      const minusCommon = (): void => {
        difference -= common;
        if (commonAt >= 0) by.push([commonAt, -1]);
        else if (law >= 0 && inner.layout.asymmetryAt >= 0) by.push([law, -1], [law + 1, -xTail]);
      };
      if (rule.kind === "held") {
        difference = rule.value;
        minusCommon();
      } else if (this.qAt[j]! >= 0) {
        difference = u[this.qAt[j]!]!;
        by.push([this.qAt[j]!, 1]);
        minusCommon();
      } else if (law >= 0) {
        const x = 1 / (ns[j]! * ns[j]!);
        difference = u[law]! + u[law + 1]! * x;
        by.push([law, 1], [law + 1, x]);
        minusCommon();
      }
      for (const [at, factor] of matrix[j]!) matrix[k + j]!.push([at, difference * factor]);
      constant[k + j] = difference * constant[j]!;
      if (reduced === null) continue;
      let area = constant[j]!;
      for (const [at, factor] of matrix[j]!) area += factor * reduced[at]!;
      for (let a = 0; a < n; a++) slopes[(k + j) * n + a] = difference * slopes[j * n + a]!;
      for (const [at, slope] of by) slopes[(k + j) * n + at]! += slope * area;
    }
  }

  private innerColumns(): Float64Array {
    return this.wide.subarray(0, this.rows * this.inner.linear);
  }

  private extraPlace(line: ExtraLine, theta: Float64Array): { energy: number; width: number } {
    return {
      energy: theta[line.energyAt]!,
      width: theta[line.widthAt]! + (this.inner.spec.instrumentLorentz ?? 0),
    };
  }

  /** Columns of the wide problem at u. */
  private fillWide(u: Float64Array): void {
    let same = true;
    for (let i = 0; i < u.length && same; i++) same = this.at[i] === u[i];
    if (same && u.length > 0) return;
    const { inner, rows: m, wide, points } = this;
    const theta = this.thetaOf(u);
    inner.columns(theta.subarray(0, inner.nonlinear), this.innerColumns());
    this.extraLines.forEach((line, x) => {
      const ownAt = this.extraOddAt[line.series]!;
      const q = ownAt >= 0 ? u[ownAt]! : inner.asymmetryOf(theta);
      const [l, d] = this.scratch as [Float64Array, Float64Array];
      const { energy, width } = this.extraPlace(line, theta);
      linePair(points.energy, 0, m, energy, width, inner.spec.gaussStd, l, d);
      if (inner.spec.partner === true) turnPair(l, d);
      const at = (inner.linear + x) * m;
      for (let i = 0; i < m; i++) wide[at + i] = l[i]! + 2 * q * d[i]!;
    });
    this.at.set(u);
  }

  private combine(map: readonly (readonly [number, number])[][], phi: Float64Array, count: number): void {
    const { rows: m, wide } = this;
    phi.fill(0, 0, m * count);
    map.forEach((row, from) => {
      for (const [to, factor] of row) addScaled(phi, to * m, wide, from * m, factor, m);
    });
  }
}

function fromLevelLink(links: ConstraintSpec["links"], at: Int32Array, theta: Float64Array): LevelValues {
  const { levels, levelLink } = links;
  const value = [levels.gap, levels.rydberg, levels.defect0, levels.defect2];
  applyLink(levelLink, at, theta, value);
  return { gap: value[0]!, rydberg: value[1]!, defect0: value[2]!, defect2: value[3]! };
}

function fromWidthLink(links: ConstraintSpec["links"], at: Int32Array, theta: Float64Array): WidthValues {
  const { widths, widthLink } = links;
  const value = [widths.floor, widths.coefficient, widths.exponent];
  applyLink(widthLink, at, theta, value);
  return { ...widths, floor: value[0]!, coefficient: value[1]!, exponent: value[2]! };
}

function applyLink(
  { gain, at: origin, parameters }: ConstraintSpec["links"]["levelLink"],
  at: Int32Array,
  theta: Float64Array,
  value: number[],
): void {
  const k = origin.length;
  for (let i = 0; i < parameters; i++)
    for (let j = 0; j < k; j++)
      if (at[j]! >= 0 && gain[i * k + j] !== 0) value[i]! += gain[i * k + j]! * (theta[at[j]!]! - origin[j]!);
}

function addScaled(
  out: Float64Array,
  outAt: number,
  source: Float64Array,
  sourceAt: number,
  factor: number,
  count: number,
): void {
  if (factor === 0) return;
  for (let i = 0; i < count; i++) out[outAt + i]! += factor * source[sourceAt + i]!;
}
