import { assumption, doubt, NOT_DETERMINED, type Note } from "../base/index.ts";
import type {
  ComparedPart,
  ComparedPower,
  ComparedPowerPart,
  ComparedSpread,
  ComparisonChoices,
  PowerLineResult,
  PowerResult,
} from "../protocol/index.ts";
import { compareNumbers, type OneNumber } from "./compare-parameter.ts";
import { twoSidedQuantile } from "./quantiles.ts";
import type { NamedResult } from "./read-samples.ts";

type PartName = ComparedPowerPart["name"];
type OfSample = ComparedPowerPart["samples"][number];
type Line = ComparedPower["series"][number]["lines"][number];

interface Series {
  readonly named: NamedResult;
  readonly power: PowerResult;
}

const NO_SPREAD: ComparedSpread = { ...NOT_DETERMINED, factor: null };

/** Inputs of a volume that every series of one set-up shares; the others belong to the crystal and its fit. */
const COMMON_INPUTS: readonly string[] = ["power", "transmission to sample", "spot diameter", "reflectance"];

/** Settings that enter S per stated power by themselves: S of different ones says nothing about crystals. */
const SET_UP_ALIKE = 0.02;

/**
 * What      Power series of several samples side by side: bleaching coefficient and blockade volume of one line, whose
 *           errors are factors (lognormal), compared by their logarithms; the exponent of S_n ~ n^k as it is. Means,
 *           scatter and tests as for every other parameter (compare-parameter.ts), turned back into medians, factors and
 *           ratios.
 * Units     1/uW, um^3, pure numbers.
 * Domain    null with fewer than two series; a line that does not bleach has no number here, only its limit.
 */
export function powerOf(results: readonly NamedResult[], choices: ComparisonChoices): ComparedPower | null {
  const all = results.flatMap((named): Series[] => {
    const power = named.result.power ?? null;
    return power === null || named.result.status === "no-series" ? [] : [{ named, power }];
  });
  if (all.length < 2) return null;
  const level = twoSidedQuantile(1 - choices.level, Infinity);
  const numbers = [...new Set(all.flatMap(({ power }) => power.lines.map((line) => line.n)))].sort(
    (a, b) => a - b,
  );
  const n = choices.power_n ?? mostTold(all, numbers);
  const lineOf = ({ power }: Series): PowerLineResult | undefined => power.lines.find((one) => one.n === n);
  const name = ({ named }: Series): Pick<OfSample, "sample" | "batch" | "file"> => ({
    sample: named.sample,
    batch: named.batch,
    file: named.result.source.file,
  });
  const part = (
    what: PartName,
    unit: string,
    of: (series: Series) => Omit<OfSample, "sample" | "batch" | "file">,
  ): ComparedPowerPart => {
    const logarithmic = what !== "exponent";
    const samples = all.map((series) => ({ ...name(series), ...of(series) }));
    const taking = samples.flatMap(({ batch, quantity, left_out }, i): OneNumber[] => {
      const against = all[i]!.named.against?.value ?? null;
      const { value, sigma, factor } = quantity;
      if (left_out !== null || value === null) return [];
      if (!logarithmic) return sigma === null ? [] : [{ batch, value, sigma, against }];
      return factor === null ? [] : [{ batch, value: Math.log(value), sigma: Math.log(factor), against }];
    });
    return {
      name: what,
      unit,
      n: what === "exponent" ? null : n,
      logarithmic,
      samples,
      ...turnedBack(compareNumbers(taking, { ...choices, against: null }, ""), logarithmic, level),
    };
  };
  const parts = [
    part("saturation_per_uW", "1/µW", (series) => {
      const line = lineOf(series);
      return line === undefined
        ? absent(n)
        : {
            quantity: saturationOf(line, level),
            limit: line.saturation_limit_per_uW,
            expected: null,
            left_out: reasonOf(line, series, line.saturation_per_uW.value),
          };
    }),
    part("blockade_volume_um3", "µm³", (series) => {
      const line = lineOf(series);
      return line === undefined
        ? absent(n)
        : {
            quantity: volumeOf(line, choices, level),
            limit: line.blockade_volume_limit_um3,
            expected: line.expected_volume_um3.value,
            left_out: reasonOf(line, series, line.blockade_volume_um3.value),
          };
    }),
    part("exponent", "", ({ named, power: { exponent } }) => ({
      quantity:
        exponent === null || exponent.exponent.sigma === null
          ? NO_SPREAD
          : { ...around(exponent.exponent.value!, exponent.exponent.sigma, level), factor: null },
      limit: null,
      expected: exponent?.predicted.value ?? null,
      left_out:
        named.result.status === "not-converged"
          ? "the fit did not converge"
          : exponent === null || exponent.exponent.sigma === null
            ? "fewer than three lines bleach"
            : null,
    })),
  ];
  return {
    n,
    numbers,
    parts,
    series: all.map((series) => ({
      ...name(series),
      lines: series.power.lines.map((line): Line => ({
        n: line.n,
        saturation_per_uW: line.reading === "bleaches" ? saturationOf(line, level) : NO_SPREAD,
        blockade_volume_um3: volumeOf(line, choices, level),
        saturation_limit_per_uW: line.saturation_limit_per_uW,
        blockade_volume_limit_um3: line.blockade_volume_limit_um3,
      })),
    })),
    notes: notesOf(all, n, choices),
  };
}

function around(value: number, sigma: number, level: number): Omit<ComparedSpread, "factor"> {
  return { value, sigma, low: value - level * sigma, high: value + level * sigma };
}

function times(value: number, logSigma: number, level: number): ComparedSpread {
  const reach = Math.exp(level * logSigma);
  return {
    value,
    sigma: value * logSigma,
    low: value / reach,
    high: value * reach,
    factor: Math.exp(logSigma),
  };
}

function saturationOf(
  { saturation_per_uW: { value, sigma } }: PowerLineResult,
  level: number,
): ComparedSpread {
  return value === null || sigma === null || !(value > 0) ? NO_SPREAD : times(value, sigma / value, level);
}

/** With statistical errors alone, what all series of one set-up share is taken out of the volume's variance. */
function volumeOf(
  { blockade_volume_um3: { value, factor }, budget }: PowerLineResult,
  choices: ComparisonChoices,
  level: number,
): ComparedSpread {
  if (value === null || factor === null || !(value > 0)) return NO_SPREAD;
  const common = budget
    .filter(({ input }) => COMMON_INPUTS.includes(input))
    .reduce((sum, { share }) => sum + share, 0);
  const own = choices.errors === "statistical" ? Math.sqrt(Math.max(0, 1 - common)) : 1;
  return times(value, Math.log(factor) * own, level);
}

function absent(n: number | null): Omit<OfSample, "sample" | "batch" | "file"> {
  return {
    quantity: NO_SPREAD,
    limit: null,
    expected: null,
    left_out: n === null ? "no line bleaches" : `no line n = ${n}`,
  };
}

function reasonOf({ reading }: PowerLineResult, { named }: Series, value: number | null): string | null {
  if (named.result.status === "not-converged") return "the fit did not converge";
  if (reading === "not-seen") return "bleaching is not seen: upper limit only";
  if (reading === "rises") return "absorption rises with power";
  return reading === "not-determined" || value === null ? "not determined" : null;
}

/** The highest n that most series have a volume of, else a bleaching coefficient; null where none bleaches. */
function mostTold(all: readonly Series[], numbers: readonly number[]): number | null {
  const best = (has: (line: PowerLineResult) => boolean): number | null => {
    let found: { n: number; series: number } | null = null;
    for (const n of numbers) {
      const series = all.filter(({ power }) => power.lines.some((line) => line.n === n && has(line))).length;
      if (series > 0 && series >= (found?.series ?? 0)) found = { n, series };
    }
    return found?.n ?? null;
  };
  return (
    best((line) => line.reading === "bleaches" && line.blockade_volume_um3.value !== null) ??
    best((line) => line.reading === "bleaches")
  );
}

function turnedBack(
  found: Omit<ComparedPart, "name" | "unit">,
  logarithmic: boolean,
  level: number,
): Pick<ComparedPowerPart, "homogeneity" | "within" | "between" | "mean" | "batches" | "pairs" | "shifts"> {
  const back = (value: number | null): number | null =>
    value === null ? null : logarithmic ? Math.exp(value) : value;
  const spread = (value: number | null, sigma: number | null): ComparedSpread => {
    if (value === null || sigma === null) return NO_SPREAD;
    return logarithmic
      ? times(Math.exp(value), sigma, level)
      : { ...around(value, sigma, level), factor: null };
  };
  const scatter = ({ tau, low, high, dof }: ComparedPart["within"]): ComparedPart["within"] => ({
    tau: back(tau),
    low: back(low),
    high: back(high),
    dof,
  });
  const list = (pairs: ComparedPart["pairs"]): ComparedPowerPart["pairs"] =>
    pairs.map((pair) => ({
      ...pair,
      difference: spread(pair.difference.value, pair.difference.sigma),
      detectable: back(pair.detectable),
    }));
  return {
    homogeneity: found.homogeneity,
    within: scatter(found.within),
    between: scatter(found.between),
    mean: spread(found.mean.value, found.mean.sigma),
    batches: found.batches.map(({ batch, samples, mean }) => ({
      batch,
      samples,
      mean: spread(mean.value, mean.sigma),
    })),
    pairs: list(found.pairs),
    shifts: list(found.shifts),
  };
}

function notesOf(all: readonly Series[], n: number | null, choices: ComparisonChoices): Note[] {
  const notes: Note[] = [];
  if (n === null)
    notes.push(
      doubt(
        "power-nothing-bleaches",
        "power",
        "No line bleaches in any of these power series: there is nothing to compare.",
        "measure at higher power",
      ),
    );
  else if (choices.power_n === null)
    notes.push(
      assumption(
        "power-line-chosen",
        "power",
        `Power series are compared at n = ${n}, the highest n that most of them have a volume of.`,
        "choose another line (power_n, --power-n)",
      ),
    );
  const ways = [...new Set(all.map(({ power }) => `${power.excitation}, law ${power.law}`))];
  if (ways.length > 1)
    notes.push(
      doubt(
        "power-ways-differ",
        "power",
        `The power series were not read in one way (${ways.join("; ")}): their bleaching per power differs by that alone.`,
        "compare series that were taken in one way",
      ),
    );
  const spots = all.flatMap(({ power }) => {
    const spot = power.inputs.find((input) => input.name === "spot diameter")?.value ?? null;
    return spot === null ? [] : [spot];
  });
  if (spots.length > 1 && Math.max(...spots) > (1 + SET_UP_ALIKE) * Math.min(...spots))
    notes.push(
      doubt(
        "power-spots-differ",
        "power.saturation_per_uW",
        `The spots are between ${Math.min(...spots)} and ${Math.max(...spots)} µm wide: bleaching per power goes with their area, not only with the crystal.`,
        "compare the volumes, which take the spot into account",
      ),
    );
  if (choices.errors === "total" && all.length > 1)
    notes.push(
      assumption(
        "power-errors-in-common",
        "power.blockade_volume_um3",
        "Errors of power meter, spot, transmission and reflectance are in every volume; where one set-up took all series they are common, and ratios are better known than said here.",
        "compare by statistical errors (--errors statistical)",
      ),
    );
  return notes;
}
