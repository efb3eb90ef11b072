import type { PowerLineResult, PowerResult } from "../protocol/index.ts";
import type { Flow } from "./flow.ts";
import { finite } from "./nominal.ts";
import { fitSaturation } from "./saturation.ts";
import { LINE_QUANTITIES } from "./types.ts";

export function plasmaEvidence(
  flow: Flow,
  results: readonly PowerLineResult[],
  exponent: PowerResult["exponent"],
  other: PowerResult["other"],
): PowerResult["other"]["plasma"] {
  const out: PowerResult["other"]["plasma"][number][] = [];
  const { lost } = other.highest_n;
  if (lost !== null) {
    out.push({
      evidence: "lines lost at the top of the ladder from the lowest to the highest power",
      value: lost,
      speaks: lost > 0 ? "a plasma takes the highest lines first; so does blockade" : "against a plasma",
    });
  }
  const byPower = flow.input.spectra
    .filter((one) => (one.apparent_gap_eV?.value ?? null) !== null)
    .sort((a, b) => a.power_uW - b.power_uW);
  if (byPower.length >= 2) {
    const change = byPower[byPower.length - 1]!.apparent_gap_eV!.value! - byPower[0]!.apparent_gap_eV!.value!;
    out.push({
      evidence: "change of the apparent gap, eV",
      value: change,
      speaks: change < 0 ? "a plasma lowers the apparent gap" : "against a plasma",
    });
  }
  const ratios = results.flatMap((line) => line.measured_over_expected.value ?? []).sort((a, b) => a - b);
  if (ratios.length > 0) {
    const middle = ratios[Math.floor(ratios.length / 2)]!;
    out.push({
      evidence: "measured over expected blockade volume, middle line",
      value: middle,
      speaks:
        middle > 10
          ? "more bleaching than this interaction explains: plasma, a longer lifetime or another coefficient"
          : "no more bleaching than the interaction explains within a factor 10",
    });
  }
  if (other.heating.significance !== null) {
    out.push({
      evidence: "growth of the lowest lines' width, standard errors",
      value: other.heating.significance,
      speaks: other.heating.significance > 3 ? "the crystal warms or its lines dephase" : "no warming seen",
    });
  }
  if (other.gap_shift_eV.significance !== null) {
    out.push({
      evidence: "common shift of the lines, standard errors",
      value: other.gap_shift_eV.significance,
      speaks:
        Math.abs(other.gap_shift_eV.significance) > 3
          ? "the lines move: heating or a shift of the gap"
          : "the lines stay, as under a thin plasma and under blockade",
    });
  }
  if (exponent !== null && exponent.predicted.value !== null && exponent.exponent.value !== null) {
    const sigma = Math.hypot(exponent.exponent.sigma ?? 0, exponent.predicted.sigma ?? 0);
    const away = (exponent.exponent.value - exponent.predicted.value) / sigma;
    out.push({
      evidence: "exponent of S minus the predicted one, standard errors",
      value: finite(away),
      speaks: Math.abs(away) < 3 ? "grows as blockade does" : "does not grow as this blockade does",
    });
  }
  const control = controlRatio(flow);
  if (control !== null) {
    out.push({
      evidence: "bleaching per power in the control series over that in the series, mean of the lines",
      value: control,
      speaks:
        control > 0.5
          ? "pairs without such excitons bleach nearly as much: plasma or heating"
          : "most of the bleaching needs excitons of these lines",
    });
  }
  return out;
}

/** Weighted mean of the control's S over the series' S. */
function controlRatio(flow: Flow): number | null {
  const control = flow.input.control;
  if (control === undefined) return null;
  let top = 0;
  let bottom = 0;
  flow.lines.forEach((line) => {
    const at = control.n.indexOf(line.n);
    if (line.reading !== "bleaches" || at < 0) return;
    const one = fitSaturation(control, LINE_QUANTITIES.area, at, {
      law: flow.beam.areaLaw,
      ratio: flow.beam.ratio,
    });
    if (one === null) return;
    const weight = (line.saturation.value! / Math.hypot(one.sigma, line.saturation.sigma ?? 0)) ** 2;
    top += (weight * one.saturation) / line.saturation.value!;
    bottom += weight;
  });
  return bottom > 0 ? top / bottom : null;
}
