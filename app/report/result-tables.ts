import { quotedLevels, type LineResult, type RunglineResult } from "../protocol/index.ts";
import { areaUnit, signalUnitWords } from "./area-unit.ts";
import { count, measured, numberColumn, textColumn, words, type Cell, type DataTable } from "./data-table.ts";
import {
  ELECTRONVOLT,
  energyUnit,
  formatChiSquare,
  formatNumber,
  formatProbability,
  formatQuantity,
  MICROELECTRONVOLT,
  NOT_DETERMINED_WORDS,
  probabilityInWords,
  type EnergyUnit,
} from "./format-quantity.ts";
import { percent } from "./protocol-in-words.ts";
import {
  apparentGapInWords,
  interval,
  isOneSigma,
  sharedAsymmetry,
  smallestUnit,
  systematicWords,
  tailInWords,
  TRIALS_REMARK,
} from "./result-to-text.ts";

type Quantity = LineResult["energy_eV"];
const PURE: EnergyUnit = { name: "", perElectronvolt: 1 };

/** The tables of one result, in the order in which a paper gives them. */
export function resultTables(result: RunglineResult): readonly DataTable[] {
  return [
    seriesTable(result),
    lawsTable(result),
    linesTable(result),
    lineSizesTable(result),
    extraTable(result),
    derivedTable(result),
    rangesTable(result),
    readingsTable(result),
    trialsTable(result),
    backgroundTable(result),
    resampledTable(result),
  ].filter((table) => table !== null);
}

/** Unequal sides belong behind the value only where the interval is that of one standard error. */
function energyCell(quantity: Quantity, unit: EnergyUnit, level: number): Cell {
  const plain = isOneSigma(level) ? quantity : { ...quantity, low: null, high: null };
  return measured(plain, unit.perElectronvolt, unit.name);
}

function seriesTable(result: RunglineResult): DataTable | null {
  const { series, systematic } = result;
  if (series === null) return null;
  const level = result.protocol.uncertainty.level;
  const levels = quotedLevels(series);
  const rydberg = energyUnit(series.rydberg_eV.value);
  const ritz = series.defect2.value !== null;
  const given = systematic?.held_defect === undefined ? "" : ", for the held defect";
  const row = (name: string, quantity: Quantity, unit: EnergyUnit, part: string): Cell[] => [
    words(name),
    energyCell(quantity, unit, level),
    words(part),
    words(interval(quantity, unit)),
  ];
  const defectPart =
    systematic === null || systematic.defect0 === null
      ? NOT_DETERMINED_WORDS
      : `±${formatNumber(systematic.defect0, 2)}`;
  return {
    name: "series",
    title: `Series *E*_{n} = *E*_{g} − *Ry*/(*n* − *δ*)^{2}, *n* = ${series.fit_n[0]} to ${series.fit_n[1]}`,
    columns: [
      textColumn("quantity"),
      textColumn(levels.scaled ? "value(scaled error)" : "value(standard error)"),
      textColumn("systematic"),
      textColumn(`interval at ${percent(level)}`),
    ],
    rows: [
      row(`gap${given}`, levels.gap_eV, ELECTRONVOLT, systematicWords(systematic?.gap_eV ?? null)),
      row(
        `Rydberg energy${given}`,
        levels.rydberg_eV,
        rydberg,
        systematicWords(systematic?.rydberg_eV ?? null),
      ),
      row(ritz ? "quantum defect, constant part" : "quantum defect", levels.defect0, PURE, defectPart),
      ...(ritz ? [row("quantum defect, Ritz term", series.defect2, PURE, "")] : []),
      ...(levels.scaled
        ? [
            row("gap, error unscaled", series.gap_eV, ELECTRONVOLT, ""),
            row("Rydberg energy, error unscaled", series.rydberg_eV, rydberg, ""),
            row("quantum defect, error unscaled", series.defect0, PURE, ""),
          ]
        : []),
    ],
    remarks: [
      ...(levels.scaled
        ? [
            "The law is rejected: errors and intervals are scaled by the root of reduced chi square, and the unscaled ones, which are too small, stand below.",
          ]
        : []),
      `Chi square ${formatChiSquare(series.chi2, series.dof)} for ${series.dof} degrees of freedom, ${probabilityInWords(series.p, 3).replace("p", "*p*")}. The standard error is statistical; the systematic part is the spread over defensible choices.`,
      ...heldDefectRemark(systematic?.held_defect),
      ...correlations(series.correlation),
    ],
  };
}

function heldDefectRemark(held: NonNullable<RunglineResult["systematic"]>["held_defect"]): string[] {
  if (held === undefined) return [];
  return [
    `The defect is held at ${held.defect0} ± ${Number(held.sigma.toPrecision(2))}${held.assumed ? " (assumed)" : ""}: values, errors and intervals of gap and Rydberg energy hold for that defect only; its uncertainty puts ${systematicWords(held.gap_eV)} on the gap and ${systematicWords(held.rydberg_eV)} on the Rydberg energy (systematic).`,
  ];
}

function correlations({
  names,
  matrix,
}: {
  names: readonly string[];
  matrix: readonly (readonly number[])[];
}): string[] {
  const pairs = names.flatMap((name, i) =>
    names
      .slice(i + 1)
      .map(
        (other, k) =>
          `${plainName(name)} and ${plainName(other)} ${(matrix[i]?.[i + 1 + k] ?? 0).toFixed(3)}`,
      ),
  );
  return pairs.length === 0 ? [] : [`Correlations: ${pairs.join("; ").replaceAll("-", "−")}.`];
}

function plainName(key: string): string {
  return (
    { gap_eV: "gap", rydberg_eV: "Rydberg energy", defect0: "defect", defect2: "Ritz term" }[key] ??
    key.replaceAll("_", " ")
  );
}

function lawsTable(result: RunglineResult): DataTable | null {
  const { width_law: width, strength_law: strength, tail } = result;
  const rows: Cell[][] = [];
  const held = (quantity: Quantity, unit: EnergyUnit): Cell =>
    measured(quantity, unit.perElectronvolt, unit.name);
  const about = (law: {
    fit_n: readonly number[];
    chi2: number | null;
    dof: number;
    p: number | null;
  }): string =>
    `n = ${law.fit_n[0]} to ${law.fit_n[1]}, chi square ${formatChiSquare(law.chi2, law.dof, 3)} for ${law.dof}, ${probabilityInWords(law.p)}`;
  if (width !== null)
    rows.push(
      [words("width floor"), held(width.floor_eV, MICROELECTRONVOLT), words(about(width))],
      [
        words("width coefficient"),
        held(width.coefficient_eV, energyUnit(width.coefficient_eV.value)),
        words(`base ${width.base}`),
      ],
      [words("width exponent"), measured(width.exponent, 1, ""), words("")],
      ...(width.free_exponent === undefined
        ? []
        : [[words("width exponent set free"), measured(width.free_exponent, 1, ""), words("a test")]]),
    );
  if (strength !== null)
    rows.push(
      [
        words("strength coefficient"),
        measured(strength.coefficient, 1, areaUnit(result.reading.signal_unit)),
        words(`${strength.law} on ${strength.base}; ${about(strength)}`),
      ],
      [
        words("area n³ half of the law"),
        words(
          strength.half_at_n === null
            ? "not within the lines seen"
            : `at n = ${formatNumber(strength.half_at_n, 3)}`,
        ),
        words(""),
      ],
    );
  if (tail !== null)
    rows.push([
      words("tail over strength law"),
      measured(tail.factor, 1, ""),
      words(`n = ${tail.from_n} to ${tail.to_n}`),
    ]);
  const tailRemark = tailInWords(result);
  return rows.length === 0
    ? null
    : {
        name: "laws",
        title: "Laws of widths and strengths",
        columns: [textColumn("quantity"), textColumn("value(standard error)"), textColumn("law")],
        rows,
        remarks: tailRemark === "" ? [] : [`The lines above the last one told apart: ${tailRemark}`],
      };
}

function linesTable(result: RunglineResult): DataTable | null {
  const { lines } = result;
  if (lines.length === 0) return null;
  const unit = smallestUnit(lines.map((line) => line.width_eV.value));
  const area = areaUnit(result.reading.signal_unit);
  const signal = signalUnitWords(result.reading.signal_unit);
  const left = lines.some((line) => !line.in_level_fit);
  const shared = sharedAsymmetry(result);
  return {
    name: "lines",
    title: "Lines",
    columns: [
      numberColumn("*n*"),
      numberColumn("*E*_{n}", "eV"),
      numberColumn("*Γ*_{n}", unit.name),
      numberColumn("*A*_{n}", area.includes("/") ? `(${area})` : area),
      ...(shared === null ? [numberColumn("*q*_{n}")] : []),
      numberColumn("*A*_{n}/*σ*"),
      numberColumn("(*E*_{n} − law)", "µeV"),
      numberColumn("peak", signal === "" ? "" : `(${signal})`),
      numberColumn("*Γ*_{n}/spacing"),
      numberColumn("(*ħ*/*Γ*_{n})", "ps"),
    ],
    rows: lines.map((line) => [
      count(line.n),
      measured(line.energy_eV),
      measured(line.width_eV, unit.perElectronvolt),
      measured(line.area),
      ...(shared === null ? [measured(line.asymmetry)] : []),
      count(line.significance, 3),
      measured(line.law_offset_eV, 1e6, null, line.in_level_fit ? "" : " *"),
      measured(line.peak),
      count(line.width_over_spacing, 2),
      measured(line.lifetime_ps),
    ]),
    remarks: [
      `*Γ*_{n}: full width at half maximum of the Lorentzian part. *A*_{n}: area. ${
        shared === null
          ? "*q*_{n}: asymmetry."
          : `Asymmetry *q* = ${formatQuantity(shared.value, shared.sigma, "", { exactWord: "held" })}, shared by all lines.`
      } *ħ*/*Γ*_{n}: a lower bound of the lifetime, since the width holds dephasing and any floor too.${left ? " A star: not in the fit of the level law." : ""}`,
    ],
  };
}

/** Beside the lines: what follows from each with the choices of material. */
function lineSizesTable(result: RunglineResult): DataTable | null {
  const { lines, derived } = result;
  const strengths = lines.some((line) => line.strength_per_cm3.value !== null);
  if (lines.length === 0) return null;
  const area = areaUnit(result.reading.signal_unit);
  const notDetermined = { value: null, sigma: null, low: null, high: null };
  return {
    name: "line-sizes",
    title: "Strengths and sizes",
    columns: [
      numberColumn("*n*"),
      numberColumn("*A*_{n} *n*^{3}", area.includes("/") ? `(${area})` : area),
      ...(strengths ? [numberColumn("*N f*", "(1/cm^{3})")] : []),
      numberColumn("mean radius", "nm"),
    ],
    rows: lines.map((line) => [
      count(line.n),
      measured(line.area_n3),
      ...(strengths ? [measured(line.strength_per_cm3)] : []),
      measured(derived?.radius_um.find((radius) => radius.n === line.n) ?? notDetermined, 1e3),
    ]),
    remarks: [
      `${strengths ? "*N f*: density of oscillators times their strength. " : ""}A mark of question: error unknown, since the Bohr radius was given without one.`,
    ],
  };
}

function extraTable(result: RunglineResult): DataTable | null {
  const extra = result.extra ?? [];
  if (extra.length === 0) return null;
  return {
    name: "extra-series",
    title: "Lines of other series with the same gap and Rydberg energy",
    columns: [
      textColumn("series"),
      numberColumn("*n*"),
      numberColumn("*E*_{n}", "eV"),
      numberColumn("*Γ*_{n}", "µeV"),
      numberColumn("*A*_{n}", `(${areaUnit(result.reading.signal_unit)})`),
      numberColumn("*A*_{n}/*σ*"),
      numberColumn("*δ*"),
    ],
    rows: extra.flatMap((one) =>
      one.lines.map((line): Cell[] => [
        words(one.name),
        count(line.n),
        measured(line.energy_eV),
        measured(line.width_eV, 1e6),
        measured(line.area),
        count(line.significance, 3),
        measured(one.defect),
      ]),
    ),
    remarks: [],
  };
}

function derivedTable(result: RunglineResult): DataTable | null {
  const { derived } = result;
  if (derived === null) return null;
  const whole = (n: number | null): Cell => (n === null ? words(NOT_DETERMINED_WORDS) : words(String(n)));
  const binding = energyUnit(derived.binding_eV.value);
  return {
    name: "derived",
    title: "Derived quantities",
    columns: [textColumn("quantity"), textColumn("value(standard error)"), textColumn("from")],
    rows: [
      [words("Bohr radius"), measured(derived.bohr_radius_nm, 1, "nm"), words(derived.bohr_radius_from)],
      [
        words(`binding energy of n = ${derived.binding_eV.n}`),
        measured(derived.binding_eV, binding.perElectronvolt, binding.name),
        words(""),
      ],
      [
        words("apparent gap"),
        measured(derived.apparent_gap_eV, 1, "eV"),
        words(derived.highest_n === null ? "" : apparentGapInWords(derived.highest_n)),
      ],
      [words("highest n seen"), whole(derived.highest_n), words("")],
      [words("highest n resolved"), whole(derived.highest_resolved_n), words("its width below its spacing")],
    ],
    remarks: [],
  };
}

function rangesTable(result: RunglineResult): DataTable | null {
  const ranges = result.series?.ranges ?? [];
  if (ranges.length < 2) return null;
  const rydberg = energyUnit(result.series!.rydberg_eV.value);
  return {
    name: "ranges",
    title: "The same level law for other ranges of *n*",
    columns: [
      textColumn("*n*"),
      numberColumn("*E*_{g}", "eV"),
      numberColumn("*Ry*", rydberg.name),
      numberColumn("*δ*"),
      numberColumn("chi square"),
      numberColumn("degrees of freedom"),
      numberColumn("*p*"),
    ],
    rows: ranges.map((one) => [
      words(`${one.n_min} to ${one.n_max}`),
      measured(one.gap_eV),
      measured(one.rydberg_eV, rydberg.perElectronvolt),
      measured(one.defect0),
      one.dof === 0 ? count(0) : count(one.chi2, 4),
      count(one.dof),
      probability(one.p),
    ]),
    remarks: [],
  };
}

function readingsTable(result: RunglineResult): DataTable | null {
  const readings = result.series?.readings ?? [];
  if (readings.length < 2) return null;
  return {
    name: "readings",
    title: "Readings of *n*: not decided by energies, ranked by strengths and widths",
    columns: [
      numberColumn("shift of *n*"),
      numberColumn("*δ*"),
      numberColumn("chi square of strengths"),
      numberColumn("chi square of widths"),
      textColumn(""),
    ],
    rows: readings.map((one) => [
      count(one.shift),
      count(one.defect0, 4),
      count(one.strength_chi2, 4),
      count(one.width_chi2, 4),
      words(one.chosen ? "chosen" : ""),
    ]),
    remarks: [],
  };
}

/** A number, or `< 1e-16` in words. */
function probability(p: number | null): Cell {
  const text = formatProbability(p);
  return text.startsWith("<") ? words(text) : count(p, 2);
}

function trialsTable(result: RunglineResult): DataTable | null {
  const trials = result.systematic?.trials ?? [];
  if (trials.length === 0) return null;
  const bare = (value: number | null, digits: number): Cell =>
    words(value === null ? NOT_DETERMINED_WORDS : value.toFixed(digits).replace(/^-/, "−"));
  return {
    name: "systematic-trials",
    title: "Trials behind the systematic part",
    columns: [
      textColumn("trial"),
      textColumn("*E*_{g} / eV"),
      textColumn("*Ry* / meV"),
      textColumn("*δ*"),
      numberColumn("chi square"),
      textColumn("BIC"),
      numberColumn("*p* of runs"),
      textColumn("counted"),
    ],
    rows: trials.map((one) => [
      words(one.name),
      bare(one.gap_eV, 8),
      bare(one.rydberg_eV === null ? null : 1e3 * one.rydberg_eV, 4),
      bare(one.defect0, 5),
      count(one.chi2, 5),
      bare(one.bic, 1),
      probability(one.runs_p),
      words(one.counted === undefined ? "" : one.counted ? "yes" : "no"),
    ]),
    remarks: [TRIALS_REMARK],
  };
}

function backgroundTable(result: RunglineResult): DataTable | null {
  if (result.background.length === 0) return null;
  return {
    name: "background",
    title: "Background",
    columns: [textColumn("term"), textColumn("parameter"), textColumn("value(standard error)")],
    rows: result.background.map((one) => [
      words(one.term),
      words(one.name),
      measured(one.quantity, 1, signalUnitWords(one.unit)),
    ]),
    remarks: [],
  };
}

function resampledTable(result: RunglineResult): DataTable | null {
  const { resampled } = result;
  if (resampled === null || resampled === undefined) return null;
  const row = (
    name: string,
    one: { median: number | null; low: number | null; high: number | null },
    factor: number,
    unit: string,
  ): Cell[] => [
    words(`${name}${unit === "" ? "" : ` / ${unit}`}`),
    ...[one.median, one.low, one.high].map((value) => count(value === null ? null : value * factor, 9)),
  ];
  return {
    name: "resampled",
    title: `Intervals from ${resampled.count} resampled spectra (${resampled.kind}, seed ${resampled.seed}, ${resampled.failed} failed)`,
    columns: [textColumn("quantity"), numberColumn("median"), numberColumn("low"), numberColumn("high")],
    rows: [
      row("gap", resampled.gap_eV, 1, "eV"),
      row("Rydberg energy", resampled.rydberg_eV, 1e3, "meV"),
      row("quantum defect", resampled.defect0, 1, ""),
      row("width exponent", resampled.width_exponent, 1, ""),
    ],
    remarks: [`Interval at ${percent(result.protocol.uncertainty.level)}.`],
  };
}
