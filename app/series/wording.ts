import type { Issue, Wording } from "../base/index.ts";

export type SeriesIssue =
  | (Issue & {
      readonly code: "series/too-few-lines";
      readonly facts: { readonly law: string; readonly found: number; readonly needed: number };
    })
  | (Issue & {
      readonly code: "series/bad-covariance";
      readonly facts: { readonly law: string; readonly lines: number };
    })
  | (Issue & { readonly code: "series/not-finite"; readonly facts: { readonly law: string } });

export function wordSeriesIssue(issue: SeriesIssue): Wording {
  switch (issue.code) {
    case "series/too-few-lines":
      return {
        message: `the ${issue.facts.law} law needs ${issue.facts.needed} lines and has ${issue.facts.found}`,
        remedy: "widen the window, lower the noise, or name the lines in lines.n",
      };
    case "series/bad-covariance":
      return {
        message: `the covariance of ${issue.facts.lines} lines is not positive definite, so the ${issue.facts.law} law cannot be fitted`,
        remedy:
          "leave out lines that cannot be told apart (lines.n), or hold the asymmetry (lines.asymmetry)",
      };
    case "series/not-finite":
      return {
        message: `the ${issue.facts.law} law met numbers that are not finite`,
        remedy: "look at the lines table for a line without a standard error and leave it out (lines.n)",
      };
  }
}
