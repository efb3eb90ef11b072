import { describe, expect, it } from "vitest";
import { doubt } from "../../app/base/index.ts";
import { resolveProtocol, type Protocol, type RunglineResult } from "../../app/protocol/index.ts";
import { valueText } from "../../renderer/ledger/value-text.ts";
import { energyEdges } from "../../renderer/lines/energy-edges.ts";
import { firstExtra } from "../../renderer/lines/extra-series.tsx";
import {
  countRules,
  faultOf,
  firstRule,
  LINE_PARAMETERS,
  markOf,
  RESULT_KEYS,
  roomOf,
  ruleInWords,
  ruleOf,
  withRule,
  type Constraint,
  type LineParameter,
  type LineRule,
} from "../../renderer/lines/line-rules.ts";
import { fromPrinted, lineUnits, printed } from "../../renderer/lines/line-units.ts";
import { lineSection } from "../../renderer/lines/lines-ledger.ts";
import { protocolToJson } from "../../app/report/index.ts";
import { editChoices, EMPTY_SESSION, type Session } from "../../renderer/store/session.ts";
import { fixtureBytes, resultOf } from "../support/analyse-bytes.ts";
import { isDoubtful, rungLayout } from "../../renderer/rungs/rung-layout.ts";
import { sampleResult } from "./sample.ts";

const result = sampleResult();
const units = lineUnits(result);
const protocolOf = (input: object): Protocol => {
  const resolved = resolveProtocol(input);
  if (!resolved.ok) throw new Error(JSON.stringify(resolved.issues));
  return resolved.value;
};
const withConstraints = (constraints: readonly Constraint[]): Protocol =>
  protocolOf({ lines: { constraints } });

const RULES: readonly LineRule[] = [
  { kind: "common" },
  { kind: "held", value: 1.5e-4 },
  { kind: "bounded", low: 1e-4, high: null },
  { kind: "bounded", low: null, high: 3e-4 },
  { kind: "bounded", low: 1e-4, high: 3e-4 },
  { kind: "law" },
  { kind: "shared", ns: [5, 6] },
];

describe("a rule of one line", () => {
  it.each(RULES)("is written into the protocol and read back: %j", (rule) => {
    const protocol = withConstraints(withRule([], 5, "width", rule));
    expect(ruleOf(protocol, 5, "width")).toEqual(rule);
    expect(ruleOf(protocol, 5, "area")).toEqual({ kind: "common" });
    expect(ruleOf(protocol, 7, "width")).toEqual({ kind: "common" });
  });

  it("takes the place of what was said of this parameter of this line, and of nothing else", () => {
    const before: Constraint[] = [
      { n: [5, 6, 7], parameter: "width", low: 1e-5 },
      { n: 5, parameter: "area", hold: 0.1 },
      { n: 5, parameter: "width", tie: "law" },
    ];
    expect(withRule(before, 5, "width", { kind: "held", value: 2e-4 })).toEqual([
      { n: [6, 7], parameter: "width", low: 1e-5 },
      { n: 5, parameter: "area", hold: 0.1 },
      { n: 5, parameter: "width", hold: 2e-4 },
    ]);
  });

  it("leaves no group of one: who was shared with is free again", () => {
    const shared = withRule([], 5, "width", { kind: "shared", ns: [5, 6] });
    expect(withRule(shared, 5, "width", { kind: "common" })).toEqual([]);
    const three = withRule([], 5, "width", { kind: "shared", ns: [5, 6, 7] });
    expect(withRule(three, 5, "width", { kind: "common" })).toEqual([
      { n: [6, 7], parameter: "width", tie: "shared" },
    ]);
  });

  it("frees one line where all others follow the law, and says nothing where all are free", () => {
    const free = withRule([], 6, "width", { kind: "free" });
    expect(ruleOf(protocolOf({ width: { mode: "tied" }, lines: { constraints: free } }), 6, "width")).toEqual(
      {
        kind: "free",
      },
    );
    expect(ruleOf(withConstraints(free), 6, "width")).toEqual({ kind: "common" });
  });

  it("is counted once for each value that it is about", () => {
    const protocol = withConstraints([
      { n: [5, 6], parameter: "width", tie: "shared" },
      { n: 5, parameter: "width", hold: 1e-4 },
      { n: 5, parameter: "energy", tie: "law" },
    ]);
    // Derived: widths of 5 and 6, energy of 5
    expect(countRules(protocol)).toBe(3);
  });
});

describe("the first value of a rule", () => {
  it.each(LINE_PARAMETERS)("of the %s is the fitted one, to a tenth of its standard error", (parameter) => {
    const { value, sigma } = result.lines[0]![RESULT_KEYS[parameter]];
    const held = firstRule("held", result, 5, parameter, units);
    if (held?.kind !== "held") throw new Error("nothing to hold");
    expect(Math.abs(held.value - value!)).toBeLessThanOrEqual(
      Math.max(0.1 * (sigma ?? 0), 1e-8 * Math.abs(value!)),
    );
  });

  it.each(LINE_PARAMETERS)(
    "bounds the %s on both sides of the fitted one, and is taken as it stands",
    (parameter) => {
      const { value } = result.lines[0]![RESULT_KEYS[parameter]];
      const rule = firstRule("bounded", result, 5, parameter, units);
      if (rule?.kind !== "bounded") throw new Error("no bounds");
      expect(rule.low).toBeLessThan(value!);
      expect(rule.high).toBeGreaterThan(value!);
      expect(faultOf(rule, result, 5, parameter, units)).toBeNull();
      expect(withConstraints(withRule([], 5, parameter, rule)).lines.constraints).toHaveLength(1);
    },
  );

  it("is shared with the next line, the last one with the one before", () => {
    expect(firstRule("shared", result, 5, "width", units)).toEqual({ kind: "shared", ns: [5, 6] });
    expect(firstRule("shared", result, 9, "width", units)).toEqual({ kind: "shared", ns: [8, 9] });
  });
});

describe("what is typed for a line", () => {
  it("keeps its digits through the change of unit, both ways", () => {
    // Derived: 172.8 µeV is 0.0001728 eV; the plain product is a neighbouring double
    expect(fromPrinted(172.8, units.width)).toBe(0.0001728);
    for (const typed of [172.8, 0.1, 95.95, 1e-3, 2047.4])
      expect(printed(fromPrinted(typed, units.width), units.width)).toBe(String(typed));
  });

  it("is refused with words where it makes no sense", () => {
    const fault = (rule: LineRule, parameter: "energy" | "width"): string | null =>
      faultOf(rule, result, 6, parameter, units);
    expect(fault({ kind: "held", value: 0 }, "width")).toContain("above zero");
    expect(fault({ kind: "bounded", low: -1e-6, high: null }, "width")).toContain("above zero");
    expect(fault({ kind: "bounded", low: 2e-4, high: 1e-4 }, "width")).toContain("above the upper");
    expect(fault({ kind: "shared", ns: [6] }, "width")).toContain("at least one more");
    const [low, high] = roomOf(result, 6);
    expect(fault({ kind: "held", value: (low + high) / 2 }, "energy")).toBeNull();
    for (const outside of [low, high])
      expect(fault({ kind: "held", value: outside }, "energy")).toContain("between");
  });
});

describe("a mark in the table", () => {
  const held = withRule([], 6, "width", { kind: "held", value: 1.2e-4 });
  const fittedWith = (
    constraints: readonly Constraint[],
    notes: RunglineResult["notes"] = [],
  ): RunglineResult => sampleResult({ protocol: withConstraints(constraints), notes });

  it("says what the fit did, and nothing of a value that was free", () => {
    const made = fittedWith(held);
    expect(markOf(made, made.protocol, 6, "width", units)).toEqual({
      kind: "held",
      words: "held at 120 µeV",
      pending: false,
      atBound: false,
    });
    expect(markOf(made, made.protocol, 6, "area", units)).toBeNull();
  });

  it("tells apart what the next fit will do from what this one did", () => {
    const set = markOf(sampleResult(), withConstraints(held), 6, "width", units)!;
    expect([set.pending, set.words]).toEqual([true, "held at 120 µeV from the next fit on"]);
    const freed = markOf(fittedWith(held), withConstraints([]), 6, "width", units)!;
    expect([freed.pending, freed.words]).toEqual([true, "held at 120 µeV; free from the next fit on"]);
  });

  it("says that a value stands at its bound, or how far away it is", () => {
    const bounded = withRule([], 6, "width", { kind: "bounded", low: 1e-5, high: 1 });
    const at = fittedWith(bounded, [
      doubt("constraint-at-bound", "lines[n=6].width_eV", "it ended there", "widen"),
    ]);
    expect(markOf(at, at.protocol, 6, "width", units)!.atBound).toBe(true);
    const away = fittedWith(bounded);
    const { value, sigma } = away.lines[1]!.width_eV;
    // Derived: the lower bound is the nearer one
    const standardErrors = Number(((value! - 1e-5) / sigma!).toPrecision(2));
    expect(markOf(away, away.protocol, 6, "width", units)!.words).toContain(
      standardErrors < 100 ? `; ${standardErrors} standard errors from` : "over 100 standard errors",
    );
  });

  it("stands at every line that a law of all describes, and at no other", () => {
    const made = sampleResult({ protocol: protocolOf({ series: { mode: "tied" } }) });
    const [first, last] = made.series!.fit_n;
    for (const { n } of made.lines)
      expect(markOf(made, made.protocol, n, "energy", units)?.kind).toBe(
        n >= first && n <= last ? "law" : undefined,
      );
  });
});

describe("a held value", () => {
  const hold = (key: "width_eV" | "area", value: number): RunglineResult => {
    const { lines } = sampleResult();
    return sampleResult({
      lines: lines.map((line) =>
        line.n === 6
          ? {
              ...line,
              [key]: { value, sigma: 0, low: value, high: value },
              ...(key === "area" && { significance: 0 }),
            }
          : line,
      ),
    });
  };

  it("is said to be held in the ledger and has no error", () => {
    const width = lineSection(hold("width_eV", 1.2e-4), 6)!.entries.find(({ id }) => id === "line-width")!;
    expect(valueText(width)).toEqual({ value: "120", unit: "µeV (held)" });
  });

  it("puts no line in doubt: a held area has no error that it could be compared with", () => {
    const made = hold("area", 0.05);
    expect(isDoubtful(made, 1)).toBe(false);
    expect(rungLayout(made, 500)!.rungs.find(({ n }) => n === 6)!.kind).toBe("determined");
  });
});

describe("the figure", () => {
  it("has a border for a held energy and for each bound, which cannot pass their neighbours", () => {
    const taken: [number, LineRule][] = [];
    const edges = (rule: LineRule): ReturnType<typeof energyEdges> =>
      energyEdges(result, withConstraints(withRule([], 6, "energy", rule)), 6, (n, moved) =>
        taken.push([n, moved]),
      );
    const energy = result.lines[1]!.energy_eV.value!;
    const [held] = edges({ kind: "held", value: energy });
    expect([held!.lowest, held!.highest]).toEqual(roomOf(result, 6));
    held!.onMoved(2.16934567891);
    // Derived: to a tenth of a µeV
    expect(taken).toEqual([[6, { kind: "held", value: 2.1693457 }]]);
    const [low, high] = edges({ kind: "bounded", low: energy - 1e-4, high: energy + 1e-4 });
    expect(low!.highest).toBeLessThan(high!.x);
    expect(high!.lowest).toBeGreaterThan(low!.x);
    expect(edges({ kind: "bounded", low: null, high: energy + 1e-4 })).toHaveLength(1);
    expect(edges({ kind: "common" })).toEqual([]);
    expect(energyEdges(result, result.protocol, null, () => undefined)).toEqual([]);
  });
});

describe("another series", () => {
  it("starts with a name of its own and n of lines that were seen, and is a protocol", () => {
    const one = firstExtra([], result);
    expect(one.n.every((n) => result.lines.some((line) => line.n === n))).toBe(true);
    const two = firstExtra([one], result);
    expect(two.name).not.toBe(one.name);
    expect(protocolOf({ series: { extra: [one, two] } }).series.extra).toHaveLength(2);
  });
});

describe("every rule", () => {
  it.each(RULES.slice(1))("has words of its own: %j", (rule) => {
    expect(ruleInWords(rule, 5, "width", units)).toMatch(
      /held at|not below|not above|between|follows|one value/,
    );
  });
});

describe("what the window sets", () => {
  it("repeats from the protocol of its result to the last bit, as the command line reads it", () => {
    const bytes = fixtureBytes("demo/TH-A1_transmission.csv");
    const base = {
      material: { preset: "cuprous-oxide-yellow-p" },
      uncertainty: { systematic: false, profile: false },
    };
    const first = resultOf(bytes, base);
    const printedUnits = lineUnits(first);
    const asked: readonly [number, LineParameter, LineRule["kind"]][] = [
      [5, "width", "held"],
      [6, "energy", "bounded"],
      [7, "area", "held"],
      [8, "asymmetry", "bounded"],
      [10, "width", "shared"],
      [12, "energy", "law"],
    ];
    const session = asked.reduce<Session>(
      (before, [n, parameter, kind]) => {
        const said = resolveProtocol(before.choices["one"]);
        const rule = firstRule(kind, first, n, parameter, printedUnits);
        if (!said.ok || rule === null) throw new Error("no rule");
        const constraints = withRule(said.value.lines.constraints, n, parameter, rule);
        return editChoices(before, { lines: { constraints } }, `${parameter} of n = ${n}`);
      },
      { ...EMPTY_SESSION, currentId: "one", choices: { one: base } },
    );
    const window = resultOf(bytes, session.choices["one"]);
    const command = resultOf(bytes, JSON.parse(protocolToJson(window.protocol)));
    expect(window.protocol.lines.constraints).toHaveLength(asked.length);
    // Derived: the same file, protocol and engine
    expect({ ...command, run: null }).toEqual({ ...window, run: null });
    const held = window.lines.find(({ n }) => n === 5)!.width_eV;
    expect([held.sigma, held.low, held.high]).toEqual([0, held.value, held.value]);
  });
});
