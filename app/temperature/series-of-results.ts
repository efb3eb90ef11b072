import { doubt, type Note } from "../base/index.ts";
import type { RunglineResult, TemperatureResult, TemperatureSeries } from "../protocol/index.ts";
import { fitTemperatureSeries, type TemperaturePoint } from "./fit-series.ts";

/** One result with the temperature that belongs to it. */
export interface TemperatureReading {
  readonly result: RunglineResult;
  readonly temperature_K: number;
}

const FEWEST_POINTS = 4;
/** Below this range neither law can be told from a parabola. */
const SHORT_RANGE_K = 20;

/** Steps of the curves of the laws from 0 K to a little above the highest temperature. */
const GRID_STEPS = 60;

/**
 * Gap, floor of the widths and the width of every line that is there at enough temperatures, against temperature.
 * `whose`: the sample, null where there are several. `systematic`: whether the systematic part of the gap counts, in quadrature; it is common to spectra of one set-up.
 */
export function temperatureSeriesOf(
  readings: readonly TemperatureReading[],
  whose: { readonly sample: string; readonly batch: string } | null,
  systematic: boolean,
  factor: number,
): TemperatureResult {
  const sorted = [...readings]
    .filter(({ result }) => result.status === "converged")
    .sort((one, other) => one.temperature_K - other.temperature_K);
  const series: TemperatureSeries[] = [];
  const notes: Note[] = [];
  const highest = Math.max(0, ...sorted.map((one) => one.temperature_K));
  const grid = Array.from({ length: GRID_STEPS + 1 }, (_, i) => (1.04 * highest * i) / GRID_STEPS);
  const add = (
    kind: "gap" | "width",
    quantity: string,
    n: number | null,
    pick: (result: RunglineResult) => { value: number | null; sigma: number | null } | undefined,
  ): void => {
    const points = sorted.flatMap(({ result, temperature_K }): (TemperaturePoint & { file: string })[] => {
      const one = pick(result);
      return one === undefined || one.value === null || one.sigma === null || !(one.sigma > 0)
        ? []
        : [{ temperature_K, value: one.value, sigma: one.sigma, file: result.source.file }];
    });
    const different = new Set(points.map((point) => point.temperature_K)).size;
    if (different < (kind === "gap" ? FEWEST_POINTS : 3)) return;
    const found = fitTemperatureSeries(kind, points, factor, grid);
    series.push({
      quantity,
      n,
      sample: whose?.sample ?? null,
      batch: whose?.batch ?? null,
      points,
      grid_K: grid,
      ...found,
    });
    notes.push(...doubtsOf(quantity, found));
  };
  add("gap", "gap_eV", null, ({ series: levels, systematic: part }) => {
    if (levels === null) return undefined;
    const { sigma } = levels.scaled?.gap_eV ?? levels.gap_eV;
    const whole = sigma === null ? null : Math.hypot(sigma, systematic ? (part?.gap_eV ?? 0) : 0);
    return { value: levels.gap_eV.value, sigma: whole };
  });
  add("width", "width_floor_eV", null, ({ width_law: law }) => law?.floor_eV);
  const ns = [...new Set(sorted.flatMap(({ result }) => result.lines.map((line) => line.n)))].sort(
    (one, other) => one - other,
  );
  for (const n of ns)
    add("width", `width_eV[${n}]`, n, ({ lines }) => lines.find((line) => line.n === n)?.width_eV);

  const temperatures = sorted.map((one) => one.temperature_K);
  const range = Math.max(...temperatures) - Math.min(...temperatures);
  if (!series.some((one) => one.quantity === "gap_eV"))
    notes.push(
      doubt(
        "temperatures-few",
        "temperature",
        `A law of the gap needs ${FEWEST_POINTS} temperatures with a fitted gap, ${new Set(temperatures).size} are there.`,
        "measure at more temperatures, or check that the headers name them",
      ),
    );
  else if (range < SHORT_RANGE_K)
    notes.push(
      doubt(
        "temperature-range-short",
        "temperature",
        `The temperatures span ${range.toPrecision(2)} K only: the parameters of every law hang together, and none can be told from another.`,
        "measure up to where kT is a good part of the phonon energy",
      ),
    );
  return { series, notes };
}

function doubtsOf(
  quantity: string,
  { laws, preferred, decided }: Pick<TemperatureSeries, "laws" | "preferred" | "decided">,
): Note[] {
  const notes: Note[] = [];
  const about = `temperature.${quantity}`;
  const best = laws.find((law) => law.law === preferred);
  if (best === undefined) return notes;
  if (best.p !== null && best.p < 0.01)
    notes.push(
      doubt(
        "temperature-law-rejected",
        about,
        `Even the best law (${best.law}) does not describe ${quantity} within its errors (p = ${best.p.toPrecision(2)}); its errors are scaled by ${best.scaled_by.toPrecision(3)}.`,
        "check the temperatures and the systematic errors of each spectrum",
      ),
    );
  if (!decided && laws.length > 1)
    notes.push(
      doubt(
        "temperature-law-not-decided",
        about,
        `The data do not decide between the laws of ${quantity}: the information criteria differ by less than 6.`,
        "extend the range of temperatures",
      ),
    );
  const held = best.parameters.filter(({ quantity: one }) => one.sigma === null).map(({ name }) => name);
  if (held.length > 0)
    notes.push(
      doubt(
        "temperature-parameter-not-determined",
        about,
        `${held.join(" and ")} of the law ${best.law} ${held.length === 1 ? "is" : "are"} not determined (at a bound, or not in the data).`,
        "extend the range of temperatures",
      ),
    );
  return notes;
}
