import { doubt, failure, success, type Note, type Result } from "../base/index.ts";
import type { Table } from "../table/index.ts";
import { CM_PER_UM, depthFromTransmittance, depthSigma } from "../units/index.ts";
import { axisRounding } from "./axis-rounding.ts";
import { chooseColumns } from "./choose-columns.ts";
import { describeColumn } from "./find-column.ts";
import { findSlit } from "./find-slit.ts";
import { count, gatherPoints } from "./gather-points.ts";
import type { SpectrumIssue } from "./issue.ts";
import { judgePoints } from "./judge-points.ts";
import { median, pointNoise } from "./point-noise.ts";
import { implausibleEnergy } from "./plausible-energy.ts";
import { readAxis } from "./read-axis.ts";
import { readQuantity, type QuantityReading } from "./read-quantity.ts";
import { repeatedFacts } from "./repeated-facts.ts";
import { skippedRows } from "./skipped-rows.ts";
import type { ColumnRole, ReadingChoices, Spectrum } from "./spectrum.ts";

/** Fewer points than this are no spectrum: a line alone needs four numbers, and a background. */
const FEWEST = 10;
/** Above this relative noise of T the logarithm is biased by more than 1.5 %. */
const NOISY = 0.1;

/**
 * What      A table and the reading choices to one curve: energies ascending in eV, alpha in 1/cm (or natural optical
 *           depth), one standard deviation per point. What was decided for the user stands in `columns` and `notes`.
 * Domain    T <= 0 has no logarithm: such points keep their T, have a NaN signal and used = 0. T above 1 and negative
 *           alpha are kept.
 */
export function readSpectrum(
  table: Table,
  sha256: string,
  choices: ReadingChoices,
): Result<Spectrum, SpectrumIssue> {
  const chosen = chooseColumns(table, choices);
  if (!chosen.ok) return chosen;
  const axis = readAxis(table, chosen.value.axis, choices);
  const quantity = readQuantity(table, chosen.value, choices);
  if (!axis.ok || !quantity.ok)
    return failure(...(axis.ok ? [] : axis.issues), ...(quantity.ok ? [] : quantity.issues));

  const read = quantity.value;
  const ratio = read.quantity === "transmittance" || read.quantity === "counts";
  const points = gatherPoints(table, chosen.value, axis.value, read.scale, read.sigmaScale);
  const m = points.energy_eV.length;
  if (m > 0 && m < FEWEST && points.energy_eV[0] === points.energy_eV[m - 1])
    return failure({
      code: "spectrum/constant-axis",
      facts: { file: table.file, column: chosen.value.axis.column.index, found: points.energy_eV[0]! },
    });
  if (m < FEWEST)
    return failure({
      code: "spectrum/too-few-points",
      facts: { file: table.file, found: m, expected: FEWEST },
    });
  if (points.value.every((value) => value === points.value[0]))
    return failure({
      code: "spectrum/constant-signal",
      facts: {
        file: table.file,
        column: chosen.value.signal.column.index,
        found: describeColumn(chosen.value.signal.column),
      },
    });

  const energies = implausibleEnergy(
    table.file,
    points.energy_eV[0]!,
    points.energy_eV[m - 1]!,
    axis.value,
    choices,
  );
  const facts = repeatedFacts(table, points.turnsRound);
  const refused = [energies.issue, facts.issue].filter((issue) => issue !== null);
  if (refused.length > 0) return failure(...refused);

  const fixed = choices.noise.sigma === null ? null : choices.noise.sigma * read.scale;
  const noise = pointNoise(
    points,
    fixed,
    chosen.value.reference !== null,
    read.quantity === "counts" ? choices.noise : null,
  );
  const judged = judgePoints(points, noise, ratio, read.scale, choices.noise.faulty_points === "keep");
  const { leftOut } = judged;
  const thickness_cm = read.thickness_um === null ? 1 : read.thickness_um * CM_PER_UM;
  const notes: Note[] = [
    ...chosen.value.notes,
    ...axis.value.notes,
    ...energies.notes,
    ...read.notes,
    ...facts.notes,
    ...skippedRows(table),
    ...points.notes,
    ...noise.notes,
    ...judged.notes,
  ];
  const slit = findSlit(table, choices, notes);
  const used = leftOut.map((out) => 1 - out);
  const without = (values: Float64Array): Float64Array =>
    judged.notes.length === 0 ? values : values.map((one, i) => (leftOut[i] === 1 ? NaN : one));
  let signal = points.value;
  let sigma = without(noise.sigma);
  let transmittance: Spectrum["transmittance"] = null;
  if (ratio) {
    const depth = toDepth(points.value, judged.smooth, sigma, read, used, notes);
    transmittance = {
      value: points.value,
      sigma,
      surface: read.surface,
      reflectance: read.reflectance,
      thickness_cm,
    };
    signal = depth.signal;
    sigma = depth.sigma;
  }
  if (thickness_cm !== 1) {
    signal = signal.map((value) => value / thickness_cm);
    sigma = sigma.map((value) => value / thickness_cm);
  }
  const rounding = axisRounding(chosen.value.axis.column.values, axis.value);
  if (used.every((flag) => flag === 0))
    return failure({
      code: "spectrum/no-light",
      facts: { file: table.file, found: describeColumn(chosen.value.signal.column) },
    });

  return success({
    file: table.file,
    sha256,
    energy_eV: points.energy_eV,
    line: points.line,
    ...(rounding === null ? {} : { axisRounding: rounding }),
    signal,
    unit: read.quantity === "alpha" || read.thickness_um !== null ? "1/cm" : "1",
    thickness_cm: read.knownThickness_um === null ? null : read.knownThickness_um * CM_PER_UM,
    ...(slit === null ? {} : { slit }),
    sigma,
    noise: {
      source: noise.source,
      medianSigma: median(sigma),
      ...(noise.pointsAsOne > 1 ? { pointsAsOne: noise.pointsAsOne } : {}),
    },
    transmittance,
    used,
    quantityRead: read.quantity,
    axisUnitRead: axis.value.scale.unit,
    medium: axis.value.scale.medium,
    columns: chosen.value.roles.map((role) =>
      explain(role, `${axis.value.reason}; ${axis.value.scale.medium}; ${points.order}`, read.reason),
    ),
    dialect: plainDialect(table),
    facts: table.facts.map(({ key, label, text, value, unit }) => ({ key, label, text, value, unit })),
    skippedRows: points.dropped + wholeLinesSkipped(table),
    notes,
  });
}

/** alpha d and its standard deviation; weights from the smoothed T, since those of the single reading bias alpha d. */
function toDepth(
  T: Float64Array,
  smooth: Float64Array,
  sigmaT: Float64Array,
  read: QuantityReading,
  used: Uint8Array,
  notes: Note[],
): { signal: Float64Array; sigma: Float64Array } {
  const m = T.length;
  const signal = new Float64Array(m);
  const sigma = new Float64Array(m);
  let saturated = 0;
  let noisy = 0;
  for (let i = 0; i < m; i++) {
    const leftOut = used[i] === 0;
    // A smoothed T below its own noise tells no more than that: the weight stays finite.
    const level = Math.max(smooth[i]!, sigmaT[i]!);
    if (sigmaT[i]! > NOISY * level) noisy++;
    sigma[i] = depthSigma(level, sigmaT[i]!, read.reflectance, read.surface);
    if (T[i]! > 0) signal[i] = depthFromTransmittance(T[i]!, read.reflectance, read.surface);
    else {
      signal[i] = NaN;
      sigma[i] = NaN;
      used[i] = 0;
      if (!leftOut) saturated++;
    }
  }
  if (saturated > 0)
    notes.push(
      doubt(
        "saturated-points",
        "lines",
        `${count(saturated, "point")} with no transmitted light (T at or below zero) have no absorption and are left out of a fit of alpha`,
        "fit the transmittance itself (lines.domain=transmittance), or measure a thinner crystal",
      ),
    );
  if (noisy > 0)
    notes.push(
      doubt(
        "low-transmission",
        "lines",
        `${count(noisy, "point")} have a noise above ${NOISY * 100} % of the transmitted light: the logarithm is biased there`,
        "fit the transmittance itself (lines.domain=transmittance)",
      ),
    );
  return { signal, sigma };
}

function explain(role: ColumnRole, axis: string, signal: string): ColumnRole {
  if (role.role === "axis") return { ...role, reason: `${role.reason}; ${axis}` };
  if (role.role === "signal") return { ...role, reason: `${role.reason}; ${signal}` };
  return role;
}

function wholeLinesSkipped(table: Table): number {
  return table.skipped.filter(
    ({ column, reason }) => column === null && reason !== "comment" && reason !== "blank",
  ).length;
}

/** The dialect as flat plain data for the result. */
function plainDialect(table: Table): Spectrum["dialect"] {
  const { reasons, ...rest } = table.dialect;
  const flat: Record<string, string | number | boolean | null> = { ...rest };
  for (const [key, reason] of Object.entries(reasons)) flat[`${key}_reason`] = reason;
  return flat;
}
