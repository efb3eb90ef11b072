import type { Protocol, RunglineResult } from "../../app/protocol/index.ts";
import type { Controller } from "../store/controller.ts";
import { faultOf, ruleInWords, withRule, type LineParameter, type LineRule } from "./line-rules.ts";
import { lineUnits } from "./line-units.ts";

/** One more rule as one undo step; or what is wrong with it, and nothing changes. */
export function takeRule(
  controller: Controller,
  result: RunglineResult,
  protocol: Protocol,
  n: number,
  parameter: LineParameter,
  rule: LineRule,
): string | null {
  const units = lineUnits(result);
  const fault = faultOf(rule, result, n, parameter, units);
  if (fault !== null) return fault;
  const words = ruleInWords(rule, n, parameter, units);
  controller.change(
    { lines: { constraints: withRule(protocol.lines.constraints, n, parameter, rule) } },
    `${parameter} of n = ${n} ${words === "" ? "as for all lines" : words}`,
  );
  return null;
}
