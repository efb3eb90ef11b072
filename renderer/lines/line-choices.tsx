import type { Protocol, RunglineResult } from "../../app/protocol/index.ts";
import { resolveProtocol } from "../../app/protocol/index.ts";
import { Amount, Clause, Pick, Sentence } from "../controls/choices.tsx";
import { parseNumber } from "../controls/parse-number.ts";
import { currentChoices, useController, useWindow } from "../store/context.ts";
import {
  countRules,
  firstRule,
  followsLaw,
  LAW_NAMES,
  LINE_PARAMETERS,
  ruleOf,
  type LineParameter,
  type LineRule,
} from "./line-rules.ts";
import { fromPrinted, lineUnits, printed } from "./line-units.ts";
import { parseList } from "./parse-list.ts";
import { takeRule } from "./take-rule.ts";

/** What the fit may do with the chosen line, as a sentence; and one way to have all lines free again. */
export function LineChoices({ result, n }: { readonly result: RunglineResult; readonly n: number | null }) {
  const resolved = resolveProtocol(useWindow(currentChoices));
  if (!resolved.ok) return null;
  const protocol = resolved.value;
  const fitted = n !== null && result.lines.some((line) => line.n === n);
  return (
    <>
      {fitted && (
        <section className="line-choices" aria-label={`What the fit may do with n = ${n}`}>
          <Sentence label={`What the fit may do with n = ${n}`}>
            <strong>n = {n}:</strong>{" "}
            {LINE_PARAMETERS.map((parameter, i) => (
              <ParameterClause
                key={`${n} ${parameter}`}
                result={result}
                protocol={protocol}
                n={n}
                parameter={parameter}
                end={i === LINE_PARAMETERS.length - 1 ? "." : ","}
              />
            ))}
          </Sentence>
        </section>
      )}
      <FreeAll protocol={protocol} />
    </>
  );
}

interface ClauseProps {
  readonly result: RunglineResult;
  readonly protocol: Protocol;
  readonly n: number;
  readonly parameter: LineParameter;
  readonly end: string;
}

/** `width stays at 172.8 µeV`: what a parameter may do, and the numbers that this takes. */
function ParameterClause({ result, protocol, n, parameter, end }: ClauseProps) {
  const controller = useController();
  const units = lineUnits(result);
  const unit = units[parameter];
  const rule = ruleOf(protocol, n, parameter);
  const named = (what: string): string => `${what} of the ${parameter} of n = ${n}`;
  const take = (next: LineRule): string | null => takeRule(controller, result, protocol, n, parameter, next);
  const amount = (label: string, value: number | null, onValue: (value: number | null) => string | null) => (
    <Amount
      label={`${named(label)}${unit.unit === "" ? "" : ` in ${unit.unit}`}`}
      value={value === null ? "" : printed(value, unit)}
      placeholder={rule.kind === "bounded" ? "any" : ""}
      width={5}
      onCommit={(text) => {
        const typed = parseNumber(text);
        if (text !== "" && typed === null) return "a number";
        return onValue(typed === null ? null : fromPrinted(typed, unit));
      }}
    />
  );
  return (
    <Clause>
      {parameter}{" "}
      <Pick<LineRule["kind"]>
        label={`What the ${parameter} of n = ${n} may do`}
        value={rule.kind}
        options={kindsOf(protocol, parameter, rule).map((kind) => ({
          value: kind,
          text: kindInWords(kind, protocol, parameter),
        }))}
        onPick={(kind) => {
          const next = firstRule(kind, result, n, parameter, units);
          if (next !== null) take(next);
        }}
      />
      {rule.kind === "held" && (
        <>
          {" "}
          {amount("Value", rule.value, (value) =>
            value === null
              ? `a number${unit.unit === "" ? "" : ` of ${unit.unit}`}`
              : take({ ...rule, value }),
          )}
        </>
      )}
      {rule.kind === "bounded" && (
        <>
          {" "}
          {amount("Lower bound", rule.low, (low) => bounded(low, rule.high))} and{" "}
          {amount("Upper bound", rule.high, (high) => bounded(rule.low, high))}
        </>
      )}
      {rule.kind === "shared" && (
        <>
          {" "}
          <Amount
            label={named("Lines that share the value")}
            value={rule.ns.join(", ")}
            placeholder=""
            width={4}
            onCommit={(text) => {
              const ns = parseList(text);
              return take({ kind: "shared", ns: ns === null || ns === "auto" ? [] : ns });
            }}
          />
        </>
      )}
      {(rule.kind === "held" || rule.kind === "bounded") && unit.unit !== "" && ` ${unit.unit}`}
      {end}
    </Clause>
  );

  /** Without any bound it is as for all lines. */
  function bounded(low: number | null, high: number | null): string | null {
    return take(low === null && high === null ? { kind: "common" } : { kind: "bounded", low, high });
  }
}

/** What can be chosen; a law that all lines follow is no choice of a single one, but what it has in common with them. */
function kindsOf(protocol: Protocol, parameter: LineParameter, rule: LineRule): readonly LineRule["kind"][] {
  const all = followsLaw(protocol, parameter);
  return [
    "common" as const,
    ...(all ? (["free"] as const) : []),
    "held" as const,
    "bounded" as const,
    // The asymmetries have one law for all lines, which the sentence above chooses.
    ...(parameter !== "asymmetry" && (!all || rule.kind === "law") ? (["law"] as const) : []),
    // Levels of different n have no value in common.
    ...(parameter !== "energy" ? (["shared"] as const) : []),
  ];
}

const COMMON_ASYMMETRY = {
  shared: "is that of all lines",
  free: "is free",
  zero: "is zero",
  law: "follows its law",
} as const satisfies Record<Protocol["lines"]["asymmetry"], string>;

function kindInWords(kind: LineRule["kind"], protocol: Protocol, parameter: LineParameter): string {
  switch (kind) {
    case "common":
      if (parameter === "asymmetry") return COMMON_ASYMMETRY[protocol.lines.asymmetry];
      return followsLaw(protocol, parameter) ? "follows the law as all do" : "is free";
    case "free":
      return "is free";
    case "held":
      return "stays at";
    case "bounded":
      return "stays between";
    case "law":
      return `follows ${LAW_NAMES[parameter]}`;
    case "shared":
      return "is one for n =";
  }
}

const ALL_OF = { energy: "all levels", width: "all widths", area: "all areas" } as const;

/** How much is not free, and the way back. */
function FreeAll({ protocol }: { readonly protocol: Protocol }) {
  const controller = useController();
  const single = countRules(protocol);
  const parts = [
    ...(single === 0 ? [] : [`${single} ${single === 1 ? "value" : "values"} of single lines`]),
    ...(["energy", "width", "area"] as const)
      .filter((parameter) => followsLaw(protocol, parameter))
      .map((parameter) => ALL_OF[parameter]),
  ];
  if (parts.length === 0) return null;
  return (
    <p className="small free-all">
      <span title={parts.join(", ")}>Not free: {parts.join(", ")}</span>
      <button
        type="button"
        className="quiet"
        onClick={() =>
          controller.change(
            {
              lines: { constraints: [] },
              series: { mode: "free" },
              width: { mode: "free" },
              strength: { mode: "free" },
            },
            "all lines free",
          )
        }
      >
        Free all lines
      </button>
    </p>
  );
}
