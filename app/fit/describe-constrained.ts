import type { SeparableSolution } from "../solve/index.ts";
import type { ConstrainedProblem } from "./constrained-problem.ts";
import type { LineParameterName, LineRules, Rule } from "./constraint-spec.ts";

export interface FittedValue {
  readonly value: number;
  /** 0 where it is held, NaN where it is not determined. */
  readonly sigma: number;
}

/** A parameter that ended at the user's own bound. */
export interface LimitedParameter {
  readonly n: number;
  readonly parameter: LineParameterName;
  readonly side: "low" | "high";
  readonly bound: number;
}

export interface ExtraFit {
  readonly name: string;
  readonly defect: FittedValue & { readonly atBound: boolean };
  /** Null where it is that of the main series. */
  readonly asymmetry: FittedValue | null;
  readonly lines: readonly {
    readonly n: number;
    readonly energy: FittedValue;
    readonly width: FittedValue;
    readonly area: FittedValue;
  }[];
}

/** What a fit with constraints has beside its lines. */
export interface ConstrainedParts {
  /** Parameters that the fit had, nonlinear and linear. */
  readonly parameters: number;
  /** n of the lines, by parameter: held by the user, and following from other parameters. */
  readonly held: Readonly<Record<LineParameterName, readonly number[]>>;
  readonly tied: Readonly<Record<LineParameterName, readonly number[]>>;
  readonly limited: readonly LimitedParameter[];
  /** floor, coefficient, exponent with covariance (3 x 3), where they were fitted with the lines. */
  readonly widthLaw: {
    readonly ns: readonly number[];
    readonly values: Float64Array;
    readonly covariance: Float64Array;
  } | null;
  readonly strengthLaw: { readonly ns: readonly number[]; readonly coefficient: FittedValue } | null;
  /** q = q0 + q1/n^2. */
  readonly asymmetryLaw: { readonly limit: FittedValue; readonly slope: FittedValue } | null;
  readonly extra: readonly ExtraFit[];
}

function derivedFrom(
  law: ConstrainedParts["tied"],
  ns: readonly number[],
  rules: LineRules,
): ConstrainedParts["tied"] {
  // Of a group that shares a value the first stands for all.
  const later = (list: readonly Rule[]): number[] =>
    ns.filter((_, j) => {
      const rule = list[j]!;
      if (rule.kind !== "shared") return false;
      return list.findIndex((other) => other.kind === "shared" && other.group === rule.group) < j;
    });
  const join = (name: LineParameterName): number[] =>
    [...law[name], ...later(rules[name])].sort((a, b) => a - b);
  return { energy: join("energy"), width: join("width"), area: join("area"), asymmetry: join("asymmetry") };
}

/**
 * What      The solution in the wide parameters, so that it reads like one of the plain model: covariance F C F' with F the
 *           derivative of (theta, c) by (u, c'). What is held has no variance and no covariance, exactly.
 * Shapes    solution: of the constrained problem; result: of its inner one.
 */
export function expandSolution(
  problem: ConstrainedProblem,
  solution: SeparableSolution,
): { solution: SeparableSolution; parts: ConstrainedParts } {
  const { inner, nonlinear: n, spec } = problem;
  const size = n + problem.linear;
  const u = solution.theta;
  const { theta, jacobian } = problem.parametersAt(u, true);
  const { coefficients, slopes, matrix } = problem.coefficientsAt(u, solution.coefficients);
  const p = inner.nonlinear;
  const l = inner.linear;
  const wide = problem.wideNonlinear + problem.wideLinear;
  const rows: [number, number][][] = Array.from({ length: wide }, (_, i) => {
    const row: [number, number][] = [];
    const source = i < problem.wideNonlinear ? jacobian : slopes;
    const from = (i < problem.wideNonlinear ? i : i - problem.wideNonlinear) * n;
    for (let a = 0; a < n; a++) if (source[from + a] !== 0) row.push([a, source[from + a]!]);
    if (i >= problem.wideNonlinear)
      for (const [at, factor] of matrix[i - problem.wideNonlinear]!)
        if (factor !== 0) row.push([n + at, factor]);
    return row;
  });
  const between = (a: number, b: number): number => {
    let sum = 0;
    for (const [i, fi] of rows[a]!)
      for (const [j, fj] of rows[b]!) sum += fi * fj * solution.covariance[i * size + j]!;
    return sum;
  };
  const place = (i: number): number => (i < p ? i : problem.wideNonlinear + i - p);
  const full = p + l;
  const covariance = new Float64Array(full * full);
  for (let a = 0; a < full; a++)
    for (let b = 0; b <= a; b++) {
      covariance[a * full + b] = between(place(a), place(b));
      covariance[b * full + a] = covariance[a * full + b]!;
    }
  const activeBounds = new Int8Array(p);
  for (let i = 0; i < p; i++) {
    const at = problem.placeOf(i);
    if (at >= 0 && problem.own[at]!.user === null) activeBounds[i] = solution.activeBounds[at]!;
  }
  const valueAt = (i: number): FittedValue => ({
    value: i < problem.wideNonlinear ? theta[i]! : coefficients[i - problem.wideNonlinear]!,
    sigma: Math.sqrt(between(i, i)),
  });
  const sigmaOf = (i: number): number => Math.sqrt(solution.covariance[i * size + i]!);
  const ns = inner.spec.ns;
  const which = (kind: Rule["kind"]): ConstrainedParts["held"] => {
    const pick = (rules: readonly Rule[]): number[] => ns.filter((_, j) => rules[j]!.kind === kind);
    const { energy, width, area, asymmetry } = spec.rules;
    return { energy: pick(energy), width: pick(width), area: pick(area), asymmetry: pick(asymmetry) };
  };
  const lawPlaces = problem.widthLawPlaces;
  const asymmetryAt = problem.asymmetryLawPlace;
  const parts: ConstrainedParts = {
    parameters: size,
    held: which("held"),
    tied: derivedFrom(which("law"), ns, spec.rules),
    limited: problem.own.flatMap((one, at): LimitedParameter[] => {
      const side = solution.activeBounds[at]!;
      if (one.user === null || side === 0) return [];
      return [{ ...one.user, side: side < 0 ? "low" : "high", bound: side < 0 ? one.low : one.high }];
    }),
    widthLaw:
      lawPlaces === null
        ? null
        : {
            ns: which("law").width,
            values: Float64Array.from(lawPlaces, (at, i) =>
              at >= 0
                ? u[at]!
                : [spec.links.widths.floor, spec.links.widths.coefficient, spec.links.widths.exponent][i]!,
            ),
            covariance: Float64Array.from({ length: 9 }, (_, i) => {
              const a = lawPlaces[Math.floor(i / 3)]!;
              const b = lawPlaces[i % 3]!;
              return a >= 0 && b >= 0 ? solution.covariance[a * size + b]! : 0;
            }),
          },
    strengthLaw:
      problem.strengthPlace < 0
        ? null
        : {
            ns: which("law").area,
            coefficient: {
              value: solution.coefficients[problem.strengthPlace]!,
              sigma: sigmaOf(n + problem.strengthPlace),
            },
          },
    asymmetryLaw:
      asymmetryAt < 0
        ? null
        : {
            limit: { value: u[asymmetryAt]!, sigma: sigmaOf(asymmetryAt) },
            slope: { value: u[asymmetryAt + 1]!, sigma: sigmaOf(asymmetryAt + 1) },
          },
    extra: spec.extra.map((series, s) => {
      const at = problem.defectPlace(s);
      const oddAt = problem.extraAsymmetryPlace(s);
      return {
        name: series.name,
        defect: {
          value: at >= 0 ? u[at]! : series.defect,
          sigma: at >= 0 ? sigmaOf(at) : 0,
          atBound: at >= 0 && solution.activeBounds[at] !== 0,
        },
        asymmetry: oddAt < 0 ? null : { value: u[oddAt]!, sigma: sigmaOf(oddAt) },
        lines: problem.extraLines.flatMap((line, x) =>
          line.series !== s
            ? []
            : [
                {
                  n: line.n,
                  energy: valueAt(line.energyAt),
                  width: valueAt(line.widthAt),
                  area: valueAt(problem.wideNonlinear + l + x),
                },
              ],
        ),
      };
    }),
  };
  return {
    solution: {
      ...solution,
      theta: theta.slice(0, p),
      coefficients: coefficients.slice(0, l),
      covariance,
      activeBounds,
      undetermined: Uint8Array.from({ length: full }, (_, i) =>
        Number.isNaN(covariance[i * full + i]!) ? 1 : 0,
      ),
    },
    parts,
  };
}
