import {
  doubt,
  failure,
  partOfWatch,
  success,
  symmetric,
  type Note,
  type Quantity,
  type Result,
  type Watch,
  type Wording,
} from "../base/index.ts";
import {
  analyse,
  drawCurves,
  intervalFactor,
  sortNotes,
  withHeaderSlit,
  type AnalysisResult,
  type Curves,
} from "../analysis/index.ts";
import type { PowerResult, Protocol } from "../protocol/index.ts";
import { fitPowerSeries, type FittedMember, type FittedSeries } from "./fit-series.ts";
import { lightBias } from "./light-bias.ts";
import { judgePower } from "./judge-power.ts";
import type { PowerSeries, SeriesIssue } from "./read-series.ts";
import { wordPowerSeriesIssue, type PowerSeriesIssue } from "./series-issue.ts";
import { controlTable, powerInput, withHeaderFacts } from "./series-input.ts";
import type { JudgeIssue } from "./judge-issue.ts";

/** One spectrum as it was fitted, for a figure of all of them above each other. */
export interface SeriesCurve {
  readonly label: string;
  readonly power_uW: number;
  readonly curves: Curves;
}

export interface SeriesAnalysis {
  /** That of the reference spectrum with the part `power`; null in it where no series was seen. */
  readonly result: AnalysisResult;
  /** Ascending in power; the first is the reference. Without a series the reference alone, as it was analysed. */
  readonly spectra: readonly SeriesCurve[];
  /** Everything that was left out, in words. */
  readonly failed: readonly { readonly label: string; readonly wordings: readonly Wording[] }[];
}

/**
 * The main job on a power series: the spectrum of the lowest power gives the lines, all spectra are fitted together, and
 * what the power does is judged, beside a control series where there is one (its own reference, its own joint fit).
 * Pure: the same series and protocol give the same bits. Throws `Cancelled` when the watch
 * says so.
 */
export function analyseSeries(
  series: PowerSeries,
  protocol: Protocol,
  watch: Watch,
  wordIssue: (issue: SeriesIssue) => Wording,
  control: PowerSeries | null = null,
): Result<SeriesAnalysis, JudgeIssue> {
  const reference = series.members[0]!;
  const alone = withoutSmeared(protocol);
  const base = analyse(reference.spectrum, alone, partOfWatch(watch, 0.08, 0.4));
  const unread = series.failed.map(({ label, issues }) => ({ label, wordings: issues.map(wordIssue) }));
  const acting = withHeaderSlit(protocol, reference.spectrum.slit);
  const fitted = fitPowerSeries(
    series.members,
    base.result,
    acting,
    partOfWatch(watch, 0.4, control === null ? 0.9 : 0.82),
  );
  if (fitted === null)
    return success({
      result: {
        ...base.result,
        status: "no-series",
        notes: sortNotes([noReference(reference.label), ...series.notes, ...base.result.notes]),
        power: null,
      },
      spectra: [{ label: reference.label, power_uW: reference.power_uW, curves: base.curves }],
      failed: unread,
    });
  const failed = [
    ...unread,
    ...fitted.failed.map(({ label, issues }) => ({ label, wordings: issues.map(wordPowerSeriesIssue) })),
  ];
  const factor = intervalFactor(protocol.uncertainty.level);
  const facts = withHeaderFacts(protocol, fitted.members);
  const beside = control === null ? null : fitControl(control, alone, partOfWatch(watch, 0.82, 0.9));
  const controlled = beside?.fitted ?? null;
  const input = powerInput(fitted, facts.protocol, factor);
  const judged = judgePower(
    controlled === null ? input : { ...input, control: controlTable(controlled) },
    partOfWatch(watch, 0.9, 1),
  );
  if (!judged.ok) return failure(...judged.issues);
  const notes = [
    ...leftOut(failed),
    ...(beside?.notes ?? []),
    ...judged.value.notes,
    ...fitted.notes,
    ...lightBias(fitted, base.result, acting),
    ...series.notes,
    ...facts.notes,
    ...base.result.notes,
  ];
  watch.report(1, "done");
  return success({
    result: {
      ...base.result,
      status: fitted.joint.solution.converged ? base.result.status : "not-converged",
      notes: sortNotes(notes),
      power: {
        ...judged.value.power,
        fit: {
          ...describeJoint(fitted, failed, factor),
          ...(controlled === null ? {} : { control: sourcesOf(controlled) }),
        },
      },
    },
    spectra: fitted.members.map(drawMember),
    failed,
  });
}

function drawMember({ member, points, fit }: FittedMember): SeriesCurve {
  return {
    label: member.label,
    power_uW: member.power_uW,
    curves: drawCurves(member.spectrum, points, { fit }),
  };
}

function describeJoint(
  { joint, members }: FittedSeries,
  failed: SeriesAnalysis["failed"],
  factor: number,
): NonNullable<PowerResult["fit"]> {
  const { solution } = joint;
  const first = members[0]!.fit;
  const { problem } = first;
  const values = problem.tiedLaw(first.solution.theta);
  const size = first.solution.theta.length + first.solution.coefficients.length;
  const law = [values.gap, values.rydberg, values.defect0, values.defect2];
  const quantity = (p: number): Quantity =>
    p < problem.layout.lawCount
      ? symmetric(law[p]!, Math.sqrt(first.solution.covariance[p * size + p]!), factor)
      : { value: law[p]!, sigma: 0, low: law[p]!, high: law[p]! };
  return {
    shared: [...joint.names],
    gap_eV: quantity(0),
    rydberg_eV: quantity(1),
    defect0: quantity(2),
    defect2: quantity(3),
    termination: solution.termination,
    chi2: solution.chi2,
    dof: solution.degreesOfFreedom,
    reduced_chi2: solution.chi2 / Math.max(1, solution.degreesOfFreedom),
    iterations: solution.iterations,
    sources: sourcesOf({ members }),
    failed: failed.map(({ label, wordings }) => ({
      label,
      message: wordings
        .map(({ message, remedy }) => (remedy === "" ? message : `${message}; ${remedy}`))
        .join(". "),
    })),
  };
}

function sourcesOf({ members }: Pick<FittedSeries, "members">): NonNullable<PowerResult["fit"]>["sources"] {
  return members.map(({ member, fit, points, heldWidths }) => ({
    label: member.label,
    file: member.spectrum.file,
    sha256: member.spectrum.sha256,
    power_uW: member.power_uW,
    power_from: member.power_from,
    points: points.energy.length,
    reduced_chi2: fit.solution.chi2 / Math.max(1, fit.solution.degreesOfFreedom),
    tail: fit.factor?.value ?? null,
    held_widths: [...heldWidths],
  }));
}

/** The joint fit has no columns for what lines have lost to their surroundings; its reference must not have them either. */
function withoutSmeared(protocol: Protocol): Protocol {
  return { ...protocol, tail: { ...protocol.tail, smeared: "none" } };
}

/** The control series as fitted, null where it shows no series or too few powers, with what has to be said. */
function fitControl(
  control: PowerSeries,
  protocol: Protocol,
  watch: Watch,
): { fitted: FittedSeries | null; notes: Note[] } {
  const { spectrum } = control.members[0]!;
  const base = analyse(spectrum, protocol, partOfWatch(watch, 0, 0.5));
  const fitted = fitPowerSeries(
    control.members,
    base.result,
    withHeaderSlit(protocol, spectrum.slit),
    partOfWatch(watch, 0.5, 1),
  );
  const powers = new Set(fitted?.members.map(({ member }) => member.power_uW)).size;
  if (fitted !== null && powers >= 2) return { fitted, notes: [] };
  return {
    fitted: null,
    notes: [
      doubt(
        "power-control-left-out",
        "power.other.plasma",
        fitted === null
          ? `The control series shows no exciton series in ${control.members[0]!.label}, its lowest power, and says nothing.`
          : "The control series has fewer than two powers that could be fitted, and says nothing.",
        "give the control series at several powers, over the same window as the series",
      ),
    ],
  };
}

function leftOut(failed: SeriesAnalysis["failed"]): Note[] {
  if (failed.length === 0) return [];
  const names = failed.map(({ label }) => label).join(", ");
  return [
    doubt(
      "power-spectra-left-out",
      "power.spectra",
      `${failed.length} of the spectra could not take part (${names}); the rest was finished.`,
      "see power.fit.failed for the reasons",
    ),
  ];
}

function noReference(label: string): Note {
  const issue: PowerSeriesIssue = { code: "power-series/no-reference", facts: { file: label } };
  const { message, remedy } = wordPowerSeriesIssue(issue);
  return doubt("power-no-reference", "power", `${message}.`, remedy);
}
