import type { Issue, Wording } from "../base/index.ts";

export type JudgeIssue =
  | (Issue & { readonly code: "power/one-power"; readonly facts: { found: number; needed: number } })
  | (Issue & { readonly code: "power/bad-power"; readonly facts: { spectrum: string; found: number } })
  | (Issue & { readonly code: "power/no-common-line"; readonly facts: { spectra: number } });

export function wordJudgeIssue(issue: JudgeIssue): Wording {
  switch (issue.code) {
    case "power/one-power":
      return {
        message: `power series: ${issue.facts.found} different power${issue.facts.found === 1 ? "" : "s"} found, at least ${issue.facts.needed} are needed`,
        remedy: "add spectra at other powers, or give the powers with power.values_uW",
      };
    case "power/bad-power":
      return {
        message: `power series: ${issue.facts.spectrum} has the power ${issue.facts.found} uW`,
        remedy: "powers are zero or positive; give them with power.values_uW",
      };
    case "power/no-common-line":
      return {
        message: `power series: no line is common to the ${issue.facts.spectra} spectra`,
        remedy: "look at the lowest power alone first, or name the lines with lines.n",
      };
  }
}
