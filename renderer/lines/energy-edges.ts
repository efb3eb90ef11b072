import type { Protocol, RunglineResult } from "../../app/protocol/index.ts";
import type { Edge } from "../plot/edge-handle.tsx";
import { roomOf, ruleOf, type LineRule } from "./line-rules.ts";

/** What a hand can place: a tenth of a µeV. */
const DECIMALS = 7;

/** The energy that a line is held at, or the bounds that it stays between, as borders that can be moved in the figure. */
export function energyEdges(
  result: RunglineResult,
  protocol: Protocol,
  n: number | null,
  take: (n: number, rule: LineRule) => void,
): readonly Edge[] {
  if (n === null || !result.lines.some((line) => line.n === n)) return [];
  const rule = ruleOf(protocol, n, "energy");
  const [lowest, highest] = roomOf(result, n);
  const round = (x: number): number => Number(x.toFixed(DECIMALS));
  if (rule.kind === "held")
    return [
      {
        label: `Energy that n = ${n} is held at`,
        x: rule.value,
        lowest,
        highest,
        of: "line",
        onMoved: (x) => take(n, { kind: "held", value: round(x) }),
      },
    ];
  if (rule.kind !== "bounded") return [];
  const { low, high } = rule;
  const least = 10 ** -DECIMALS;
  return [
    ...(low === null
      ? []
      : [
          {
            label: `Lower bound of the energy of n = ${n}`,
            x: low,
            lowest: Math.min(low, lowest),
            highest: (high ?? highest) - least,
            of: "line" as const,
            onMoved: (x: number) => take(n, { ...rule, low: round(x) }),
          },
        ]),
    ...(high === null
      ? []
      : [
          {
            label: `Upper bound of the energy of n = ${n}`,
            x: high,
            lowest: (low ?? lowest) + least,
            highest: Math.max(high, highest),
            of: "line" as const,
            onMoved: (x: number) => take(n, { ...rule, high: round(x) }),
          },
        ]),
  ];
}
