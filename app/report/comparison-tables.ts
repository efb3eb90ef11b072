import type {
  ComparedDifference,
  ComparedPart,
  ComparedPower,
  ComparedSpread,
  Comparison,
  TemperatureResult,
} from "../protocol/index.ts";
import {
  LAW_FORMULAS,
  PARAMETER_TITLES,
  powerPairInWords,
  powerScatterInWords,
  powerTitle,
  probability,
  sampleLabels,
  scatterInWords,
  seriesTitle,
  shownUnit,
  TEMPERATURE_PARAMETERS,
  temperatureVerdict,
  weightInWords,
} from "./comparison-to-text.ts";
import { count, measured, numberColumn, textColumn, words, type Cell, type DataTable } from "./data-table.ts";
import { energyUnit, formatNumber, NOT_DETERMINED_WORDS, type EnergyUnit } from "./format-quantity.ts";
import { percent } from "./protocol-in-words.ts";

/** The tables of a comparison: samples, means and scatter, differences, quality, temperature, power series. */
export function comparisonTables(comparison: Comparison): readonly DataTable[] {
  return [
    samplesTable(comparison),
    meansTable(comparison),
    differencesTable(comparison),
    trendsTable(comparison),
    qualityTable(comparison),
    ...(comparison.temperature === null ? [] : temperatureTables(comparison.temperature)),
    ...(comparison.power === null ? [] : powerComparisonTables(comparison.power)),
  ].filter((table) => table !== null);
}

const IN_SAMPLES = ["gap_eV", "rydberg_eV", "defect0", "width_floor_eV", "highest_n"] as const;

function plain(
  value: number | null,
  sigma: number | null,
): { value: number | null; sigma: number | null; low: null; high: null } {
  return { value, sigma, low: null, high: null };
}

function samplesTable({ samples, choices, parameters }: Comparison): DataTable {
  const labels = sampleLabels({ samples });
  const names = IN_SAMPLES.filter((name) => choices.parameters.includes(name));
  const units = names.map((name) => {
    const values = samples.map((sample) => sample.parameters[name]?.value ?? null);
    return shownUnit(name, values.find((value) => value !== null) ?? null);
  });
  return {
    name: "samples",
    title: `Samples: values with ${choices.errors} standard errors`,
    columns: [
      textColumn("sample"),
      textColumn("batch"),
      numberColumn("*T*", "K"),
      ...names.map((name, i) =>
        numberColumn(
          PARAMETER_TITLES[name],
          units[i]?.name ?? parameters.find((part) => part.name === name)?.unit ?? "",
        ),
      ),
      numberColumn("doubts"),
    ],
    rows: samples.map((sample, at) => [
      words(labels[at]!),
      words(sample.batch),
      sample.temperature_K === null ? words("") : count(sample.temperature_K, 4),
      ...names.map((name, i): Cell => {
        const one = sample.parameters[name];
        if (one === undefined || one.value === null) return words(NOT_DETERMINED_WORDS);
        if (name === "highest_n") return count(one.value);
        return measured(
          plain(one.value, one.sigma),
          units[i]?.perElectronvolt ?? 1,
          null,
          one.left_out === null ? "" : " *",
        );
      }),
      count(sample.doubts.length),
    ]),
    remarks: samples.some((sample) =>
      names.some((name) => (sample.parameters[name]?.left_out ?? null) !== null),
    )
      ? ["A star: left out of the comparison."]
      : [],
  };
}

function unitOf(part: ComparedPart): { energy: EnergyUnit | null; unit: string; factor: number } {
  const energy = shownUnit(part.name, part.mean.value);
  return { energy, unit: energy?.name ?? part.unit, factor: energy?.perElectronvolt ?? 1 };
}

function meansTable({ parameters }: Comparison): DataTable {
  const rows = parameters
    .filter((part) => part.samples > 0)
    .flatMap((part): Cell[][] => {
      const { unit, factor, energy } = unitOf(part);
      const { q, dof, p, birge } = part.homogeneity;
      const all: Cell[] = [
        words(PARAMETER_TITLES[part.name]),
        words("all"),
        count(part.samples),
        measured(plain(part.mean.value, part.mean.sigma), factor, unit),
        words(
          q === null
            ? "not tested"
            : `Q = ${formatNumber(q, 3)} for ${dof}, ${probability(p)}, Birge ratio ${formatNumber(birge, 3)}`,
        ),
        words(
          `within ${scatterInWords(part.within, part.unit, energy)}; between ${scatterInWords(part.between, part.unit, energy)}`,
        ),
      ];
      const each = part.batches.map((batch): Cell[] => [
        words(""),
        words(batch.batch),
        count(batch.samples),
        measured(batch.mean, factor, unit),
        words(
          batch.homogeneity.q === null
            ? ""
            : `Q = ${formatNumber(batch.homogeneity.q, 3)} for ${batch.homogeneity.dof}, ${probability(batch.homogeneity.p)}`,
        ),
        words(""),
      ]);
      return part.batches.length > 1 ? [all, ...each] : [all];
    });
  return {
    name: "means",
    title: "Means of batches, homogeneity and scatter",
    columns: [
      textColumn("quantity"),
      textColumn("batch"),
      numberColumn("samples"),
      textColumn("mean(standard error)"),
      textColumn("homogeneity"),
      textColumn("scatter beyond the errors"),
    ],
    rows,
    remarks: [],
  };
}

/** With more pairs than this only those that differ are listed; the others are counted. */
const MOST_PAIRS = 15;

function differencesTable({ parameters, choices }: Comparison): DataTable | null {
  let untold = 0;
  const rows = parameters.flatMap((part): Cell[][] => {
    const list = part.shifts.length > 0 ? part.shifts : part.pairs;
    const told = list.length > MOST_PAIRS ? list.filter((one) => one.seen) : list;
    untold += list.length - told.length;
    return told.map((one) => differenceRow(part, one));
  });
  if (rows.length === 0) return null;
  return {
    name: "differences",
    title:
      choices.reference === null
        ? "Differences between batches"
        : `Differences from batch ${choices.reference}`,
    columns: [
      textColumn("quantity"),
      textColumn("difference"),
      textColumn("value(standard error)"),
      textColumn("corrected probability"),
      textColumn("verdict"),
    ],
    rows,
    remarks: [
      `Two-sided at ${percent(choices.alpha)} per quantity, corrected after Holm; a size is one that would have been seen with a chance of ${percent(choices.power)}.${
        untold === 0 ? "" : ` ${untold} pairs without a difference seen are not listed.`
      }`,
    ],
  };
}

function differenceRow(part: ComparedPart, one: ComparedDifference): Cell[] {
  const energy = part.name.endsWith("_eV") ? energyUnit(one.difference.sigma) : null;
  const [unit, factor] = [energy?.name ?? part.unit, energy?.perElectronvolt ?? 1];
  return [
    words(PARAMETER_TITLES[part.name]),
    words(`${one.second} − ${one.first}`),
    measured({ ...one.difference, low: null, high: null }, factor, unit),
    words(probability(one.p_corrected).replace(/^p = /, "")),
    words(
      one.seen
        ? "differ"
        : `no difference seen${one.detectable === null ? "" : `; ${`${formatNumber(one.detectable * factor, 2)} ${unit}`.trim()} would have been`}`,
    ),
  ];
}

function trendsTable({ parameters, choices }: Comparison): DataTable | null {
  const rows = parameters.flatMap((part): Cell[][] => {
    const { trend } = part;
    if (trend === null) return [];
    const energy = part.name.endsWith("_eV") ? energyUnit(trend.slope.sigma) : null;
    const per = trend.unit === "" ? "1" : trend.unit;
    const unit = `${energy?.name ?? (part.unit === "" ? "1" : part.unit)}/${per}`;
    const factor = energy?.perElectronvolt ?? 1;
    return [
      [
        words(PARAMETER_TITLES[part.name]),
        count(trend.samples),
        measured({ ...trend.slope, low: null, high: null }, factor, unit),
        words(probability(trend.p).replace(/^p = /, "")),
        words(
          trend.seen
            ? "trend seen"
            : `no trend seen${trend.detectable === null ? "" : `; ${formatNumber(trend.detectable * factor, 2)} ${unit} would have been`}`,
        ),
      ],
    ];
  });
  return rows.length === 0
    ? null
    : {
        name: "trends",
        title: `Trends against ${choices.against ?? ""}`,
        columns: [
          textColumn("quantity"),
          numberColumn("samples"),
          textColumn("slope"),
          textColumn("probability"),
          textColumn("verdict"),
        ],
        rows,
        remarks: [],
      };
}

function qualityTable({ quality }: Comparison): DataTable | null {
  if (quality === null) return null;
  return {
    name: "quality",
    title: "Figure of quality, from the weights that were given",
    columns: [
      textColumn("sample"),
      textColumn("batch"),
      numberColumn("figure"),
      ...quality.parts.map(({ name }) => numberColumn(PARAMETER_TITLES[name])),
    ],
    rows: quality.samples.map((sample) => [
      words(sample.sample),
      words(sample.batch),
      measured(sample.figure),
      ...quality.parts.map(({ name }) => count(sample.contributions[name] ?? null, 3)),
    ]),
    remarks: [
      `Sum of weight times (value − origin)/scale: ${quality.parts
        .map(
          ({ name, weight, origin, scale }) =>
            `${PARAMETER_TITLES[name]} weight ${weight}, origin ${formatNumber(origin, 6)}, scale ${formatNumber(scale, 3)}`,
        )
        .join("; ")}.`,
    ],
  };
}

export function temperatureTables(temperature: TemperatureResult): readonly DataTable[] {
  const rows = temperature.series.flatMap((series) =>
    series.laws.flatMap((law): Cell[][] =>
      law.parameters.map(({ name, unit, quantity }, i) => {
        const small =
          unit.startsWith("eV") && name !== "gap0" && name !== "gapB" ? energyUnit(quantity.value) : null;
        return [
          words(i === 0 ? seriesTitle(series) : ""),
          words(i === 0 ? LAW_FORMULAS[law.law] : ""),
          words(TEMPERATURE_PARAMETERS[name] ?? name),
          quantity.value !== null && quantity.sigma === null
            ? words(`${formatNumber(quantity.value)} ${unit}, at its bound`)
            : measured(
                quantity,
                small?.perElectronvolt ?? 1,
                small === null ? unit : unit.replace("eV", small.name),
              ),
          words(i === 0 ? `${formatNumber(law.chi2, 3)} for ${law.dof}` : ""),
          words(i === 0 ? weightInWords(law.weight) : ""),
        ];
      }),
    ),
  );
  return rows.length === 0
    ? []
    : [
        {
          name: "temperature",
          title: "Laws of temperature",
          columns: [
            textColumn("of"),
            textColumn("law"),
            textColumn("parameter"),
            textColumn("value(standard error)"),
            textColumn("chi square"),
            textColumn("weight"),
          ],
          rows,
          remarks: [
            "Weight: share of the laws by Akaike's criterion.",
            ...temperature.series.map((series) => `${seriesTitle(series)}: ${temperatureVerdict(series)}.`),
          ],
        },
      ];
}

/** Factor errors have no last place to stand in: value, factor and interval have columns of their own. */
function powerComparisonTables({ parts, n }: ComparedPower): readonly DataTable[] {
  const wordsOf = (quantity: ComparedSpread): Cell[] => [
    quantity.factor === null ? measured(plain(quantity.value, quantity.sigma)) : count(quantity.value, 3),
    quantity.factor === null ? words("") : count(quantity.factor, 3),
    words(
      quantity.value === null ? "" : `${formatNumber(quantity.low, 3)} to ${formatNumber(quantity.high, 3)}`,
    ),
  ];
  const unitInWords = (unit: string): string => (unit === "" ? "" : ` / ${unit}`);
  const values: DataTable = {
    name: "power-values",
    title: `Power series by sample and batch${n === null ? "" : `, at *n* = ${n}`}`,
    columns: [
      textColumn("quantity"),
      textColumn("batch"),
      textColumn("sample"),
      textColumn("value"),
      textColumn("error factor"),
      textColumn("interval"),
      textColumn("expected, or why there is none"),
    ],
    rows: parts.flatMap((part): Cell[][] => [
      ...part.samples.map((one, i): Cell[] => [
        words(i === 0 ? `${powerTitle(part)}${unitInWords(part.unit)}` : ""),
        words(one.batch),
        words(one.sample),
        ...(one.left_out === null
          ? wordsOf(one.quantity)
          : [words(NOT_DETERMINED_WORDS), words(""), words("")]),
        one.left_out === null
          ? one.expected === null
            ? words("")
            : count(one.expected, 3)
          : words(`${one.left_out}${one.limit === null ? "" : `, below ${formatNumber(one.limit, 3)}`}`),
      ]),
      ...part.batches.map(({ batch, samples, mean }): Cell[] => [
        words(""),
        words(batch),
        words(samples === 1 ? "the batch, of one" : `mean of ${samples}`),
        ...wordsOf(mean),
        words(""),
      ]),
    ]),
    remarks: [
      "An error factor f means value times or over f; means of such values are geometric.",
      ...parts.map(
        (part) =>
          `${powerTitle(part)}: scatter within batches ${powerScatterInWords(part, part.within)}, between ${powerScatterInWords(part, part.between)}.`,
      ),
    ],
  };
  const rows = parts.flatMap((part): Cell[][] =>
    (part.shifts.length > 0 ? part.shifts : part.pairs).map((pair) => [
      words(powerTitle(part)),
      words(powerPairInWords(part, pair)),
    ]),
  );
  return rows.length === 0
    ? [values]
    : [
        values,
        {
          name: "power-differences",
          title: "Power series: ratios and differences of batches",
          columns: [textColumn("quantity"), textColumn("verdict")],
          rows,
          remarks: [],
        },
      ];
}
