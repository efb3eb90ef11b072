import type {
  ComparedParameter,
  ComparedPart,
  ComparedPowerPart,
  ComparedSpread,
  Comparison,
  TemperatureSeries,
} from "../protocol/index.ts";
import {
  energyUnit,
  ELECTRONVOLT,
  formatNumber,
  formatQuantity,
  NOT_DETERMINED_WORDS,
  type EnergyUnit,
} from "./format-quantity.ts";
import { gravestFirst, noteLine } from "./notes.ts";
import { percent } from "./protocol-in-words.ts";
import { labelled, textTable, wrap, type Align } from "./text-table.ts";

/** The first words of a comparison as text; by them a file is known as one that may be replaced. */
export const COMPARISON_TEXT_MARK = "Comparison of ";

export const PARAMETER_TITLES: Readonly<Record<ComparedParameter, string>> = {
  gap_eV: "gap",
  rydberg_eV: "Rydberg energy",
  defect0: "quantum defect",
  width_floor_eV: "floor of the widths",
  width_coefficient_eV: "width coefficient",
  width_exponent: "width exponent",
  highest_n: "highest n",
  highest_resolved_n: "highest resolved n",
  strength_coefficient: "strength coefficient",
  tail_factor: "tail over strength law",
  background_slope: "slope of the background",
  urbach_energy_eV: "Urbach energy",
  signal_to_noise: "signal to noise",
};

/** Samples, batches and differences as tables in a paper, with every doubt. */
export function comparisonToText(comparison: Comparison): string {
  const { samples, parameters, choices } = comparison;
  // A file without a series is listed, but is no sample that anything is known of.
  const known = samples.filter((sample) =>
    Object.values(sample.parameters).some((one) => one?.value !== null && one !== undefined),
  );
  const batches = new Set(known.map((sample) => sample.batch));
  const nameOf = (sample: (typeof samples)[number]): string => `${sample.batch}\n${sample.sample}`;
  const names = new Set(known.map(nameOf));
  const without = new Set(samples.map(nameOf)).size - names.size;
  const title = `${COMPARISON_TEXT_MARK}${count(names.size, "sample", "samples")} in ${count(batches.size, "batch", "batches")}${without === 0 ? "" : `, ${without} without a series`}`;
  const lines = [
    title,
    "=".repeat(title.length),
    "",
    ...labelled(
      "Errors",
      choices.errors === "total"
        ? "statistical and systematic part in quadrature"
        : "statistical part alone: the systematic part is taken as common to all",
    ),
    ...labelled(
      "Tests",
      `two-sided at ${percent(choices.alpha)} per parameter, corrected after Holm; sizes that could have been seen with a chance of ${percent(choices.power)}`,
    ),
    ...(choices.reference === null ? [] : labelled("Reference", `batch ${choices.reference}`)),
    ...labelled(
      "Made by",
      `Rungline ${comparison.run.version} on Node ${comparison.run.node}, ${comparison.run.started}`,
    ),
    ...heading("Samples"),
    ...samplesTable(comparison),
    ...parameters.flatMap((part) => (part.samples === 0 ? [] : partInText(part, comparison))),
    ...qualityInText(comparison),
    ...temperatureInText(comparison),
    ...powerInText(comparison),
    ...(comparisonNotes(comparison).length === 0
      ? []
      : [
          ...heading("Notes"),
          ...gravestFirst(comparisonNotes(comparison)).flatMap((note) => {
            const [first, ...rest] = wrap(noteLine(note), "    ");
            return [`  ${first!.trimStart()}`, ...rest];
          }),
        ]),
    ...heading("Methods"),
    ...wrap(COMPARISON_METHODS, "  "),
  ];
  return `${lines.join("\n").trimEnd()}\n`;
}

/** All notes of a comparison with those of its parts. */
export function comparisonNotes({ notes, temperature, power }: Comparison): Comparison["notes"] {
  return [...notes, ...(temperature?.notes ?? []), ...(power?.notes ?? [])];
}

/** A probability that a double cannot hold is told as a bound. */
export function probability(p: number | null): string {
  return p === 0 ? "p < 10⁻³⁰⁰" : `p = ${formatNumber(p, 2)}`;
}

export const COMPARISON_METHODS =
  "Scatter beyond the stated errors within and between batches: Paule and Mandel, J. Res. Natl. Bur. Stand. 87, 377 (1982); " +
  "DerSimonian and Laird, Control. Clin. Trials 7, 177 (1986). Homogeneity: Cochran, Biometrics 10, 101 (1954); Birge, Phys. Rev. 40, 207 (1932). " +
  "Intervals of the scatter: Viechtbauer, Stat. Med. 26, 37 (2007). Several differences: Holm, Scand. J. Stat. 6, 65 (1979). " +
  "Degrees of freedom: JCGM 100:2008, G.4.1. Size that could have been seen: Currie, Anal. Chem. 40, 586 (1968).";

function count(n: number, one: string, many: string): string {
  return `${n} ${n === 1 ? one : many}`;
}

function heading(text: string): string[] {
  return ["", text, "-".repeat(Array.from(text).length)];
}

/** Energies are printed with the prefix that suits them. */
export function shownUnit(name: ComparedParameter, size: number | null): EnergyUnit | null {
  if (!name.endsWith("_eV")) return null;
  return name === "gap_eV" ? ELECTRONVOLT : energyUnit(size);
}

function shown(value: number | null, sigma: number | null, unit: string, energy: EnergyUnit | null): string {
  const factor = energy?.perElectronvolt ?? 1;
  return formatQuantity(
    value === null ? null : value * factor,
    sigma === null ? null : sigma * factor,
    energy?.name ?? unit,
  );
}

function bare(value: number | null, unit: string, energy: EnergyUnit | null, digits = 2): string {
  if (value === null) return NOT_DETERMINED_WORDS;
  const name = energy?.name ?? unit;
  return `${formatNumber(value * (energy?.perElectronvolt ?? 1), digits)}${name === "" ? "" : ` ${name}`}`;
}

const IN_SAMPLES: readonly ComparedParameter[] = [
  "gap_eV",
  "rydberg_eV",
  "defect0",
  "width_floor_eV",
  "highest_n",
];

function samplesTable({ samples, parameters, choices }: Comparison): string[] {
  const names = IN_SAMPLES.filter((name) => choices.parameters.includes(name));
  const unitOf = (name: ComparedParameter): string =>
    parameters.find((part) => part.name === name)?.unit ?? "";
  const rows = [
    ["sample", "batch", "T", ...names.map((name) => PARAMETER_TITLES[name]), "doubts"],
    ...samples.map((sample) => [
      sample.sample,
      sample.batch,
      sample.temperature_K === null ? "" : `${formatNumber(sample.temperature_K)} K`,
      ...names.map((name) => {
        const one = sample.parameters[name];
        if (one === undefined || one.value === null) return "-";
        if (name === "highest_n") return String(one.value);
        return shown(one.value, one.sigma, unitOf(name), shownUnit(name, one.value));
      }),
      String(sample.doubts.length),
    ]),
  ];
  const align: Align[] = ["left", "left", "right", ...names.map((): Align => "right"), "right"];
  return textTable(rows, align);
}

function partInText(part: ComparedPart, { choices }: Comparison): string[] {
  const { name, unit } = part;
  const energy = shownUnit(name, part.mean.value);
  const out = heading(PARAMETER_TITLES[name]);
  const { homogeneity: all, within, between } = part;
  out.push(
    ...labelled(
      "  all",
      `${shown(part.mean.value, part.mean.sigma, unit, energy)} over ${count(part.samples, "sample", "samples")}; ${
        all.q === null
          ? "homogeneity not tested"
          : `Q = ${formatNumber(all.q, 3)} for ${all.dof} degrees of freedom, ${probability(all.p)}, Birge ratio ${formatNumber(all.birge, 3)}`
      }`,
    ),
    ...labelled(
      "  scatter",
      `within batches ${scatterInWords(within, unit, energy)}; between batches ${scatterInWords(between, unit, energy)}`,
    ),
  );
  if (part.batches.length > 1) {
    out.push(
      ...textTable(
        [
          ["batch", "samples", "mean"],
          ...part.batches.map((batch) => [
            batch.batch,
            String(batch.samples),
            shown(batch.mean.value, batch.mean.sigma, unit, energy),
          ]),
        ],
        ["left", "right", "right"],
      ),
    );
    const list = part.shifts.length > 0 ? part.shifts : part.pairs;
    const small = energy === null ? null : energyUnit(smallest(list.map((one) => one.difference.sigma)));
    const told = list.length > MOST_PAIRS ? list.filter((one) => one.seen) : list;
    for (const one of told) {
      const what = `${one.second} - ${one.first}`;
      out.push(
        ...wrap(
          one.seen
            ? `${what}: ${shown(one.difference.value, one.difference.sigma, unit, small)}, ${probability(one.p_corrected)}`
            : `${what}: no difference seen, ${shown(one.difference.value, one.difference.sigma, unit, small)}, ${probability(one.p_corrected)}; ${bare(one.detectable, unit, small)} would have been seen`,
          "  ",
        ),
      );
    }
    if (told.length < list.length) {
      const sizes = list.filter((one) => !one.seen).map((one) => one.detectable);
      out.push(
        `  ${list.length - told.length} more pairs: no difference seen; ${bare(smallest(sizes), unit, small)} to ${bare(largest(sizes), unit, small)} would have been seen`,
      );
    }
  }
  const { trend } = part;
  if (trend !== null) {
    const per = trend.unit === "" ? "1" : trend.unit;
    const small = energy === null ? null : energyUnit(trend.slope.sigma);
    const slopeUnit = small === null ? `${unit === "" ? "1" : unit}/${per}` : "";
    const scaled: EnergyUnit | null =
      small === null ? null : { name: `${small.name}/${per}`, perElectronvolt: small.perElectronvolt };
    out.push(
      ...wrap(
        `against ${trend.against}: ${shown(trend.slope.value, trend.slope.sigma, slopeUnit, scaled)}, ${probability(trend.p)}${
          trend.seen
            ? ""
            : `: no trend seen; ${bare(trend.detectable, slopeUnit, scaled)} would have been seen`
        }`,
        "  ",
      ),
    );
  } else if (choices.against !== null)
    out.push(`  against ${choices.against}: fewer than three values, no line fitted`);
  return out;
}

/** With more pairs than this only those that differ are told one by one; the file holds all. */
const MOST_PAIRS = 15;

function smallest(values: readonly (number | null)[]): number | null {
  const known = values.filter((value) => value !== null);
  return known.length === 0 ? null : Math.min(...known);
}

function largest(values: readonly (number | null)[]): number | null {
  const known = values.filter((value) => value !== null);
  return known.length === 0 ? null : Math.max(...known);
}

export function scatterInWords(
  scatter: ComparedPart["within"],
  unit: string,
  energy: EnergyUnit | null,
): string {
  if (scatter.tau === null) return "not determined";
  const small = energy === null ? null : energyUnit(scatter.high ?? scatter.tau);
  const ends = `${bare(scatter.low, unit, small)} to ${bare(scatter.high, unit, small)}`;
  return scatter.tau === 0
    ? `none seen beyond the errors (up to ${bare(scatter.high, unit, small)})`
    : `${bare(scatter.tau, unit, small)} (${ends})`;
}

export const POWER_TITLES: Readonly<Record<ComparedPowerPart["name"], string>> = {
  saturation_per_uW: "bleaching at low power",
  blockade_volume_um3: "blockade volume",
  exponent: "exponent of the bleaching",
};

export function powerTitle({ name, n }: ComparedPowerPart): string {
  return n === null ? POWER_TITLES[name] : `${POWER_TITLES[name]}, n = ${n}`;
}

/** A positive number whose error is a factor: 12.3 /× 1.2, with the ends of its interval; else value(error). */
export function spreadInWords(quantity: ComparedSpread, unit: string): string {
  const { value, sigma, low, high, factor } = quantity;
  const after = unit === "" ? "" : ` ${unit}`;
  if (value === null) return NOT_DETERMINED_WORDS;
  if (factor === null) return formatQuantity(value, sigma, unit);
  return `${formatNumber(value, 3)}${after} ×/÷ ${formatNumber(factor, 3)} (${formatNumber(low, 3)} to ${formatNumber(high, 3)})`;
}

/** What one pair differs by: a ratio of numbers with factors as errors, else a difference. */
export function powerPairInWords(part: ComparedPowerPart, pair: ComparedPowerPart["pairs"][number]): string {
  const what = part.logarithmic ? `${pair.second}/${pair.first}` : `${pair.second} - ${pair.first}`;
  const size = spreadInWords(pair.difference, part.logarithmic ? "" : part.unit);
  const could =
    pair.detectable === null
      ? ""
      : `; ${part.logarithmic ? "a factor of " : ""}${formatNumber(pair.detectable, 3)} would have been seen`;
  return `${what}: ${pair.seen ? "" : "no difference seen, "}${size}, ${probability(pair.p_corrected)}${pair.seen ? "" : could}`;
}

export function powerScatterInWords(
  { logarithmic }: ComparedPowerPart,
  scatter: ComparedPart["within"],
): string {
  const { tau, low, high } = scatter;
  if (tau === null) return NOT_DETERMINED_WORDS;
  const factor = logarithmic ? "a factor of " : "";
  const none = logarithmic ? 1 : 0;
  return tau === none
    ? `none seen beyond the errors (up to ${factor}${formatNumber(high, 3)})`
    : `${factor}${formatNumber(tau, 3)} (${formatNumber(low, 3)} to ${formatNumber(high, 3)})`;
}

function powerInText({ power }: Comparison): string[] {
  if (power === null) return [];
  return [
    ...heading("Power series"),
    ...power.parts.flatMap((part) => {
      const rows = [
        [powerTitle(part), "batch", "value", "expected"],
        ...part.samples.map(({ sample, batch, quantity, limit, expected, left_out }) => [
          sample,
          batch,
          left_out === null
            ? spreadInWords(quantity, part.unit)
            : `${limit === null ? "" : `below ${formatNumber(limit, 3)} ${part.unit}; `}${left_out}`,
          expected === null ? "" : formatNumber(expected, 3),
        ]),
      ];
      const list = part.shifts.length > 0 ? part.shifts : part.pairs;
      return [
        ...textTable(rows, ["left", "left", "left", "right"]),
        ...part.batches.flatMap(({ batch, samples, mean }) =>
          wrap(
            `batch ${batch}, ${count(samples, "sample", "samples")}: ${spreadInWords(mean, part.unit)}`,
            "  ",
          ),
        ),
        ...wrap(
          `scatter within batches ${powerScatterInWords(part, part.within)}; between ${powerScatterInWords(part, part.between)}`,
          "  ",
        ),
        ...list.flatMap((pair) => wrap(powerPairInWords(part, pair), "  ")),
        "",
      ];
    }),
  ];
}

function qualityInText({ quality }: Comparison): string[] {
  if (quality === null) return [];
  const names = quality.parts.map((part) => part.name);
  const rows = [
    ["sample", "batch", "figure", ...names.map((name) => PARAMETER_TITLES[name])],
    ...quality.samples.map((sample) => [
      sample.sample,
      sample.batch,
      formatQuantity(sample.figure.value, sample.figure.sigma, ""),
      ...names.map((name) => formatNumber(sample.contributions[name] ?? null, 3)),
    ]),
  ];
  return [
    ...heading("Figure of quality, from the weights that were given"),
    ...wrap(
      `Sum of weight times (value - origin)/scale: ${quality.parts
        .map(
          ({ name, weight, origin, scale }) =>
            `${PARAMETER_TITLES[name]} weight ${weight}, origin ${formatNumber(origin, 6)}, scale ${formatNumber(scale, 3)}`,
        )
        .join("; ")}.`,
      "  ",
    ),
    ...textTable(rows, ["left", "left", "right", ...names.map((): Align => "right")]),
  ];
}

export const LAW_FORMULAS = {
  varshni: "Varshni, E0 - alpha T^2/(T + beta)",
  "bose-einstein": "Bose-Einstein, EB - a [1 + 2/(exp(Theta/T) - 1)]",
  phonons: "phonons, G0 + a T + b/(exp(hw/kT) - 1)",
  optical: "optical phonons, G0 + b/(exp(hw/kT) - 1)",
  acoustic: "acoustic phonons, G0 + a T",
} as const;

export const TEMPERATURE_LAW_NAMES: Readonly<Record<keyof typeof LAW_FORMULAS, string>> = {
  varshni: "Varshni",
  "bose-einstein": "Bose-Einstein",
  phonons: "acoustic and optical phonons",
  optical: "optical phonons",
  acoustic: "acoustic phonons",
};

export const TEMPERATURE_PARAMETERS: Readonly<Record<string, string>> = {
  gap0: "E₀",
  alpha: "α",
  beta: "β",
  gapB: "E_B",
  coupling: "a_B",
  theta: "Θ",
  width0: "Γ₀",
  acoustic: "acoustic coupling",
  optical: "optical coupling",
  phonon_energy: "phonon energy",
};

/** A share so small says no more than that. */
export function weightInWords(weight: number | null): string {
  return weight !== null && weight < 1e-3 ? "< 0.001" : formatNumber(weight, 2);
}

/** Which law of temperature the data prefer, and whether they decide. */
export function temperatureVerdict({ laws, preferred, decided }: TemperatureSeries): string {
  const best = laws.find(({ law }) => law === preferred);
  if (best === undefined) return "no law fitted";
  const name = TEMPERATURE_LAW_NAMES[best.law];
  if (laws.length === 1) return `${name} is the only law that so few temperatures allow`;
  return decided ? `the data prefer ${name}` : `${name} lies nearest, the data do not decide`;
}

function temperatureInText({ temperature }: Comparison): string[] {
  if (temperature === null || temperature.series.length === 0) return [];
  return [
    ...heading("Against temperature"),
    ...temperature.series.flatMap((series) => [
      `  ${seriesTitle(series)}, ${count(series.points.length, "point", "points")}: ${temperatureVerdict(series)}`,
      ...series.laws.flatMap((law) =>
        wrap(
          `${LAW_FORMULAS[law.law]}: ${law.parameters
            .map(({ name, unit, quantity }) => {
              const energy =
                unit === "eV" && name !== "gap0" && name !== "gapB" ? energyUnit(quantity.value) : null;
              if (quantity.value !== null && quantity.sigma === null)
                return `${name} = ${bare(quantity.value, unit, energy)} (at its bound)`;
              return `${name} = ${shown(quantity.value, quantity.sigma, unit, energy)}`;
            })
            .join(
              ", ",
            )}; chi square ${formatNumber(law.chi2, 3)} for ${law.dof}, weight ${weightInWords(law.weight)}`,
          "    ",
        ),
      ),
    ]),
  ];
}

export function seriesTitle({ quantity, n, sample }: TemperatureSeries): string {
  const what = quantity === "gap_eV" ? "gap" : n === null ? "floor of the widths" : `width of n = ${n}`;
  return sample === null ? what : `${what}, ${sample}`;
}

/** Names of samples as rows show them: what is there several times carries its temperature, or its place along the trend. */
export function sampleLabels({ samples }: Pick<Comparison, "samples">): readonly string[] {
  const times = new Map<string, number>();
  const key = ({ sample, batch }: Comparison["samples"][number]): string => `${batch}\n${sample}`;
  for (const sample of samples) times.set(key(sample), (times.get(key(sample)) ?? 0) + 1);
  return samples.map((sample) => {
    if (times.get(key(sample)) === 1) return sample.sample;
    if (sample.temperature_K !== null) return `${sample.sample}, ${formatNumber(sample.temperature_K)} K`;
    return sample.against === null ? sample.sample : `${sample.sample}, ${formatNumber(sample.against)}`;
  });
}
