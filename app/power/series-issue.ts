import type { Issue, Wording } from "../base/index.ts";

export type PowerSeriesIssueCode =
  | "power-series/no-power"
  | "power-series/negative-power"
  | "power-series/unknown-unit"
  | "power-series/values-count"
  | "power-series/too-few-powers"
  | "power-series/other-unit"
  | "power-series/no-lines"
  | "power-series/no-reference";

/** A power series that is none, or one spectrum that cannot take part; `file` is always among the facts. */
export interface PowerSeriesIssue extends Issue {
  readonly code: PowerSeriesIssueCode;
}

export function wordPowerSeriesIssue(issue: PowerSeriesIssue): Wording {
  const { facts } = issue;
  const say = (key: string): string => String(facts[key] ?? "");
  const file = say("file");
  switch (issue.code) {
    case "power-series/no-power":
      return {
        message: `${file}: at which power this spectrum was taken is not said (no power in a column header, a header line or the file name)`,
        remedy:
          'write it into the column header ("5 uW") or a header line ("Power: 5 uW"), name the files by it and say how (power.file_pattern=run_{power}), or type all powers in (power.values_uW=[1,2,5])',
      };
    case "power-series/negative-power":
      return {
        message: `${file}: the power ${say("found")} is negative`,
        remedy: "correct the sign, or type the powers in (power.values_uW)",
      };
    case "power-series/unknown-unit":
      return {
        message: `${file}: ${say("found")} is no power in nW, uW, mW or W`,
        remedy: "convert it, or type the powers in (power.values_uW)",
      };
    case "power-series/values-count":
      return {
        message: `power.values_uW has ${say("found")} powers, but the input has ${say("expected")} spectra (${file})`,
        remedy: "give one power for each spectrum, in the order of the files and of their columns",
      };
    case "power-series/too-few-powers":
      return {
        message: `${file}: a power series needs spectra at two powers at least, and ${say("found")} can be used`,
        remedy:
          "give the other spectra too: columns of one file, several files, or a folder; for one spectrum use rungline fit",
      };
    case "power-series/other-unit":
      return {
        message: `${file}: this spectrum is read in ${say("found")}, the reference in ${say("expected")}: their areas cannot be compared`,
        remedy: "give the thickness for all of them (signal.thickness_um), or leave this one out",
      };
    case "power-series/no-lines":
      return {
        message: `${file}: only ${say("found")} of the series' lines lie within this spectrum, three are needed`,
        remedy: "give a spectrum over the same range as the others, or leave this one out",
      };
    case "power-series/no-reference":
      return {
        message: `${file}: in the reference spectrum, that of the lowest power, no series was seen`,
        remedy:
          "look at it alone (rungline fit), name the material (--material) or the lines (lines.n), or add a spectrum at lower power",
      };
  }
}
