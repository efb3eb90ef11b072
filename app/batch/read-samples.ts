import { assumption, doubt, type Note } from "../base/index.ts";
import type {
  ComparedParameter,
  ComparedSample,
  ComparisonChoices,
  RunglineResult,
} from "../protocol/index.ts";
import type { DecimalMark } from "../table/index.ts";
import { factValue, temperatureIn, type FactValue } from "./fact-value.ts";
import { dependsOnSignal, parameterUnit, readParameter } from "./parameters.ts";
import { pauleMandel, pooledMean } from "./random-effects.ts";
import { FEWEST_TEMPERATURES, stepOf, TEMPERATURES_ALIKE_K, temperatureSteps } from "./temperature-steps.ts";
import { commonMean } from "./weighted-fit.ts";

export type Measured = NonNullable<ComparedSample["parameters"][ComparedParameter]>;

/** One result with the facts that name it: the file's own, and over them what was typed. */
export interface NamedResult {
  readonly result: RunglineResult;
  readonly sample: string;
  readonly sampleFrom: string;
  readonly batch: string;
  readonly batchFrom: string;
  readonly date: string | null;
  readonly temperature_K: number | null;
  readonly against: FactValue | null;
}

export interface SamplesRead {
  readonly results: readonly NamedResult[];
  readonly samples: readonly ComparedSample[];
  readonly units: Readonly<Record<ComparedParameter, string>>;
  readonly againstUnit: string;
  readonly notes: readonly Note[];
}

/** Facts of one result by key and by label, typed ones over those of the header. */
export function factsOf(result: RunglineResult, choices: ComparisonChoices): ReadonlyMap<string, string> {
  const facts = new Map<string, string>();
  // The first statement of a header counts, its key before its label.
  for (const { label, text } of [...result.reading.facts].reverse()) facts.set(plain(label), text);
  for (const { key, text } of [...result.reading.facts].reverse()) if (key !== "other") facts.set(key, text);
  const base = withoutEnding(result.source.file);
  const own = new Set([result.source.file, base, facts.get("sample") ?? base]);
  for (const { of, facts: typed } of choices.values)
    if (own.has(of)) for (const [name, text] of Object.entries(typed)) facts.set(plain(name), text);
  return facts;
}

function plain(name: string): string {
  return name.trim().toLowerCase();
}

function withoutEnding(file: string): string {
  return file.replace(/\.[^.]*$/, "");
}

export function nameResult(result: RunglineResult, choices: ComparisonChoices): NamedResult {
  const facts = factsOf(result, choices);
  const decimal: DecimalMark = result.reading.dialect["decimal"] === "," ? "," : ".";
  const number = (name: string): FactValue | null => {
    const text = facts.get(name);
    return text === undefined ? null : factValue(name, text, decimal);
  };
  const typed = (name: string): boolean =>
    choices.values.some(({ facts: one }) => Object.keys(one).some((key) => plain(key) === name));
  const sample = facts.get("sample");
  const batch = facts.get("batch");
  const temperature = number("temperature");
  const kelvin = temperature === null ? null : temperatureIn(temperature);
  const against = choices.against === null ? null : plain(choices.against);
  const name = sample ?? withoutEnding(result.source.file);
  return {
    result,
    sample: name,
    sampleFrom: sample === undefined ? "file name" : typed("sample") ? "typed" : "header",
    batch: batch ?? name,
    batchFrom: batch === undefined ? "no batch: each sample by itself" : typed("batch") ? "typed" : "header",
    date: facts.get("date") ?? null,
    temperature_K: kelvin,
    against:
      against === null
        ? null
        : against === "temperature"
          ? kelvin === null
            ? null
            : { value: kelvin, unit: "K" }
          : number(against),
  };
}

/** Results to samples: what is there twice is taken once, repeated measurements of a sample are combined. */
export function readSamples(all: readonly RunglineResult[], choices: ComparisonChoices): SamplesRead {
  const notes: Note[] = [];
  const results: NamedResult[] = [];
  const seen = new Map<string, RunglineResult>();
  for (const result of all) {
    // A power series is named after its first spectrum, which may be there by itself too.
    const kind = (result.power ?? null) === null ? "spectrum" : "power series";
    // The same bytes are one measurement, whatever their file is called.
    const identity = `${kind} ${result.source.sha256}`;
    const before = seen.get(identity);
    if (before !== undefined) {
      const same = JSON.stringify(before.protocol) === JSON.stringify(result.protocol);
      const { file } = result.source;
      const twice =
        file === before.source.file
          ? `${file} is there twice`
          : `${file} holds the same bytes as ${before.source.file}`;
      notes.push(
        same
          ? assumption(
              "result-twice",
              "samples",
              `${twice}, with the same protocol: one measurement, the first is taken.`,
              "nothing to do where the outputs of several runs overlap",
            )
          : doubt(
              "result-twice-with-other-protocol",
              "samples",
              `${twice}, with another protocol: one measurement, the first is taken.`,
              "hand over the one that counts",
            ),
      );
      continue;
    }
    seen.set(identity, result);
    results.push(nameResult(result, choices));
  }
  const temperatures = new Map<string, readonly number[]>();
  const nameOf = (one: NamedResult): string => `${one.batch}\n${one.sample}`;
  for (const key of new Set(results.map(nameOf)))
    temperatures.set(
      key,
      temperatureSteps(results.filter((one) => nameOf(one) === key).map((one) => one.temperature_K)),
    );
  const step = (one: NamedResult): number | null => stepOf(one.temperature_K, temperatures.get(nameOf(one))!);
  const apart = setApart(results, temperatures, nameOf, choices);
  const listed = results.filter(
    (one) => !apart.has(nameOf(one)) || step(one) === null || step(one) === apart.get(nameOf(one)),
  );
  for (const [key, kept] of apart) {
    const name = results.find((one) => nameOf(one) === key)!.sample;
    notes.push(
      assumption(
        "temperature-run-set-apart",
        "samples",
        `${name} was measured at ${temperatures.get(key)!.length} temperatures: among the samples it stands with what was measured at ${kept} K; all of it is in the laws of temperature.`,
        "compare along temperature to have all side by side (--against temperature)",
      ),
    );
  }
  notes.push(...aboutAll(listed, choices));

  const groups = new Map<string, NamedResult[]>();
  for (const one of listed) {
    // A sample stands once for each value along a trend and for each temperature: their mean would be of no use.
    const key = `${nameOf(one)}\n${step(one) ?? ""}\n${one.against?.value ?? ""}`;
    groups.set(key, [...(groups.get(key) ?? []), one]);
  }
  const signalUnits = new Set(results.map((one) => one.result.reading.signal_unit));
  const mostCommon = results[0]?.result.reading.signal_unit ?? "1/cm";
  if (signalUnits.size > 1)
    notes.push(
      doubt(
        "signal-units-differ",
        "parameters",
        `Some results are in optical depth, others in 1/cm: strengths and background are compared only among those in ${mostCommon === "1" ? "optical depth" : mostCommon}.`,
        "give the thickness of every crystal (signal.thickness_um)",
      ),
    );
  const order = (one: readonly NamedResult[]): number => one[0]!.against?.value ?? Infinity;
  const sorted = [...groups.values()];
  if (choices.against !== null) sorted.sort((one, other) => order(one) - order(other) || 0);
  const samples = sorted.map((group): ComparedSample => {
    const first = group[0]!;
    // What a power series says of its first spectrum is no second measurement.
    const alone = group.filter(({ result }) => (result.power ?? null) === null);
    const taken = alone.length > 0 ? alone : group;
    if (taken.length > 1)
      notes.push(
        assumption(
          "repeats-combined",
          `samples[${first.sample}]`,
          `${taken.length} measurements of ${first.sample} are combined into one mean with the scatter between them (Paule-Mandel).`,
          "give the measurements different sample names to see them side by side",
        ),
      );
    const parameters: Partial<Record<ComparedParameter, Measured>> = {};
    for (const name of choices.parameters)
      parameters[name] = combine(
        taken.map(({ result }) => measure(result, name, choices, mostCommon)),
        choices,
      );
    return {
      sample: first.sample,
      batch: first.batch,
      named_by: { sample: first.sampleFrom, batch: first.batchFrom },
      results: group.map(({ result }) => ({
        file: result.source.file,
        sha256: result.source.sha256,
        version: result.run.version,
      })),
      date: first.date,
      temperature_K: meanOf(taken.map((one) => one.temperature_K)),
      against: meanOf(group.map((one) => one.against?.value ?? null)),
      doubts: [
        ...new Set(
          group.flatMap(({ result }) =>
            result.notes.filter((note) => note.level === "doubt").map((note) => note.code),
          ),
        ),
      ],
      parameters,
      lines: taken[0]!.result.lines.map(({ n, width_eV, area_n3 }) => ({ n, width_eV, area_n3 })),
    };
  });
  const units = Object.fromEntries(
    choices.parameters.map((name) => [name, parameterUnit(name, mostCommon)]),
  ) as Record<ComparedParameter, string>;
  const againstUnits = new Set(results.flatMap((one) => (one.against === null ? [] : [one.against.unit])));
  if (againstUnits.size > 1)
    notes.push(
      doubt(
        "units-of-trend-differ",
        "parameters",
        `"${choices.against ?? ""}" is written in different units (${[...againstUnits].join(", ")}): the numbers are taken as they stand.`,
        "type the column in one unit",
      ),
    );
  return { results, samples, units, againstUnit: [...againstUnits][0] ?? "", notes };
}

/**
 * Samples that were measured at many temperatures, where others are there that were not, and the step of each that lies
 * nearest to the others (the lowest where those say none): their other spectra would make a batch of temperatures.
 */
function setApart(
  results: readonly NamedResult[],
  temperatures: ReadonlyMap<string, readonly number[]>,
  nameOf: (one: NamedResult) => string,
  choices: ComparisonChoices,
): ReadonlyMap<string, number> {
  const runs = [...temperatures].filter(([, steps]) => steps.length >= FEWEST_TEMPERATURES);
  if (choices.against === "temperature" || temperatures.size < 2) return new Map();
  const others = results
    .filter((one) => !runs.some(([key]) => key === nameOf(one)))
    .flatMap((one) => (one.temperature_K === null ? [] : [one.temperature_K]))
    .sort((a, b) => a - b);
  const middle = others[Math.floor(others.length / 2)] ?? -Infinity;
  return new Map(
    runs.map(([key, steps]) => [
      key,
      middle === -Infinity
        ? steps[0]!
        : steps.reduce((best, one) => (Math.abs(one - middle) < Math.abs(best - middle) ? one : best)),
    ]),
  );
}

function measure(
  result: RunglineResult,
  name: ComparedParameter,
  choices: ComparisonChoices,
  signalUnit: string,
): Measured {
  const nothing = (reason: string): Measured => ({
    value: null,
    statistical: null,
    systematic: null,
    sigma: null,
    left_out: reason,
  });
  if (result.status === "no-series") return nothing("no series was seen");
  if (dependsOnSignal(name) && result.reading.signal_unit !== signalUnit)
    return nothing("in another unit of the signal");
  const read = readParameter(result, name);
  if (typeof read === "string") return nothing(read);
  const { value, statistical, systematic } = read;
  const sigma =
    statistical === null
      ? null
      : choices.errors === "total"
        ? Math.hypot(statistical, systematic ?? 0)
        : statistical;
  return {
    value,
    statistical,
    systematic,
    sigma,
    left_out: result.status === "not-converged" ? "the fit did not converge" : null,
  };
}

/** Several measurements of one sample: the mean over them; their systematic parts are common and do not average out. */
function combine(measurements: readonly Measured[], choices: ComparisonChoices): Measured {
  const usable = measurements.filter((one) => one.left_out === null && one.value !== null);
  if (usable.length < 2) return usable[0] ?? measurements[0]!;
  const values = Float64Array.from(usable, (one) => one.value!);
  const variances = Float64Array.from(usable, (one) => one.statistical! ** 2);
  const tau2 = pauleMandel(commonMean(values, variances));
  const { mean, sigma } = pooledMean(values, variances, tau2);
  const parts = usable.flatMap((one) => (one.systematic === null ? [] : [one.systematic]));
  const systematic = parts.length === 0 ? null : Math.max(...parts);
  return {
    value: mean,
    statistical: sigma,
    systematic,
    sigma: choices.errors === "total" ? Math.hypot(sigma, systematic ?? 0) : sigma,
    left_out: null,
  };
}

function meanOf(values: readonly (number | null)[]): number | null {
  const known = values.filter((value) => value !== null);
  return known.length === 0 ? null : known.reduce((sum, value) => sum + value, 0) / known.length;
}

function aboutAll(results: readonly NamedResult[], choices: ComparisonChoices): Note[] {
  const notes: Note[] = [];
  const unnamed = results.filter((one) => one.batchFrom.startsWith("no batch"));
  if (unnamed.length > 0)
    notes.push(
      assumption(
        "batch-unknown",
        "samples",
        `${unnamed.length} of ${results.length} results name no batch: each of these samples stands by itself.`,
        "type a column `batch` (--values), or put it into the headers",
      ),
    );
  const temperatures = results.flatMap((one) => (one.temperature_K === null ? [] : [one.temperature_K]));
  if (
    choices.against !== "temperature" &&
    temperatures.length > 1 &&
    Math.max(...temperatures) - Math.min(...temperatures) > TEMPERATURES_ALIKE_K
  )
    notes.push(
      doubt(
        "temperatures-differ",
        "parameters",
        `The spectra were taken between ${Math.min(...temperatures)} and ${Math.max(...temperatures)} K: gap and widths change with temperature, not only with the crystal.`,
        "compare spectra of one temperature, or look at the trend: --against temperature",
      ),
    );
  const versions = new Set(results.map((one) => one.result.run.version));
  if (versions.size > 1)
    notes.push(
      doubt(
        "versions-differ",
        "samples",
        `The results come from different versions of Rungline (${[...versions].join(", ")}).`,
        "fit all spectra with one version",
      ),
    );
  const protocols = new Map<string, string>();
  for (const { result } of results) {
    // What belongs to a file, not to the way of working.
    const { table: _table, axis: _axis, signal: _signal, noise: _noise, ...rest } = result.protocol;
    const text = JSON.stringify(rest);
    if (!protocols.has(text)) protocols.set(text, result.source.file);
  }
  if (protocols.size > 1)
    notes.push(
      doubt(
        "protocols-differ",
        "samples",
        `The results were not made with one protocol: ${protocols.size} are met, first in ${[...protocols.values()].join(", ")}.`,
        "fit all spectra with one protocol (--protocol), so that a difference belongs to the crystals",
      ),
    );
  if (choices.against !== null) {
    const missing = results.filter((one) => one.against === null).length;
    if (missing > 0)
      notes.push(
        doubt(
          "trend-fact-missing",
          "parameters",
          `${missing} of ${results.length} results say nothing readable about "${choices.against}": they are left out of the trend.`,
          "type the column (--values)",
        ),
      );
  }
  return notes;
}
