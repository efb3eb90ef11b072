import type { Wording } from "../base/index.ts";
import { wordJudgeIssue, wordPowerSeriesIssue } from "../power/index.ts";
import { wordProtocolIssue } from "../protocol/index.ts";
import { wordSpectrumIssue } from "../spectrum/index.ts";
import { wordTableIssue } from "../table/index.ts";
import type { TaskIssue } from "./analyse-file.ts";

/** Any issue in plain words: the same in every shell. */
export function wordIssue(issue: TaskIssue): Wording {
  const { code } = issue;
  if (code.startsWith("table/")) return wordTableIssue(issue as Parameters<typeof wordTableIssue>[0]);
  if (code.startsWith("spectrum/"))
    return wordSpectrumIssue(issue as Parameters<typeof wordSpectrumIssue>[0]);
  if (code.startsWith("protocol/"))
    return wordProtocolIssue(issue as Parameters<typeof wordProtocolIssue>[0]);
  if (code.startsWith("power-series/"))
    return wordPowerSeriesIssue(issue as Parameters<typeof wordPowerSeriesIssue>[0]);
  if (code.startsWith("power/")) return wordJudgeIssue(issue as Parameters<typeof wordJudgeIssue>[0]);
  return { message: "cancelled", remedy: "start again" };
}
