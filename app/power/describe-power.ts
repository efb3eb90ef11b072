import { NOT_DETERMINED } from "../base/index.ts";
import type { PowerLineResult, PowerResult } from "../protocol/index.ts";
import type { BleachingLaw } from "./bleaching-law.ts";
import { describeCrystal } from "./crystal.ts";
import { describeCurves } from "./curves.ts";
import { describeLine } from "./describe-line.ts";
import { describeExponent, describeVolumeExponent } from "./describe-scaling.ts";
import type { Flow } from "./flow.ts";
import { broadeningTrends, gapShift, heating, highestSeen } from "./other-effects.ts";
import { plasmaEvidence } from "./plasma-evidence.ts";
import { saturationOf } from "./saturation.ts";
import { NO_SPREAD } from "./volumes.ts";

/** The part `power` of a result, from what was found. */
export function describePower(flow: Flow): PowerResult {
  const { input, beam, inputs, lines, volumes, factor, fitted, joint } = flow;
  const { table } = input;
  const shift = gapShift(table, input.spectra, factor);
  const warm = heating(
    table,
    lines.map((line) => line.broadening),
    factor,
  );
  const results = lines.map((_, i) => describeLine(flow, i));
  const exponent = describeExponent(flow);
  const volumeExponent = describeVolumeExponent(flow, results);
  const other: PowerResult["other"] = {
    gap_shift_eV: shift,
    broadening: broadeningTrends(
      table,
      lines.map((line) => line.broadening),
      factor,
    ),
    heating: warm,
    highest_n: highestSeen(input.spectra),
    plasma: [],
  };
  const k = fitted.length;
  return {
    excitation: beam.excitation,
    law: beam.areaLaw,
    law_comparison: compareLaws(flow),
    repeat_factor: flow.repeatFactor,
    spectra: input.spectra.map((one) => ({
      label: one.label,
      power_uW: one.power_uW,
      gap_eV: one.gap_eV ?? NOT_DETERMINED,
      apparent_gap_eV: one.apparent_gap_eV ?? NOT_DETERMINED,
      highest_n: one.highest_n,
      chi2: one.chi2,
      points: one.points,
    })),
    lines: results,
    exponent,
    volume_exponent: volumeExponent,
    correlation: {
      n: fitted.map((line) => table.n[line]!),
      matrix:
        joint === null
          ? []
          : fitted.map((_, a) =>
              fitted.map((__, b) => {
                const at = (i: number, j: number): number => joint.covariance[(k + i) * 2 * k + k + j]!;
                const root = Math.sqrt(at(a, a) * at(b, b));
                return root > 0 ? at(a, b) / root : a === b ? 1 : 0;
              }),
            ),
    },
    inter_state: describeInterState(flow),
    inputs: [...inputs.rows],
    budget: meanBudget(results),
    other: { ...other, plasma: plasmaEvidence(flow, results, exponent, other) },
    crystal: describeCrystal(flow, results),
    curves: describeCurves(flow, volumes),
  };
}

function describeInterState(flow: Flow): PowerResult["inter_state"] {
  const energy = flow.input.protocol.power.pump_energy_eV;
  if (energy === null) return null;
  const pump = flow.pump;
  if (pump === null || pump === "off") return { pump_n: null, pump_energy_eV: energy, volumes: [] };
  return {
    pump_n: flow.lines[pump.line]!.n,
    pump_energy_eV: energy,
    volumes: flow.lines.map((line, i) => ({
      n: line.n,
      volume_um3: line.reading === "bleaches" ? flow.volumes[i]!.volume : NO_SPREAD,
    })),
  };
}

/** Shares by input, mean over the lines that have a measured volume. */
function meanBudget(results: readonly PowerLineResult[]): PowerResult["budget"] {
  const sums = new Map<string, number>();
  let count = 0;
  for (const line of results) {
    if (line.budget.length === 0) continue;
    count++;
    for (const { input, share } of line.budget) sums.set(input, (sums.get(input) ?? 0) + share);
  }
  return [...sums].map(([input, sum]) => ({ input, share: sum / count })).sort((a, b) => b.share - a.share);
}

/** The same areas under the laws of the other ways to take a series, and how S would differ. */
function compareLaws(flow: Flow): PowerResult["law_comparison"] {
  const { beam } = flow;
  const seen = flow.lines.filter((line) => line.reading === "bleaches" && line.area !== null);
  if (seen.length === 0) return [];
  const candidates: BleachingLaw[] = ["separate-pump", "scanned-probe", "gaussian-self", "gaussian-scanned"];
  if (!candidates.includes(beam.areaLaw)) candidates.push(beam.areaLaw);
  return candidates
    .map((law) => {
      const fits = seen.map((line) => saturationOf(line.area!.series, { law, ratio: beam.ratio }));
      const scanned = law === "scanned-probe" || law === "gaussian-scanned";
      const toVolume = (scanned ? 2 : 1) / beam.areaToVolume;
      let top = 0;
      let bottom = 0;
      fits.forEach((fit, i) => {
        const chosen = seen[i]!.area!;
        if (fit === null || !(fit.saturation > 0) || !(chosen.saturation > 0)) return;
        const weight = (chosen.saturation / chosen.sigma) ** 2;
        top += weight * Math.log((toVolume * fit.saturation) / chosen.saturation);
        bottom += weight;
      });
      return {
        law,
        chi2: fits.reduce((sum, fit) => sum + (fit?.fit.chi2 ?? Infinity), 0),
        dof: fits.reduce((sum, fit) => sum + (fit?.fit.degreesOfFreedom ?? 0), 0),
        chosen: law === beam.areaLaw,
        saturation_ratio: bottom > 0 ? Math.exp(top / bottom) : null,
      };
    })
    .filter((one) => Number.isFinite(one.chi2))
    .sort((a, b) => a.chi2 - b.chi2);
}
