import { assumption, failure, success, type Note, type Result } from "../base/index.ts";
import type { Table } from "../table/index.ts";
import { DEPTH_PER_ABSORBANCE, PER_CM, reflectance, type SurfaceModel } from "../units/index.ts";
import type { Candidate, ChosenColumns } from "./choose-columns.ts";
import { describeColumn } from "./find-column.ts";
import type { SpectrumIssue } from "./issue.ts";
import { featureDirection } from "./look-at-values.ts";
import type { ReadingChoices, SignalQuantity } from "./spectrum.ts";

/** What the signal column holds and how it becomes T, natural optical depth or alpha in 1/cm. */
export interface QuantityReading {
  readonly quantity: SignalQuantity | "counts";
  /** Factor from the reading to a fraction, natural optical depth, or 1/cm; 1 for counts. */
  readonly scale: number;
  /** The same for the column of standard deviations, which may have a unit of its own. */
  readonly sigmaScale: number;
  readonly surface: SurfaceModel;
  readonly reflectance: number;
  /** null where unknown or not needed. */
  readonly thickness_um: number | null;
  /** null where unknown; alpha does not need it, but the light that was absorbed does. */
  readonly knownThickness_um: number | null;
  readonly reason: string;
  readonly notes: readonly Note[];
}

const ABOUT = "lines";
/** A transmission without unit that reaches beyond this is in percent. */
const NOT_A_FRACTION = 5;
const NOT_PERCENT = 500;
const NOISE_ABOVE_ONE = 1.5;

export function readQuantity(
  table: Table,
  chosen: ChosenColumns,
  choices: ReadingChoices,
): Result<QuantityReading, SpectrumIssue> {
  const notes: Note[] = [];
  const { signal } = chosen;
  const kind = findQuantity(table, chosen, choices, notes);
  if (!kind.ok) return kind;
  const { quantity, reason } = kind.value;
  if (quantity === "counts" && chosen.reference === null)
    return failure({
      code: "spectrum/no-reference",
      facts: { file: table.file, column: signal.column.index, found: describeColumn(signal.column) },
    });

  const unit = choices.signal.unit;
  const perLength = unit !== null && unit !== "fraction" && unit !== "percent";
  if (unit !== null && perLength !== (quantity === "alpha"))
    return failure({
      code: "spectrum/unit-mismatch",
      facts: { file: table.file, found: unit, quantity },
    });

  let scale = 1;
  if (quantity === "transmittance")
    scale = transmittanceScale(signal, choices, notes, chosen.reference !== null);
  if (quantity === "alpha") scale = coefficientScale(signal, choices, notes);
  if (
    quantity === "optical-density" ||
    (quantity === "absorbance" && signal.meaning.quantity !== "absorbance")
  )
    notes.push(
      assumption(
        "decadic-assumed",
        ABOUT,
        `${describeColumn(signal.column)} is read as the decadic logarithm log10(1/T)`,
        "set signal.quantity=optical-depth where it is the natural logarithm",
      ),
    );

  if (quantity !== "alpha" && quantity !== "transmittance" && quantity !== "counts")
    scale = quantity === "optical-depth" ? 1 : DEPTH_PER_ABSORBANCE;
  const sigmaScale = scaleOfSigma(chosen.sigma, quantity, scale);

  const ratio = quantity === "transmittance" || quantity === "counts";
  let surface: SurfaceModel = "none";
  let R = 0;
  if (ratio) {
    surface = choices.signal.surface.model;
    if (surface === "none") {
      const corrected = reflectionCorrected(table);
      notes.push(
        corrected === null
          ? assumption(
              "surface-not-corrected",
              ABOUT,
              "the losses by reflection at the surfaces are not taken off: they stand in the background, and the lines' areas are slightly off where all reflections count",
              "set signal.surface.model to single or all, with signal.surface.reflectance or .index",
            )
          : assumption(
              "surface-corrected-by-header",
              ABOUT,
              `the file says that losses by reflection are corrected ("${corrected}"): none are taken off`,
              "set signal.surface.model to single or all where they still stand in the readings",
            ),
      );
    } else {
      const found = findReflectance(choices, notes);
      if (found === null)
        return failure({ code: "spectrum/no-reflectance", facts: { file: table.file, found: surface } });
      R = found;
    }
  }
  const thickness_um = quantity === "alpha" ? null : findThickness(table, choices, notes);
  const knownThickness_um = thickness_um ?? findThickness(table, choices, []);
  return success({
    quantity,
    scale,
    sigmaScale,
    surface,
    reflectance: R,
    thickness_um,
    knownThickness_um,
    reason,
    notes,
  });
}

function findQuantity(
  table: Table,
  chosen: ChosenColumns,
  choices: ReadingChoices,
  notes: Note[],
): Result<{ quantity: SignalQuantity | "counts"; reason: string }, SpectrumIssue> {
  const { signal } = chosen;
  const asked = choices.signal.quantity;
  if (asked !== null) return success({ quantity: asked, reason: `${asked} by the protocol` });
  const { unit } = choices.signal;
  if (unit === "percent" || unit === "fraction")
    return success({ quantity: "transmittance", reason: `transmittance because signal.unit is ${unit}` });
  if (unit !== null) return success({ quantity: "alpha", reason: `alpha because signal.unit is ${unit}` });
  const { meaning } = signal;
  if (chosen.reference !== null && (meaning.quantity === "counts" || meaning.quantity === null))
    return success({ quantity: "counts", reason: "a reading with its reference: T = (S - D)/(F - D)" });
  if (meaning.quantity !== null && meaning.quantity !== "counts")
    return success({ quantity: meaning.quantity, reason: `${meaning.quantity} by the header` });
  const { signalUnit } = meaning;
  if (signalUnit === "percent")
    return success({ quantity: "transmittance", reason: "transmittance by its unit" });
  if (signalUnit !== null && signalUnit !== "fraction")
    return success({ quantity: "alpha", reason: `alpha by its unit (${signal.column.unit})` });
  const guess = guessQuantity(signal, /absor[bp]/i.test(signal.column.header));
  if (guess === null)
    return failure({
      code: "spectrum/no-reference",
      facts: { file: table.file, column: signal.column.index, found: describeColumn(signal.column) },
    });
  notes.push(
    assumption(
      "quantity-assumed",
      ABOUT,
      `the file does not say what ${describeColumn(signal.column)} holds; ${guess.quantity} is assumed because ${guess.because}`,
      "set signal.quantity (transmittance, absorbance, optical-density, optical-depth, alpha, counts)",
    ),
  );
  return success({ quantity: guess.quantity, reason: `${guess.quantity} because ${guess.because}` });
}

/** What the file says where it says that losses by reflection are corrected already; null where it does not. */
function reflectionCorrected(table: Table): string | null {
  const texts = [...table.facts.map(({ label, text }) => `${label}: ${text}`), ...table.comments];
  return (
    texts.find(
      (text) =>
        /reflect|reflex|r\u00e9flex|fresnel/i.test(text) &&
        /correct|korrig|corrig|removed|subtracted/i.test(text) &&
        !/\bnot?\b|\bnone\b|\bun-?corr|\bnicht\b|\bkein|\bnon\b|\bsans\b/i.test(text),
    ) ?? null
  );
}

/** Dips or peaks, and how large: null where the numbers look like bare counts. */
function guessQuantity(
  signal: Candidate,
  absorption: boolean,
): { quantity: SignalQuantity; because: string } | null {
  const { min, max, median } = signal.look;
  // A reading of a detector is a ratio only where it looks like one; peaks of it may be emission.
  if (signal.meaning.quantity === "counts" && max > 1.6) return null;
  const range = `values from ${short(min)} to ${short(max)}`;
  if (absorption || featureDirection(signal.column.values) === 1) {
    const what = absorption ? "the header speaks of absorption" : "its sharp features are peaks";
    if (max <= 6) return { quantity: "absorbance", because: `${what} and ${range} fit an absorbance` };
    return { quantity: "alpha", because: `${what} and ${range} fit an absorption coefficient in 1/cm` };
  }
  if (median > 0 && max <= 1.6 && min >= -0.5)
    return { quantity: "transmittance", because: `${range} fit a transmitted fraction` };
  if (median > 0 && max <= 130 && min >= -20)
    return { quantity: "transmittance", because: `${range} fit a transmission in percent` };
  return null;
}

function transmittanceScale(
  signal: Candidate,
  choices: ReadingChoices,
  notes: Note[],
  divided: boolean,
): number {
  if (choices.signal.unit === "percent") return 0.01;
  if (choices.signal.unit === "fraction" || divided) return 1;
  if (signal.meaning.signalUnit === "percent") return 0.01;
  const sorted = signal.column.values.filter((value) => Number.isFinite(value)).sort();
  const high = sorted[Math.floor(0.98 * (sorted.length - 1))] ?? 0;
  // Noise and interference reach a little above one, a spectrum scaled to some point a few times one.
  const arbitrary =
    /^(a\.? ?u\.?|arb.*|w\.? ?e\.?|counts?|cts|cps|counts\/s|adu|[mun\u00b5\u03bc]?[vwa])$/i.test(
      signal.column.unit.trim(),
    );
  if (high <= (arbitrary ? NOISE_ABOVE_ONE : NOT_A_FRACTION)) return 1;
  if (arbitrary || high > NOT_PERCENT) {
    notes.push(
      assumption(
        "scale-arbitrary",
        ABOUT,
        `the transmission reaches ${short(high)}, neither fraction nor percent; it is divided by that, so that the optical depth carries an unknown constant, which the background takes up`,
        "name the reading without sample with signal.reference_column, or give a transmission",
      ),
    );
    return 1 / high;
  }
  notes.push(
    assumption(
      "percent-assumed",
      ABOUT,
      `the transmission reaches ${short(high)} and has no unit; percent is assumed`,
      "set signal.unit to percent or fraction",
    ),
  );
  return 0.01;
}

function coefficientScale(signal: Candidate, choices: ReadingChoices, notes: Note[]): number {
  const asked = choices.signal.unit;
  if (asked !== null && asked !== "percent" && asked !== "fraction") return PER_CM[asked];
  const written = signal.meaning.signalUnit;
  if (written !== null && written !== "percent" && written !== "fraction") return PER_CM[written];
  notes.push(
    assumption(
      "alpha-unit-assumed",
      ABOUT,
      `the unit of ${describeColumn(signal.column)} is ${signal.column.unit === "" ? "not written" : `"${signal.column.unit}"`}; 1/cm is assumed`,
      "set signal.unit (1/cm, 1/mm, 1/um, 1/m)",
    ),
  );
  return 1;
}

function scaleOfSigma(sigma: Candidate | null, quantity: SignalQuantity | "counts", scale: number): number {
  const unit = sigma?.meaning.signalUnit ?? null;
  if (unit === null || unit === "fraction") return scale;
  if (quantity === "transmittance" && unit === "percent") return 0.01;
  return quantity === "alpha" && unit !== "percent" ? PER_CM[unit] : scale;
}

function findReflectance(choices: ReadingChoices, notes: Note[]): number | null {
  const { surface } = choices.signal;
  if (surface.reflectance !== null) return surface.reflectance;
  if (surface.index !== null) return reflectance(surface.index, surface.surround_index);
  const { index } = choices.material;
  if (index === null) return null;
  const R = reflectance(index, surface.surround_index);
  notes.push(
    assumption(
      "reflectance-assumed",
      ABOUT,
      `the reflectance of a surface, ${short(R)}, follows from the index ${index} of the material preset`,
      "set signal.surface.reflectance or signal.surface.index",
    ),
  );
  return R;
}

/** um in one of the unit of a thickness. */
const MICROMETRES: Readonly<Record<string, number>> = {
  nm: 1e-3,
  um: 1,
  micron: 1,
  microns: 1,
  mm: 1e3,
  cm: 1e4,
  m: 1e6,
  a: 1e-4,
  angstrom: 1e-4,
};

/** A thickness without an error is exact as far as the areas go: half of its last digit is the least it may be off. */
function exactThickness(thickness_um: number, written: string, inMicrometres: number): Note {
  const digits = /[.,](\d+)/.exec(written)?.[1]?.length ?? 0;
  const half = Number((0.5 * 10 ** -digits * inMicrometres).toPrecision(1));
  return assumption(
    "thickness-exact",
    ABOUT,
    `the thickness ${thickness_um} µm has no stated error and is taken as exact: its error is in no area and no strength`,
    `set signal.thickness_sigma_um (half of the last digit is ${half}), which goes into the systematic part of all areas`,
  );
}

function findThickness(table: Table, choices: ReadingChoices, notes: Note[]): number | null {
  const exact = choices.signal.thickness_sigma_um === 0;
  const given = choices.signal.thickness_um;
  if (given !== null) {
    if (exact) notes.push(exactThickness(given, String(given), 1));
    return given;
  }
  const facts = table.facts.filter((fact) => fact.key === "thickness");
  for (const fact of facts) {
    const unit = (fact.unit ?? "")
      .replace(/[\u00b5\u03bc]/g, "u")
      .normalize("NFKD")
      .replace(/[\u0300-\u036f]/g, "")
      .toLowerCase();
    const factor = MICROMETRES[unit];
    if (fact.value === null || !(fact.value > 0) || factor === undefined) continue;
    const thickness = Number((fact.value * factor).toPrecision(12));
    notes.push(
      assumption(
        "thickness-from-header",
        ABOUT,
        `the thickness ${thickness} µm is read from line ${fact.line} ("${fact.label}: ${fact.text}")`,
        "set signal.thickness_um where the header is wrong",
      ),
    );
    if (exact) notes.push(exactThickness(thickness, /^[\d.,]+/.exec(fact.text)?.[0] ?? "", factor));
    return thickness;
  }
  const unread = facts[0];
  notes.push(
    assumption(
      "thickness-unknown",
      ABOUT,
      unread === undefined
        ? "the thickness is not known: the signal is the natural optical depth alpha d, not alpha"
        : `the thickness on line ${unread.line} ("${unread.label}: ${unread.text}") has no unit of length that is known: the signal is the natural optical depth alpha d, not alpha`,
      "set signal.thickness_um",
    ),
  );
  return null;
}

function short(value: number): string {
  return String(Number(value.toPrecision(4)));
}
