import { doubt, type Note } from "../base/index.ts";
import {
  quotedLevels,
  type RunglineResult,
  type TemperatureLaw,
  type TemperatureResult,
  type TemperatureSeries,
} from "../protocol/index.ts";
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
  };
  add("gap", "gap_eV", null, ({ series: levels, systematic: part }) => {
    if (levels === null) return undefined;
    const { sigma } = quotedLevels(levels).gap_eV;
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
  return { series, notes: [...notes, ...doubtsOf(series)] };
}

/** What is to be said of every series, each kind of doubt once with all that it is about. */
function doubtsOf(all: readonly TemperatureSeries[]): Note[] {
  const notes: Note[] = [];
  const list = (members: readonly TemperatureSeries[]): string =>
    members.map(({ quantity }) => quantity).join(", ");
  const add = (members: readonly TemperatureSeries[], code: string, text: string, remedy: string): void => {
    if (members.length === 0) return;
    const about = members.length === 1 ? `temperature.${members[0]!.quantity}` : "temperature";
    notes.push(doubt(code, about, text, remedy));
  };
  const bestOf = ({ laws, preferred }: TemperatureSeries): TemperatureLaw | undefined =>
    laws.find((law) => law.law === preferred);
  const rejected = all.filter((one) => (bestOf(one)?.p ?? 1) < 0.01);
  add(
    rejected,
    "temperature-law-rejected",
    `Even the best law does not describe ${list(rejected)} within the errors (p = ${rejected
      .map((one) => bestOf(one)!.p!.toPrecision(2))
      .join(", ")}); errors of the parameters are scaled by ${rejected
      .map((one) => bestOf(one)!.scaled_by.toPrecision(3))
      .join(", ")}.`,
    "check the temperatures and the systematic errors of each spectrum",
  );
  const open = all.filter((one) => bestOf(one) !== undefined && !one.decided && one.laws.length > 1);
  add(
    open,
    "temperature-law-not-decided",
    `The data do not decide between the laws of ${list(open)}: the information criteria differ by less than 6.`,
    "extend the range of temperatures",
  );
  const held = (one: TemperatureSeries): readonly string[] =>
    (bestOf(one)?.parameters ?? []).filter(({ quantity }) => quantity.sigma === null).map(({ name }) => name);
  const undetermined = all.filter((one) => held(one).length > 0);
  add(
    undetermined,
    "temperature-parameter-not-determined",
    `Not determined by the best law (at a bound, or not in the data): ${undetermined
      .map((one) => `${held(one).join(" and ")} of ${one.quantity}`)
      .join("; ")}.`,
    "extend the range of temperatures",
  );
  return notes;
}
