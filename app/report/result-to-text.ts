import { diagnosticsPart } from "./diagnostics-to-text.ts";
import { quotedLevels, type LineResult, type RunglineResult } from "../protocol/index.ts";
import { areaUnit, signalName, signalUnitWords } from "./area-unit.ts";
import { cautionsFor } from "./cautions.ts";
import {
  ELECTRONVOLT,
  energyUnit,
  ends,
  formatChiSquare,
  formatEnergy,
  formatNumber,
  formatProbability,
  formatQuantity,
  MICROELECTRONVOLT,
  MILLIELECTRONVOLT,
  NOT_DETERMINED_WORDS,
  probabilityInWords,
  scaleQuantity,
  type EnergyUnit,
  withoutError,
} from "./format-quantity.ts";
import { extraPart, lawChi2InWords } from "./extra-to-text.ts";
import { gravestFirst } from "./notes.ts";
import { powerPart } from "./power-to-text.ts";
import { percent, protocolInWords } from "./protocol-in-words.ts";
import { labelled, textTable, wrap, type Align } from "./text-table.ts";

type Quantity = LineResult["energy_eV"];

/** The first words of a result as text; by them a file is known as one that may be replaced. */
export const RESULT_TEXT_MARK = "Exciton series of ";

/** A result as a table in a paper: what was read, the numbers, how good they are, and every doubt. */
export function resultToText(result: RunglineResult): string {
  const lines = [
    ...header(result),
    ...seriesPart(result),
    ...widthPart(result),
    ...strengthPart(result),
    ...tailPart(result),
    ...linesPart(result),
    ...extraPart(result),
    ...derivedPart(result),
    ...powerPart(result),
    ...backgroundPart(result),
    ...fitPart(result),
    ...diagnosticsSection(result),
    ...notesPart(result),
    ...cautionsPart(result),
  ];
  return `${lines.join("\n").trimEnd()}\n`;
}

function header(result: RunglineResult): string[] {
  const { source, reading, run } = result;
  const title = RESULT_TEXT_MARK + source.file;
  const facts = reading.facts.map((fact) => `${fact.label}: ${fact.text}`).join("; ");
  const [low, high] = reading.range_eV;
  return [
    title,
    "=".repeat(Array.from(title).length),
    "",
    ...labelled("File", `${source.file}, ${source.points} points, SHA-256 ${source.sha256}`),
    ...(facts === "" ? [] : labelled("Header", facts)),
    ...labelled("Reading", columnsInWords(result)),
    ...labelled(
      "Signal",
      `${signalName(reading.signal_unit)}; ${formatNumber(low, 8)} to ${formatNumber(high, 8)} eV; ${
        reading.used_points
      } of ${source.points} points used, ${reading.skipped} rows skipped; noise ${noiseInWords(result)}`,
    ),
    ...labelled("Protocol", protocolInWords(result.protocol).join("; ")),
    ...labelled("Status", statusInWords(result)),
    ...labelled("Made by", `Rungline ${run.version} on Node ${run.node}, ${run.started}`),
  ];
}

export function columnsInWords(result: RunglineResult): string {
  const { columns } = result.reading;
  if (columns.length === 0) return "no columns named";
  return columns
    .map(
      (column) =>
        `${column.role} from column ${column.column}${column.header === "" ? "" : ` "${column.header}"`} (${column.reason})`,
    )
    .join("; ");
}

export function noiseInWords(result: RunglineResult): string {
  const { source, median_sigma } = result.reading.noise;
  const unit = signalUnitWords(result.reading.signal_unit);
  const from =
    { column: "given in the file", protocol: "given in the protocol", estimated: "estimated from the data" }[
      source
    ] ?? source;
  if (median_sigma === null) return `${NOT_DETERMINED_WORDS} (${from})`;
  return `${formatNumber(median_sigma, 3)}${unit === "" ? "" : ` ${unit}`} a point in the median (${from})`;
}

export function statusInWords(result: RunglineResult): string {
  const why = result.fit === null ? "" : ` (stopped by ${TERMINATION_WORDS[result.fit.termination]})`;
  switch (result.status) {
    case "converged":
      return `converged${why}`;
    case "not-converged":
      return `NOT CONVERGED${why}: the numbers below are where the fit stood, not a result`;
    case "no-series":
      return `NO SERIES SEEN${why}`;
  }
}

export const TERMINATION_WORDS: Readonly<Record<NonNullable<RunglineResult["fit"]>["termination"], string>> =
  {
    gradient: "a small gradient",
    step: "a small step",
    cost: "a small change of chi square",
    iterationLimit: "the limit of iterations",
    cancelled: "the user",
    notFinite: "a number that is not finite",
  };

/** Where the standard errors of the fit come from. */
export const ERRORS_FROM_WORDS: Readonly<Record<NonNullable<RunglineResult["fit"]>["sigma_from"], string>> = {
  given: "from the given noise",
  estimated: "from the noise estimated from the data",
  residuals: "from the residuals",
};

function heading(text: string): string[] {
  return ["", text, "-".repeat(Array.from(text).length)];
}

export function isOneSigma(level: number): boolean {
  return Math.abs(level - 0.6827) < 0.002;
}

/**
 * An energy in one unit. Unequal sides of the interval stand behind the value only where the interval is that of
 * one standard error; at other levels the interval has its own column.
 */
function energy(quantity: Quantity, unit: EnergyUnit, level: number): string {
  return isOneSigma(level)
    ? formatEnergy(quantity, unit)
    : formatEnergy({ ...quantity, low: null, high: null }, unit);
}

function seriesPart(result: RunglineResult): string[] {
  const { series, systematic } = result;
  if (series === null)
    return [...heading("Series"), `  gap, Rydberg energy and quantum defect ${NOT_DETERMINED_WORDS}`];
  const level = result.protocol.uncertainty.level;
  const ritz = series.defect2.value !== null;
  const levels = quotedLevels(series);
  const rydberg = energyUnit(series.rydberg_eV.value);
  const given = systematic?.held_defect === undefined ? "" : ", for the held defect";
  const rows: string[][] = [
    [
      "",
      levels.scaled ? "value(scaled error)" : "value(standard error)",
      "systematic",
      `interval at ${percent(level)}`,
    ],
    [
      `gap E_g${given}`,
      energy(levels.gap_eV, ELECTRONVOLT, level),
      systematicWords(systematic?.gap_eV ?? null),
      interval(levels.gap_eV, ELECTRONVOLT),
    ],
    [
      `Rydberg energy Ry${given}`,
      energy(levels.rydberg_eV, rydberg, level),
      systematicWords(systematic?.rydberg_eV ?? null),
      interval(levels.rydberg_eV, rydberg),
    ],
    [
      ritz ? "quantum defect delta_0" : "quantum defect delta",
      pure(levels.defect0),
      systematic?.defect0 === null || systematic === null
        ? NOT_DETERMINED_WORDS
        : `±${formatNumber(systematic.defect0, 2)}`,
      interval(levels.defect0, PURE),
    ],
    ...(ritz ? [["Ritz term delta_2", pure(series.defect2), "", interval(series.defect2, PURE)]] : []),
  ];
  const out = [
    ...heading(`Series: E_n = E_g - Ry/(n - delta)^2, n = ${series.fit_n[0]} to ${series.fit_n[1]}`),
    ...textTable(rows, ["left", "left", "left", "left"]),
    `  chi square ${formatChiSquare(series.chi2, series.dof)} for ${series.dof} degrees of freedom, ${probabilityInWords(series.p, 3)}`,
    "  The standard error is statistical only; the systematic part is the spread over defensible choices.",
  ];
  if (systematic?.held_defect !== undefined) {
    const { defect0, sigma, assumed, gap_eV, rydberg_eV } = systematic.held_defect;
    out.push(
      `  The defect is held at ${defect0} ± ${Number(sigma.toPrecision(2))}${assumed ? " (assumed)" : ""}: values, errors and intervals of E_g and Ry hold for that defect only; its uncertainty puts ${systematicWords(gap_eV)} on E_g and ${systematicWords(rydberg_eV)} on Ry (systematic).`,
    );
  }
  if (systematic?.area_relative !== undefined && systematic.area_relative !== null)
    out.push(
      `  Thickness and reflectance put ±${formatNumber(100 * systematic.area_relative, 2)} % on all areas alike (systematic).`,
    );
  if (levels.scaled) {
    out.push(
      "  The law is rejected, so errors and intervals above are scaled by the root of reduced chi square. Unscaled (too small): " +
        `E_g = ${formatEnergy(series.gap_eV, ELECTRONVOLT)}, ` +
        `Ry = ${formatEnergy(series.rydberg_eV, rydberg)}, delta = ${pure(series.defect0)}`,
    );
  }
  const { names, matrix } = series.correlation;
  const pairs = names.flatMap((name, i) =>
    names.slice(i + 1).map((other, k) => `${name}, ${other} ${(matrix[i]?.[i + 1 + k] ?? 0).toFixed(3)}`),
  );
  if (pairs.length > 0) out.push(`  Correlations: ${pairs.join("; ")}`);
  if (series.readings.length > 1) out.push(...readingsTable(series.readings));
  if (series.ranges.length > 1) out.push(...rangesTable(series.ranges, rydberg));
  if (systematic !== null && systematic.trials.length > 0) out.push(...trialsTable(systematic.trials));
  return out;
}

type Series = NonNullable<RunglineResult["series"]>;

function readingsTable(readings: Series["readings"]): string[] {
  return [
    "",
    "  Readings of n (not decided by energies; ranked by strengths and widths):",
    ...textTable(
      [
        ["shift of n", "delta", "chi square of strengths", "of widths", ""],
        ...readings.map((one) => [
          one.shift > 0 ? `+${one.shift}` : String(one.shift),
          formatNumber(one.defect0, 4),
          formatNumber(one.strength_chi2),
          formatNumber(one.width_chi2),
          one.chosen ? "chosen" : "",
        ]),
      ],
      ["right", "right", "right", "right", "left"],
      "    ",
    ),
  ];
}

function rangesTable(ranges: Series["ranges"], rydberg: EnergyUnit): string[] {
  return [
    "",
    "  The same law for other ranges of n:",
    ...textTable(
      [
        ["n", "E_g", "Ry", "delta", "chi square", "dof", "p"],
        ...ranges.map((one) => [
          `${one.n_min} to ${one.n_max}`,
          formatEnergy(one.gap_eV, ELECTRONVOLT),
          formatEnergy(one.rydberg_eV, rydberg),
          pure(one.defect0),
          formatChiSquare(one.chi2, one.dof),
          String(one.dof),
          formatProbability(one.p),
        ]),
      ],
      ["left", "left", "left", "left", "right", "right", "right"],
      "    ",
    ),
  ];
}

function trialsTable(trials: NonNullable<RunglineResult["systematic"]>["trials"]): string[] {
  return [
    "",
    "  Trials behind the systematic part:",
    ...textTable(
      [
        ["trial", "E_g/eV", "Ry/meV", "delta", "chi square", "BIC", "p of runs"],
        ...trials.map((one) => [
          one.name,
          one.gap_eV === null ? NOT_DETERMINED_WORDS : one.gap_eV.toFixed(8),
          one.rydberg_eV === null ? NOT_DETERMINED_WORDS : (1e3 * one.rydberg_eV).toFixed(4),
          one.defect0 === null ? NOT_DETERMINED_WORDS : one.defect0.toFixed(5),
          formatNumber(one.chi2, 5),
          criterion(one.bic),
          formatProbability(one.runs_p),
        ]),
      ],
      ["left", "right", "right", "right", "right", "right", "right"],
      "    ",
    ),
    ...wrap(TRIALS_REMARK, "    "),
  ];
}

/** Why chi square and BIC of the trials are not those of the fit. */
export const TRIALS_REMARK =
  "Trials are fitted to readings averaged in bins much narrower than the lines: fewer rows than the fit has, so chi square and BIC compare with each other only.";

const PURE: EnergyUnit = { name: "", perElectronvolt: 1 };

function pure(quantity: Quantity): string {
  return formatQuantity(quantity.value, quantity.sigma, "", { ...ends(quantity), exactWord: "held" });
}

/** meV from this size on, µeV below: the same everywhere, so that 4.3 µeV is never also 0.0043 meV. */
const LEAST_IN_MEV = 1e-4;

export function systematicWords(value_eV: number | null): string {
  if (value_eV === null) return NOT_DETERMINED_WORDS;
  const unit =
    value_eV >= 0.5 ? ELECTRONVOLT : value_eV >= LEAST_IN_MEV ? MILLIELECTRONVOLT : MICROELECTRONVOLT;
  return `±${formatNumber(value_eV * unit.perElectronvolt, 2)} ${unit.name}`;
}

/** Both ends to the place of the standard error, so that they can be laid beside the value. */
export function interval(quantity: Quantity, unit: EnergyUnit): string {
  const { low, high, sigma } = scaleQuantity(quantity, unit.perElectronvolt);
  if (sigma === 0) return "held";
  if (low === null || high === null) return NOT_DETERMINED_WORDS;
  const spread = sigma !== null && sigma > 0 ? sigma : (high - low) / 2;
  const digits = Math.min(12, Math.max(0, spread > 0 ? 1 - Math.floor(Math.log10(spread)) : 6));
  return `${low.toFixed(digits)} to ${high.toFixed(digits)}${unit.name === "" ? "" : ` ${unit.name}`}`;
}

function widthPart(result: RunglineResult): string[] {
  const law = result.width_law;
  if (law === null) return [...heading("Width law"), `  ${NOT_DETERMINED_WORDS}`];
  const kind = result.protocol.width.floor_kind;
  const floor = kind === "none" ? "" : "G_0 + ";
  const formula =
    law.base === "p-envelope"
      ? `G_n = ${floor}G_1 [(n^2 - 1)/n^5]^(k/3)`
      : `G_n = ${floor}G_1 ${law.base === "n" ? "n" : `(${law.base})`}^-k`;
  return [
    ...heading(`Width law: ${formula} (full widths at half maximum), n = ${law.fit_n[0]} to ${law.fit_n[1]}`),
    ...textTable(
      [
        [
          `floor G_0${kind === "gaussian" ? " (added in quadrature)" : ""}`,
          held(law.floor_eV, MICROELECTRONVOLT),
        ],
        ["coefficient G_1", held(law.coefficient_eV, energyUnit(law.coefficient_eV.value))],
        ["exponent k", exponentWithEnds(law.exponent)],
        ...(law.free_exponent === undefined
          ? []
          : [["exponent set free, as a test", exponentWithEnds(law.free_exponent)]]),
      ],
      ["left", "left"],
    ),
    lawChi2InWords(law),
  ];
}

/** The interval beside the value: its ends are those of the profile where one was made. */
function exponentWithEnds(exponent: Quantity): string {
  const known = exponent.sigma !== null && exponent.sigma > 0 && exponent.low !== null;
  return known ? `${pure(exponent)}, interval ${interval(exponent, PURE)}` : pure(exponent);
}

function held(quantity: Quantity, unit: EnergyUnit): string {
  return formatEnergy(quantity, unit, { exactWord: "held" });
}

function strengthPart(result: RunglineResult): string[] {
  const law = result.strength_law;
  if (law === null) return [...heading("Strength law"), `  ${NOT_DETERMINED_WORDS}`];
  const b = law.base === "n" ? "n" : "(n - delta)";
  const formula =
    { cubic: `A_n = C ${b}^-3`, "p-envelope": "A_n = C (n^2 - 1)/n^5", sheet: "A_n = C (n - 1/2)^-3" }[
      law.law
    ] ?? law.law;
  return [
    ...heading(`Strength law: ${formula}, n = ${law.fit_n[0]} to ${law.fit_n[1]}`),
    ...textTable(
      [
        [
          "coefficient C",
          formatQuantity(law.coefficient.value, law.coefficient.sigma, areaUnit(result.reading.signal_unit), {
            ...ends(law.coefficient),
          }),
        ],
        [
          "area n^3 down to half of the law",
          law.half_at_n === null ? "not within the lines seen" : `at n = ${formatNumber(law.half_at_n, 3)}`,
        ],
      ],
      ["left", "left"],
    ),
    lawChi2InWords(law),
  ];
}

function tailPart(result: RunglineResult): string[] {
  const { tail } = result;
  if (tail === null) return [];
  return [
    ...heading("Tail: lines above the last one told apart, and the continuum"),
    `  factor on the strength law ${pure(tail.factor)}, n = ${tail.from_n} to ${tail.to_n}`,
    ...wrap(tailInWords(result), "  "),
  ];
}

/** Why the tail ends where it does, and whose errors lean on it. */
export function tailInWords({ tail, lines, protocol }: RunglineResult): string {
  if (tail === null) return "";
  const top = lines.slice(-2).map(({ n }) => n);
  const ends =
    protocol.tail.cutoff_n !== null
      ? `tail.cutoff_n ends the series at n = ${protocol.tail.cutoff_n}`
      : `above n = ${tail.to_n} lines are three times as broad as their spacing or more, and what is left up to the gap stands as one smooth absorption`;
  return `These follow the laws of the lines below with one free factor; ${ends}. The errors of the highest lines (n = ${top.join(", ")}) lean on that: lines next to a tail whose place and width are tied are better known than free neighbours would leave them, and less where the laws do not hold that far up.`;
}

/** One asymmetry for all lines, where they share it; null where each has its own. */
export function sharedAsymmetry(result: RunglineResult): Quantity | null {
  const [first, ...others] = result.lines.map((line) => line.asymmetry);
  if (first === undefined || others.length === 0 || first.value === null) return null;
  return others.every(({ value, sigma }) => value === first.value && sigma === first.sigma) ? first : null;
}

function linesPart(result: RunglineResult): string[] {
  if (result.lines.length === 0) return [...heading("Lines"), "  none"];
  const widthUnit = smallestUnit(result.lines.map((line) => line.width_eV.value));
  const unit = areaUnit(result.reading.signal_unit);
  const signalUnit = signalUnitWords(result.reading.signal_unit);
  const shared = sharedAsymmetry(result);
  const rows = [
    [
      "n",
      "E_n/eV",
      `G_n/${widthUnit.name}`,
      `area/(${unit})`,
      ...(shared === null ? ["q"] : []),
      "area/sigma",
      "(E_n - law)/µeV",
      signalUnit === "" ? "peak" : `peak/(${signalUnit})`,
      "G_n/spacing",
      "(hbar/G_n)/ps",
    ],
    ...result.lines.map((line) => [
      String(line.n),
      bare(line.energy_eV, 1),
      bare(line.width_eV, widthUnit.perElectronvolt),
      bare(line.area, 1),
      ...(shared === null ? [bare(line.asymmetry, 1)] : []),
      formatNumber(line.significance, 3),
      bare(line.law_offset_eV, 1e6) + (line.in_level_fit ? "" : " *"),
      bare(line.peak, 1),
      formatNumber(line.width_over_spacing, 2),
      bare(line.lifetime_ps, 1),
    ]),
  ];
  const align: Align[] = ["right", ...Array.from({ length: shared === null ? 9 : 8 }, (): Align => "left")];
  const strengths = result.lines.filter((line) => line.strength_per_cm3.value !== null);
  const left = result.lines.some((line) => !line.in_level_fit);
  return [
    ...heading("Lines"),
    ...textTable(rows, align),
    shared === null
      ? "  G_n: full width at half maximum of the Lorentzian part; q: asymmetry."
      : `  G_n: full width at half maximum of the Lorentzian part. Asymmetry q = ${pure(shared)}, shared by all lines.`,
    "  hbar/G_n: a lower bound of the lifetime, since the width holds dephasing and any floor too.",
    ...(left ? ["  * not in the fit of the level law"] : []),
    ...(strengths.length === 0
      ? []
      : [
          "",
          "  Oscillator strength times density:",
          ...textTable(
            strengths.map((line) => [
              `n = ${line.n}`,
              formatQuantity(line.strength_per_cm3.value, line.strength_per_cm3.sigma, "1/cm^3"),
            ]),
            ["left", "left"],
            "    ",
          ),
        ]),
  ];
}

export function smallestUnit(values: readonly (number | null)[]): EnergyUnit {
  const known = values.filter((value): value is number => value !== null && value > 0);
  const median = [...known].sort((a, b) => a - b)[Math.floor(known.length / 2)];
  return median === undefined || median < 2e-3 ? MICROELECTRONVOLT : MILLIELECTRONVOLT;
}

/** Value and error where the unit stands in the head of the column. */
function bare(quantity: Quantity, factor: number): string {
  const scaled = scaleQuantity(quantity, factor);
  if (scaled.value !== null && scaled.sigma === null) return `${withoutError(scaled.value)}(?)`;
  return formatQuantity(scaled.value, scaled.sigma, "", { ...ends(scaled), exactWord: "held" });
}

/** What is called the apparent gap. */
export function apparentGapInWords(highestN: number): string {
  return `the level law at n = ${highestN + 0.5}, half a step above the highest line seen`;
}

/** A radius in nm while it is below a micrometre. */
export function inRadiusUnit(radius_um: Quantity): {
  readonly quantity: Quantity;
  readonly unit: "nm" | "µm";
} {
  return (radius_um.value ?? 1) < 1
    ? { quantity: { ...radius_um, ...scaleQuantity(radius_um, 1e3) }, unit: "nm" }
    : { quantity: radius_um, unit: "µm" };
}

function derivedPart(result: RunglineResult): string[] {
  const { derived } = result;
  if (derived === null) return [];
  const rows: string[][] = [
    [
      "Bohr radius",
      formatQuantity(
        derived.bohr_radius_nm.value,
        derived.bohr_radius_nm.sigma,
        "nm",
        ends(derived.bohr_radius_nm),
      ),
      derived.bohr_radius_from,
    ],
    [
      `binding energy of n = ${derived.binding_eV.n}`,
      formatEnergy(derived.binding_eV, energyUnit(derived.binding_eV.value)),
      "",
    ],
    [
      "apparent gap",
      formatEnergy(derived.apparent_gap_eV, ELECTRONVOLT),
      derived.highest_n === null ? "" : apparentGapInWords(derived.highest_n),
    ],
    ["highest n seen", derived.highest_n === null ? NOT_DETERMINED_WORDS : String(derived.highest_n), ""],
    [
      "highest n resolved",
      derived.highest_resolved_n === null ? NOT_DETERMINED_WORDS : String(derived.highest_resolved_n),
      "its width below its spacing",
    ],
    ...derived.radius_um.map((radius) => {
      const { quantity, unit } = inRadiusUnit(radius);
      return [
        `mean radius of n = ${radius.n}`,
        formatQuantity(quantity.value, quantity.sigma, unit, ends(quantity)),
        "",
      ];
    }),
  ];
  return [...heading("Derived"), ...textTable(rows, ["left", "left", "left"])];
}

function backgroundPart(result: RunglineResult): string[] {
  if (result.background.length === 0) return [];
  return [
    ...heading("Background"),
    ...textTable(
      result.background.map((one) => [
        one.term,
        one.name,
        formatQuantity(one.quantity.value, one.quantity.sigma, signalUnitWords(one.unit), ends(one.quantity)),
      ]),
      ["left", "left", "left"],
    ),
  ];
}

function fitPart(result: RunglineResult): string[] {
  const { fit } = result;
  if (fit === null) return [];
  const reached = Object.entries(fit.reached)
    .map(
      ([name, value]) =>
        `${name} ${formatNumber(value, 2)} (limit ${formatNumber(fit.tolerances[name] ?? null, 2)})`,
    )
    .join("; ");
  const rows: string[][] = [
    [
      "window",
      `${formatNumber(fit.window_eV[0], 8)} to ${formatNumber(fit.window_eV[1], 8)} eV, fitted as ${fit.domain}`,
    ],
    ["stopped by", `${TERMINATION_WORDS[fit.termination]} after ${fit.iterations} iterations`],
    ["reached", reached === "" ? NOT_DETERMINED_WORDS : reached],
    [
      "chi square",
      `${formatNumber(fit.chi2, 6)} for ${fit.dof} degrees of freedom, reduced ${formatNumber(fit.reduced_chi2)}`,
    ],
    ["AIC, BIC", `${criterion(fit.aic)}, ${criterion(fit.bic)}`],
    [
      "residuals",
      `p of runs ${formatProbability(fit.runs_p)}; Durbin-Watson ${formatNumber(fit.durbin_watson, 3)}; correlation of neighbours ${formatNumber(
        fit.lag1,
        2,
      )}; effective points ${formatNumber(fit.effective_points, 5)}`,
    ],
    ["parameters", `${fit.parameters}, rank ${fit.rank}, condition ${formatNumber(fit.condition, 2)}`],
    ["standard errors", ERRORS_FROM_WORDS[fit.sigma_from]],
  ];
  return [...heading("Fit"), ...textTable(rows, ["left", "left"])];
}

function diagnosticsSection(result: RunglineResult): string[] {
  const rows = diagnosticsPart(result);
  return rows.length === 0 ? [] : [...heading("Diagnostics"), ...rows];
}

/** Only differences count, of which one is little and ten is much. */
export function criterion(value: number | null): string {
  return value === null ? NOT_DETERMINED_WORDS : value.toFixed(1);
}

function notesPart(result: RunglineResult): string[] {
  if (result.notes.length === 0) return [...heading("Notes"), "  none"];
  return [
    ...heading("Notes"),
    ...gravestFirst(result.notes).flatMap((note) => [
      `  ${note.level === "doubt" ? "DOUBT" : "assumed"} ${note.code} (${note.about})`,
      ...wrap(note.text, "    "),
      ...(note.remedy === "" ? [] : wrap(`Remedy: ${note.remedy}`, "    ")),
    ]),
  ];
}

function cautionsPart(result: RunglineResult): string[] {
  const cautions = cautionsFor(result);
  if (cautions.length === 0) return [];
  return [...heading("Cautions"), ...cautions.flatMap((caution) => wrap(caution, "  "))];
}
