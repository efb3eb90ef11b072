import type { Wording } from "../../app/base/index.ts";
import { wordProtocolIssue, type ProtocolIssue } from "../../app/protocol/index.ts";
import { wordBatchIssue, type BatchIssue } from "../../app/tasks/index.ts";

/** Why samples could not be compared, in words. */
export function wordComparisonIssue(issue: BatchIssue | ProtocolIssue): Wording {
  if (issue.code === "batch/too-few" || issue.code === "batch/no-such-reference")
    return wordBatchIssue(issue);
  if (issue.code === "batch/no-such-fact")
    return {
      message: `no result says anything readable about "${issue.facts.found}"`,
      remedy: `facts in the headers: ${issue.facts.known === "" ? "none" : issue.facts.known}`,
    };
  return wordProtocolIssue(issue);
}
