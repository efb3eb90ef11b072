import { readFileSync } from "node:fs";
import { makeRandom } from "../../app/base/index.ts";
import { judgePower, withPeaks, type PowerSpectrum } from "../../app/power/index.ts";
import { resolveProtocol } from "../../app/protocol/index.ts";
import type { AnalysedSeries } from "../../app/tasks/index.ts";
import { makeLine, makeResult } from "../main/make-result.ts";
import { sampleCurves } from "./sample.ts";

interface Truth {
  readonly powers_uW: readonly number[];
  readonly gap_shift_eV_per_uW: number;
  readonly broadening_eV_per_uW: number;
  readonly crystal: { readonly gap_eV: number; readonly rydberg_eV: number; readonly defect0: number };
  readonly lines: readonly {
    readonly n: number;
    readonly energy_eV: number;
    readonly width_eV: number;
    readonly area: number;
    readonly saturation_per_uW: number;
  }[];
}

export const TRUTH = JSON.parse(
  readFileSync(new URL("../../fixtures/demo/power/TH-A4_power-series.truth.json", import.meta.url), "utf8"),
) as Truth;

const FROM = 5;
const TO = 14;
/** Relative standard error of areas and widths at zero power; bleached lines are as uncertain as before. */
const RELATIVE = 0.01;

/** What the fit of the demo series would give if it were exact but for seeded noise, judged as the program judges. */
export function samplePower(): AnalysedSeries {
  const protocol = resolveProtocol({
    material: { preset: "cuprous-oxide-yellow-p" },
    signal: { thickness_um: 30 },
    power: { spot_diameter_um: 12, excitation: "separate-pump", draws: 400 },
  });
  if (!protocol.ok) throw new Error("the protocol of the sample must resolve");
  const lines = TRUTH.lines.filter(({ n }) => n >= FROM && n <= TO);
  const powers = TRUTH.powers_uW;
  const random = makeRandom(7);
  const m = powers.length;
  const k = lines.length;
  const values = new Float64Array(3 * m * k);
  const covariance = new Float64Array(values.length ** 2);
  powers.forEach((power, j) =>
    lines.forEach((line, i) => {
      const at = j * k + i;
      const put = (quantity: number, value: number, sigma: number): void => {
        const place = quantity * m * k + at;
        values[place] = value + sigma * random.normal();
        covariance[place * values.length + place] = sigma * sigma;
      };
      put(0, line.energy_eV + TRUTH.gap_shift_eV_per_uW * power, 2e-8 * line.n);
      put(1, line.width_eV + TRUTH.broadening_eV_per_uW * power, RELATIVE * line.width_eV);
      put(2, line.area / (1 + line.saturation_per_uW * power), RELATIVE * line.area);
    }),
  );
  const spectra = powers.map((power, j): PowerSpectrum => ({
    label: `T ${power} uW`,
    power_uW: power,
    gap_eV: null,
    apparent_gap_eV: null,
    highest_n: TO - (j > 7 ? 1 : 0),
    chi2: 5900 + j,
    points: 6000,
  }));
  const judged = judgePower({
    spectra,
    table: withPeaks(
      lines.map(({ n }) => n),
      [...powers],
      values,
      covariance,
      new Float64Array(k),
    ),
    signalUnit: "1/cm",
    surrounding: new Float64Array(k).fill(90),
    surroundingSigma: new Float64Array(k).fill(2),
    series: {
      gap_eV: TRUTH.crystal.gap_eV,
      rydberg_eV: TRUTH.crystal.rydberg_eV,
      defect0: TRUTH.crystal.defect0,
      defect2: 0,
      covariance: Float64Array.from({ length: 16 }, (_, i) => (i % 5 === 0 ? 1e-14 : 0)),
    },
    protocol: protocol.value,
  });
  if (!judged.ok) throw new Error("the sample must be judged");
  const { power, notes } = judged.value;
  return {
    result: makeResult({
      protocol: protocol.value,
      lines: lines.map((line) => makeLine(line.n, line.energy_eV, line.width_eV)),
      notes: [...notes],
      power,
    }),
    spectra: powers.map((power_uW) => ({ label: `T ${power_uW} uW`, power_uW, curves: sampleCurves() })),
  };
}
