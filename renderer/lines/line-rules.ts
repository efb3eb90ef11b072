import type { LineResult, Protocol, RunglineResult } from "../../app/protocol/index.ts";
import { printed, type LineUnits, type PrintedUnit } from "./line-units.ts";

export type Constraint = Protocol["lines"]["constraints"][number];
export type LineParameter = Constraint["parameter"];

export const LINE_PARAMETERS: readonly LineParameter[] = ["energy", "width", "area", "asymmetry"];

/** The name of a parameter's value in a result. */
export const RESULT_KEYS = {
  energy: "energy_eV",
  width: "width_eV",
  area: "area",
  asymmetry: "asymmetry",
} as const satisfies Record<LineParameter, keyof LineResult>;

/**
 * What the protocol says of one parameter of one line, in its units. `common`: nothing but what holds for all lines;
 * `free`: exempt from a law that all others follow; `shared`: one value for these n.
 */
export type LineRule =
  | { readonly kind: "common" }
  | { readonly kind: "free" }
  | { readonly kind: "law" }
  | { readonly kind: "held"; readonly value: number }
  | { readonly kind: "bounded"; readonly low: number | null; readonly high: number | null }
  | { readonly kind: "shared"; readonly ns: readonly number[] };

function namesOf({ n }: Constraint): readonly number[] {
  return typeof n === "number" ? [n] : n;
}

/** Whether all lines that their law describes follow it in this parameter. */
export function followsLaw({ series, width, strength }: Protocol, parameter: LineParameter): boolean {
  const modes = { energy: series.mode, width: width.mode, area: strength.mode, asymmetry: "free" } as const;
  return modes[parameter] === "tied";
}

/** The last word of the protocol counts, as in the fit. */
export function ruleOf(protocol: Protocol, n: number, parameter: LineParameter): LineRule {
  const said = protocol.lines.constraints.findLast(
    (one) => one.parameter === parameter && namesOf(one).includes(n),
  );
  if (said === undefined) return { kind: "common" };
  if (said.hold !== undefined) return { kind: "held", value: said.hold };
  if (said.tie === "law") return { kind: "law" };
  if (said.tie === "shared") return { kind: "shared", ns: namesOf(said) };
  if (said.tie === "free") return { kind: followsLaw(protocol, parameter) ? "free" : "common" };
  return { kind: "bounded", low: said.low ?? null, high: said.high ?? null };
}

/** The constraints with this rule in place of what they said of this parameter of these lines. */
export function withRule(
  constraints: readonly Constraint[],
  n: number,
  parameter: LineParameter,
  rule: LineRule,
): Constraint[] {
  const touched = rule.kind === "shared" ? rule.ns : [n];
  const others = constraints.flatMap((one): Constraint[] => {
    if (one.parameter !== parameter) return [one];
    const names = namesOf(one);
    const left = names.filter((name) => !touched.includes(name));
    if (left.length === names.length) return [one];
    // A value that only one line has is shared with nobody.
    if (left.length === 0 || (one.tie === "shared" && left.length === 1)) return [];
    return [{ ...one, n: left.length === 1 ? left[0]! : left }];
  });
  const written = asConstraint(n, parameter, rule);
  return written === null ? others : [...others, written];
}

function asConstraint(n: number, parameter: LineParameter, rule: LineRule): Constraint | null {
  switch (rule.kind) {
    case "common":
      return null;
    case "held":
      return { n, parameter, hold: rule.value };
    case "bounded":
      return {
        n,
        parameter,
        ...(rule.low !== null && { low: rule.low }),
        ...(rule.high !== null && { high: rule.high }),
      };
    case "shared":
      return { n: [...rule.ns], parameter, tie: "shared" };
    case "law":
    case "free":
      return { n, parameter, tie: rule.kind };
  }
}

/** How many values of single lines the protocol speaks of. */
export function countRules(protocol: Protocol): number {
  const said = protocol.lines.constraints.flatMap((one) => namesOf(one).map((n) => `${one.parameter} ${n}`));
  return new Set(said).size;
}

/** Bounds at first far enough away not to bite. */
const FIRST_ASYMMETRY_REACH = 0.2;

/** A rule of this kind as it stands at first: at the fitted value, or around it. Null where nothing was fitted. */
export function firstRule(
  kind: LineRule["kind"],
  result: RunglineResult,
  n: number,
  parameter: LineParameter,
  units: LineUnits,
): LineRule | null {
  const at = result.lines.findIndex((line) => line.n === n);
  const line = result.lines[at];
  if (line === undefined) return null;
  const { value, sigma } = line[RESULT_KEYS[parameter]];
  const unit = units[parameter];
  switch (kind) {
    case "held":
      return value === null ? null : { kind, value: rounded(value, sigma, unit) };
    case "bounded": {
      if (value === null) return null;
      const [low, high] = firstBounds(line, parameter, value);
      const digits = (high - low) / 100;
      return { kind, low: rounded(low, digits, unit), high: rounded(high, digits, unit) };
    }
    case "shared": {
      const other = result.lines[at + 1]?.n ?? result.lines[at - 1]?.n;
      return other === undefined ? null : { kind, ns: [n, other].sort((a, b) => a - b) };
    }
    default:
      return { kind };
  }
}

function firstBounds(line: LineResult, parameter: LineParameter, value: number): [number, number] {
  const half = (line.width_eV.value ?? 0) / 2;
  switch (parameter) {
    case "energy":
      return half > 0 ? [value - half, value + half] : [value - 1e-4, value + 1e-4];
    case "width":
      return [value / 2, 2 * value];
    case "area":
      return value > 0 ? [0, 2 * value] : [2 * value, 0];
    case "asymmetry":
      return [value - FIRST_ASYMMETRY_REACH, value + FIRST_ASYMMETRY_REACH];
  }
}

/** To two digits of the standard error or finer, so that holding moves nothing that could be seen. */
function rounded(value: number, sigma: number | null, { scale }: PrintedUnit): number {
  if (sigma === null || !(sigma > 0)) return Number(value.toPrecision(9));
  const digits = Math.min(14, Math.max(0, 1 - Math.floor(Math.log10(sigma * scale))));
  return Number((Number((value * scale).toFixed(digits)) / scale).toPrecision(14));
}

/** What is wrong with a rule for this line, in words for the place where it was typed; null: nothing. */
export function faultOf(
  rule: LineRule,
  result: RunglineResult,
  n: number,
  parameter: LineParameter,
  units: LineUnits,
): string | null {
  const unit = units[parameter];
  if (rule.kind === "bounded") {
    const { low, high } = rule;
    if (low !== null && high !== null && low >= high) return "the lower bound lies above the upper one";
    if (parameter === "width" && ((low ?? 0) < 0 || (high ?? 1) <= 0)) return "widths are above zero";
  }
  if (rule.kind === "held" && parameter === "width" && rule.value <= 0)
    return `a width in ${unit.unit} above zero`;
  if (rule.kind === "held" && parameter === "energy") {
    const [low, high] = roomOf(result, n);
    if (rule.value <= low || rule.value >= high)
      return `between the neighbours: ${printed(low, unit)} to ${printed(high, unit)} eV`;
  }
  if (rule.kind === "shared" && (rule.ns.length < 2 || !rule.ns.includes(n)))
    return `n = ${n} and at least one more, such as ${n}, ${n + 1}`;
  return null;
}

/** Between which energies a line can stand: its neighbours, else the ends of the window. */
export function roomOf(result: RunglineResult, n: number): readonly [number, number] {
  const window = result.fit?.window_eV ?? result.reading.range_eV;
  let [low, high] = window;
  for (const { n: other, energy_eV: energy } of result.lines) {
    if (energy.value === null) continue;
    if (other < n) low = Math.max(low, energy.value);
    if (other > n) high = Math.min(high, energy.value);
  }
  return [low, high];
}

export const LAW_NAMES = {
  energy: "the level law",
  width: "the width law",
  area: "the strength law",
  asymmetry: "the law of the asymmetries",
} as const satisfies Record<LineParameter, string>;

/** A rule as it is read out beside the value; "" where there is none. */
export function ruleInWords(rule: LineRule, n: number, parameter: LineParameter, units: LineUnits): string {
  const unit = units[parameter];
  const text = (value: number): string => `${printed(value, unit)}${unit.unit === "" ? "" : ` ${unit.unit}`}`;
  switch (rule.kind) {
    case "common":
      return "";
    case "free":
      return `free, though the others follow ${LAW_NAMES[parameter]}`;
    case "law":
      return `follows ${LAW_NAMES[parameter]}`;
    case "held":
      return `held at ${text(rule.value)}`;
    case "bounded":
      if (rule.low === null) return `not above ${text(rule.high ?? Infinity)}`;
      if (rule.high === null) return `not below ${text(rule.low)}`;
      return `between ${printed(rule.low, unit)} and ${text(rule.high)}`;
    case "shared":
      return `one value with n = ${rule.ns.filter((other) => other !== n).join(", ")}`;
  }
}

/** What stands beside a value that is not simply fitted. */
export interface RuleMark {
  readonly kind: Exclude<LineRule["kind"], "common">;
  readonly words: string;
  /** The choices say this, the fit that stands was made without it, or the other way round. */
  readonly pending: boolean;
  readonly atBound: boolean;
}

/** The mark of one value: what the fit did, and what the choices want of the next one. */
export function markOf(
  result: RunglineResult,
  chosen: Protocol,
  n: number,
  parameter: LineParameter,
  units: LineUnits,
): RuleMark | null {
  const fitted = effective(result, result.protocol, n, parameter);
  const wanted = effective(result, chosen, n, parameter);
  const words = (rule: LineRule): string => ruleInWords(rule, n, parameter, units);
  if (JSON.stringify(fitted) !== JSON.stringify(wanted)) {
    const shown = wanted.kind === "common" ? fitted : wanted;
    if (shown.kind === "common") return null;
    return {
      kind: shown.kind,
      words:
        wanted.kind === "common"
          ? `${words(fitted)}; free from the next fit on`
          : `${words(wanted)} from the next fit on`,
      pending: true,
      atBound: false,
    };
  }
  if (fitted.kind === "common") return null;
  const about = `lines[n=${n}].${RESULT_KEYS[parameter]}`;
  const atBound = result.notes.some((note) => note.code === "constraint-at-bound" && note.about === about);
  return {
    kind: fitted.kind,
    words: words(fitted) + (atBound ? ", and stands at that bound" : distance(fitted, result, n, parameter)),
    pending: false,
    atBound,
  };
}

/** A rule with the law that all lines follow put in for those that the law describes. */
function effective(
  result: RunglineResult,
  protocol: Protocol,
  n: number,
  parameter: LineParameter,
): LineRule {
  const rule = ruleOf(protocol, n, parameter);
  if (rule.kind !== "common" || !followsLaw(protocol, parameter)) return rule;
  const law = { energy: result.series, width: result.width_law, area: result.strength_law, asymmetry: null }[
    parameter
  ];
  const range = law?.fit_n ?? null;
  return range !== null && n >= range[0] && n <= range[1] ? { kind: "law" } : rule;
}

/** How far a value within bounds is from the nearer one, in its standard errors. */
function distance(rule: LineRule, result: RunglineResult, n: number, parameter: LineParameter): string {
  if (rule.kind !== "bounded") return "";
  const { value, sigma } = result.lines.find((line) => line.n === n)![RESULT_KEYS[parameter]];
  if (value === null || sigma === null || !(sigma > 0)) return "";
  const away = Math.min(value - (rule.low ?? -Infinity), (rule.high ?? Infinity) - value) / sigma;
  const bound = rule.low === null || rule.high === null ? "that bound" : "the nearer bound";
  return `; ${away < 100 ? Number(away.toPrecision(2)) : "over 100"} standard errors from ${bound}`;
}
