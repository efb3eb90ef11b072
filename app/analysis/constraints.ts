import type {
  ConstraintSpec,
  ExtraSeries,
  LawLinks,
  LineParameterName,
  LineRules,
  ModelSpec,
  Rule,
} from "../fit/index.ts";
import { levelEnergy, WIDTH, widthLaw } from "../laws/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { LadderState, ModelChoices } from "./ladder-model.ts";

const FREE: Rule = { kind: "free" };

type Asked = Protocol["lines"]["constraints"][number];

function namesOf(asked: Asked): readonly number[] {
  return typeof asked.n === "number" ? [asked.n] : asked.n;
}

/** What the protocol asks of this parameter of this line; the last word counts. */
export function askedOf(protocol: Protocol, n: number, parameter: LineParameterName): Asked | null {
  const { constraints } = protocol.lines;
  for (let i = constraints.length - 1; i >= 0; i--) {
    const one = constraints[i]!;
    if (one.parameter === parameter && namesOf(one).includes(n)) return one;
  }
  return null;
}

/** n whose energies the level law gives in a tied fit: those of the range, as the protocol says line by line. */
export function tiedEnergies(state: LadderState, protocol: Protocol): number[] {
  return state.ns.filter((n, j) => {
    const asked = askedOf(protocol, n, "energy");
    return asked === null ? state.include[j] : asked.tie === "law";
  });
}

/**
 * Rules of every line. Ties to a law of their own (`width.mode`, `strength.mode`) hold for the lines named in `choices`,
 * which are those that the law was found to describe.
 */
export function lineRules(state: LadderState, protocol: Protocol, choices: ModelChoices): LineRules {
  const list = (parameter: LineParameterName, modeTied: readonly number[] | undefined): Rule[] =>
    state.ns.map((n) => {
      const asked = askedOf(protocol, n, parameter);
      if (asked === null) return modeTied?.includes(n) === true ? { kind: "law" } : FREE;
      if (asked.hold !== undefined) return { kind: "held", value: asked.hold };
      if (asked.tie === "law") return { kind: "law" };
      if (asked.tie === "shared") return { kind: "shared", group: protocol.lines.constraints.indexOf(asked) };
      if (asked.tie === "free") return FREE;
      return { kind: "bounded", low: asked.low ?? -Infinity, high: asked.high ?? Infinity };
    });
  const rules = {
    energy: list("energy", undefined),
    width: list("width", choices.tiedWidths),
    area: list("area", choices.tiedAreas),
    asymmetry: list("asymmetry", undefined).map((rule) => (rule.kind === "law" ? FREE : rule)),
  };
  return {
    ...rules,
    // Fewer free lines than the law has parameters cannot carry others.
    energy: enough(rules.energy, 3),
    width: choices.tiedWidths === undefined ? enough(rules.width, 2) : rules.width,
    area: choices.tiedAreas === undefined ? enough(rules.area, 1) : rules.area,
  };
}

function enough(rules: readonly Rule[], least: number): readonly Rule[] {
  const free = rules.filter((rule) => rule.kind === "free" || rule.kind === "bounded").length;
  return free >= least ? rules : rules.map((rule) => (rule.kind === "law" ? FREE : rule));
}

/** Lines that may speak for a law: not those that the user holds, nor those that follow from it. */
export function speaking(
  include: readonly boolean[],
  rules: readonly Rule[],
  ownLaw: boolean,
  least: number,
): readonly boolean[] {
  const may = include.map((one, j) => {
    const { kind } = rules[j]!;
    return one && kind !== "held" && (ownLaw || kind !== "law");
  });
  return may.filter(Boolean).length >= least ? may : include;
}

/** The rules with all that they need, or null where the plain model does; and how the model has its asymmetries. */
export function constraintSpec(
  state: LadderState,
  protocol: Protocol,
  choices: ModelChoices,
  rules: LineRules,
  links: LawLinks,
  range: readonly [number, number],
): { constraints: ConstraintSpec; asymmetry: ModelSpec["asymmetry"] } {
  const single = rules.asymmetry.some((rule) => rule.kind !== "free");
  const asked = choices.asymmetry;
  const asymmetry: ModelSpec["asymmetry"] =
    asked === "law" || (single && asked === "shared") ? "each" : single && asked === "zero" ? "free" : asked;
  // Symmetric lines with one that is not: the others are held at zero.
  const asymmetryRules =
    single && asked === "zero"
      ? rules.asymmetry.map((rule): Rule => (rule.kind === "free" ? { kind: "held", value: 0 } : rule))
      : rules.asymmetry;
  const tied = rules.width.filter((rule) => rule.kind === "law").length;
  const exponentFree = protocol.width.exponent === "free" && tied >= 2;
  return {
    asymmetry,
    constraints: {
      rules: { ...rules, asymmetry: asymmetryRules },
      links,
      widthLaw: {
        from: choices.tiedWidths === undefined ? "others" : "own",
        exponentFree,
        floorFree: protocol.width.floor_kind !== "none" && tied >= (exponentFree ? 3 : 2),
      },
      strengthLaw: choices.tiedAreas === undefined ? "others" : "own",
      asymmetryLaw: asked === "law",
      extra: extraSeries(state, protocol, range),
    },
  };
}

/** Lines of other series inside the window. */
function extraSeries(
  state: LadderState,
  protocol: Protocol,
  [low, high]: readonly [number, number],
): ExtraSeries[] {
  const out = new Float64Array(WIDTH.size);
  return protocol.series.extra.flatMap((one): ExtraSeries[] => {
    const ns = one.n.filter((n) => {
      const energy = levelEnergy(n, state.levels.gap, state.levels.rydberg, one.defect, 0);
      return n - one.defect > 0.3 && energy > low && energy < high;
    });
    if (ns.length === 0) return [];
    return [
      {
        name: one.name,
        ns,
        defect: one.defect,
        defectHeld: one.hold_defect,
        width: one.width,
        // One line alone cannot tell its asymmetry from the background.
        ownAsymmetry: one.asymmetry === "own" && ns.length > 1,
        startWidth: Float64Array.from(ns, (n) => {
          widthLaw(n, state.levels.defect0, state.widths, out);
          return Math.max(1e-9, out[WIDTH.width]!);
        }),
      },
    ];
  });
}
