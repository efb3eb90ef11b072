import { comparisonSchema, type ComparedSpread, type Comparison } from "../protocol/index.ts";
import { comparisonNotes } from "./comparison-to-text.ts";
import { csvLine } from "./csv.ts";

export const COMPARISON_CSV_COLUMNS = [
  "section",
  "parameter",
  "first",
  "second",
  "value",
  "sigma",
  "low",
  "high",
  "statistical",
  "systematic",
  "unit",
  "dof",
  "p",
  "p_corrected",
  "detectable",
  "text",
] as const;

type Column = (typeof COMPARISON_CSV_COLUMNS)[number];
type Cells = Partial<Record<Column, string | number | null>>;

/** The first line of a comparison as CSV; by it a file is known as one that may be replaced. */
export const COMPARISON_CSV_MARK = csvLine(COMPARISON_CSV_COLUMNS).trimEnd();

/** A comparison as one tidy table (RFC 4180), energies in eV, full precision; empty where not determined. */
export function comparisonToCsv(comparison: Comparison): string {
  const out = [csvLine(COMPARISON_CSV_COLUMNS)];
  const row = (cells: Cells): void => {
    out.push(csvLine(COMPARISON_CSV_COLUMNS.map((column) => cells[column] ?? null)));
  };
  const unitOf = new Map(comparison.parameters.map((part) => [part.name as string, part.unit]));
  for (const sample of comparison.samples)
    for (const [parameter, one] of Object.entries(sample.parameters)) {
      const { value, sigma, statistical, systematic, left_out } = one;
      const unit = unitOf.get(parameter) ?? "";
      const text = left_out ?? "";
      row({
        section: "sample",
        parameter,
        first: sample.sample,
        second: sample.batch,
        value,
        sigma,
        statistical,
        systematic,
        unit,
        text,
      });
    }
  for (const part of comparison.parameters) {
    const common = { parameter: part.name, unit: part.unit };
    const { homogeneity: all, within, between, trend } = part;
    row({ section: "mean", ...common, value: part.mean.value, sigma: part.mean.sigma });
    row({
      section: "homogeneity",
      ...common,
      value: all.q,
      dof: all.dof,
      p: all.p,
      unit: "",
      text: `Birge ratio ${all.birge ?? ""}`,
    });
    row({
      section: "within",
      ...common,
      value: within.tau,
      low: within.low,
      high: within.high,
      dof: within.dof,
    });
    row({
      section: "between",
      ...common,
      value: between.tau,
      low: between.low,
      high: between.high,
      dof: between.dof,
      text: `DerSimonian-Laird ${between.der_simonian_laird_tau ?? ""}`,
    });
    for (const { batch, mean, samples } of part.batches)
      row({ section: "batch", ...common, ...mean, first: batch, text: `${samples} samples` });
    for (const [section, list] of [
      ["pair", part.pairs],
      ["shift", part.shifts],
    ] as const)
      for (const { first, second, difference, dof, p, p_corrected, seen, detectable } of list)
        row({
          section,
          ...common,
          ...difference,
          first,
          second,
          dof,
          p,
          p_corrected,
          detectable,
          text: seen ? "seen" : "no difference seen",
        });
    if (trend !== null)
      row({
        section: "trend",
        ...common,
        ...trend.slope,
        first: trend.against,
        dof: trend.dof,
        p: trend.p,
        detectable: trend.detectable,
        unit: `${part.unit === "" ? "1" : part.unit}/${trend.unit === "" ? "1" : trend.unit}`,
        text: trend.seen ? "seen" : "no trend seen",
      });
  }
  for (const { name, weight, origin, scale } of comparison.quality?.parts ?? [])
    row({
      section: "quality_part",
      parameter: name,
      value: weight,
      text: `weight of (value - ${origin})/${scale}`,
    });
  for (const { sample, batch, figure, contributions } of comparison.quality?.samples ?? []) {
    row({ section: "quality", first: sample, second: batch, ...figure });
    for (const [parameter, value] of Object.entries(contributions))
      row({ section: "quality_contribution", parameter, first: sample, second: batch, value });
  }
  for (const series of comparison.temperature?.series ?? []) {
    for (const { temperature_K, value, sigma } of series.points)
      row({
        section: "temperature_point",
        parameter: series.quantity,
        first: String(temperature_K),
        second: series.sample,
        value,
        sigma,
        unit: "eV",
      });
    for (const law of series.laws) {
      for (const { name, unit, quantity } of law.parameters)
        row({
          section: "temperature_law",
          parameter: series.quantity,
          first: law.law,
          second: name,
          ...quantity,
          unit,
          text: series.sample,
        });
      row({
        section: "temperature_fit",
        parameter: series.quantity,
        first: law.law,
        value: law.chi2,
        dof: law.dof,
        p: law.p,
        second: series.sample,
        text: `AIC ${law.aic ?? ""}, weight ${law.weight ?? ""}`,
      });
    }
  }
  for (const part of comparison.power?.parts ?? []) {
    const common = {
      parameter: part.n === null ? `power.${part.name}` : `power.${part.name}[${part.n}]`,
      unit: part.unit,
    };
    const factorOf = ({ factor }: ComparedSpread): string => (factor === null ? "" : `factor ${factor}`);
    const plain = ({ value, sigma, low, high }: ComparedSpread): Cells => ({ value, sigma, low, high });
    for (const { sample, batch, quantity, left_out } of part.samples)
      row({
        section: "power_sample",
        ...common,
        first: sample,
        second: batch,
        ...plain(quantity),
        text: left_out ?? factorOf(quantity),
      });
    for (const { batch, mean, samples } of part.batches)
      row({
        section: "power_batch",
        ...common,
        first: batch,
        ...plain(mean),
        text: `${samples} samples${part.logarithmic ? `, ${factorOf(mean)}` : ""}`,
      });
    for (const [section, list] of [
      ["power_pair", part.pairs],
      ["power_shift", part.shifts],
    ] as const)
      for (const { first, second, difference, dof, p, p_corrected, seen, detectable } of list)
        row({
          section,
          ...common,
          unit: part.logarithmic ? "" : part.unit,
          first,
          second,
          ...plain(difference),
          dof,
          p,
          p_corrected,
          detectable,
          text: `${part.logarithmic ? "ratio" : "difference"}, ${seen ? "seen" : "no difference seen"}`,
        });
  }
  for (const note of comparisonNotes(comparison))
    row({
      section: "note",
      first: note.code,
      text: `${note.level} about ${note.about}: ${note.text} Remedy: ${note.remedy}`,
    });
  return out.join("");
}

/** A comparison as its file, checked against the schema. */
export function comparisonToJson(comparison: Comparison): string {
  return `${JSON.stringify(comparisonSchema.parse(comparison), null, 2)}\n`;
}
