/**
 * What      A number and its standard error as a paper prints them: `2.172 083(12) eV`.
 *           Sigma is rounded by one rule: where its three leading digits lie in 100..354 it keeps two digits, in
 *           355..949 one, in 950..999 it is rounded up to 1000 and keeps two. The value is rounded to the same place.
 * Units     as given; the unit is always printed ("" for a pure number).
 * Domain    any finite value; null or not finite prints as "not determined"; sigma 0 as exact, null as unknown.
 * Source    Rounding: Particle Data Group, Review of Particle Physics, Introduction, section "Rounding".
 *           Parentheses: JCGM 100:2008 (GUM), 7.2.2. Groups of three digits: ISO 80000-1:2022, 7.3.1.
 *           Departure: a sigma that reaches across the decimal point is printed with the point, 98.7(1.2), since
 *           98.7(12) is read in two ways.
 */
export interface FormatOptions {
  /** Ends of the interval; printed as (+up/-down) where the two sides differ by more than a tenth. */
  readonly low?: number | null;
  readonly high?: number | null;
  /** What stands between groups of three digits. Default: a plain space. */
  readonly groupSpace?: string;
  /** What a sigma of zero is called. Default: "exact". */
  readonly exactWord?: string;
}

export const NOT_DETERMINED_WORDS = "not determined";

/** Below this share of their mean, the two sides of an interval count as equal. */
const ASYMMETRY_SHOWN = 0.1;
/** No more than a reader could believe of a number whose error nobody knows. */
const DIGITS_WITHOUT_SIGMA = 4;
const DIGITS_IF_EXACT = 10;

export function formatQuantity(
  value: number | null,
  sigma: number | null,
  unit: string,
  options: FormatOptions = {},
): string {
  if (value === null || !Number.isFinite(value)) return NOT_DETERMINED_WORDS;
  const space = options.groupSpace ?? " ";
  const after = unit === "" ? "" : ` ${unit}`;
  if (sigma === null || !Number.isFinite(sigma)) {
    return `${withoutError(value, space)}${after} (uncertainty unknown)`;
  }
  if (sigma <= 0) {
    return `${plain(value, DIGITS_IF_EXACT, space)}${after} (${options.exactWord ?? "exact"})`;
  }
  const sides = unequalSides(value, options.low, options.high);
  const leading = sides === null ? sigma : Math.min(sides.up, sides.down);
  const power = scientificPower(value, sides === null ? sigma : Math.max(sides.up, sides.down));
  const scaled = (x: number): number => shift(x, -power);
  const { place } = roundSigma(scaled(leading));
  const bracket =
    sides === null
      ? inLastPlace([scaled(sigma)], place, space)[0]!
      : inLastPlace([scaled(sides.up), scaled(sides.down)], place, space)
          .map((side, i) => (i === 0 ? `+${side}` : `-${side}`))
          .join("/");
  const tens = power === 0 ? "" : ` × 10${superscript(power)}`;
  return `${fixed(scaled(value), place, space)}(${bracket})${tens}${after}`;
}

/** A number whose error is not known. */
export function withoutError(value: number, space = ""): string {
  return plain(value, DIGITS_WITHOUT_SIGMA, space);
}

/**
 * Sigma to one or two digits by the rule of the Particle Data Group; `place` is the power of ten of the last digit
 * that is kept.
 */
export function roundSigma(sigma: number): { readonly rounded: number; readonly place: number } {
  // The digits come from the shortest decimal form, not from a division, so that 0.355 is 355 and not 354.99...
  const [mantissa, exponentText] = sigma.toExponential().split("e") as [string, string];
  const exponent = Number(exponentText);
  const three = Math.floor(Number(`${mantissa}e2`));
  if (three >= 950) return { rounded: Number(`1e${exponent + 1}`), place: exponent };
  const place = three < 355 ? exponent - 1 : exponent;
  return { rounded: Number(`${roundHalfEven(sigma, place)}e${place}`), place };
}

/** A bare number to `digits` significant digits, without an uncertainty: for diagnostics such as chi square. */
export function formatNumber(value: number | null, digits = 4): string {
  if (value === null || !Number.isFinite(value)) return NOT_DETERMINED_WORDS;
  return plain(value, digits, "");
}

/** Below this a probability is a matter of rounding, and no one needs its power of ten. */
const LEAST_PROBABILITY = 1e-16;

/** A probability for a cell: `0.42`, `< 1e-16`. */
export function formatProbability(p: number | null, digits = 2): string {
  if (p !== null && p < LEAST_PROBABILITY) return "< 1e-16";
  return formatNumber(p, digits);
}

/** A probability in a sentence: `p = 0.42`, `p < 1e-16`, `p not determined`. */
export function probabilityInWords(p: number | null, digits = 2): string {
  if (p === null || !Number.isFinite(p)) return `p ${NOT_DETERMINED_WORDS}`;
  return p < LEAST_PROBABILITY ? "p < 1e-16" : `p = ${formatNumber(p, digits)}`;
}

/** Chi square; where nothing is left to test it is a matter of rounding, and 0. */
export function formatChiSquare(chi2: number | null, dof: number, digits = 4): string {
  return dof === 0 && chi2 !== null && chi2 < 1e-6 ? "0" : formatNumber(chi2, digits);
}

/** The prefix that prints an energy without long rows of zeros. */
export function energyUnit(magnitude_eV: number | null): EnergyUnit {
  const size = Math.abs(magnitude_eV ?? 1);
  if (size >= 0.5 || size === 0) return ELECTRONVOLT;
  return size >= 0.5e-3 ? MILLIELECTRONVOLT : MICROELECTRONVOLT;
}

export interface EnergyUnit {
  readonly name: string;
  /** Number of units in one eV. */
  readonly perElectronvolt: number;
}
export const ELECTRONVOLT: EnergyUnit = { name: "eV", perElectronvolt: 1 };
export const MILLIELECTRONVOLT: EnergyUnit = { name: "meV", perElectronvolt: 1e3 };
export const MICROELECTRONVOLT: EnergyUnit = { name: "µeV", perElectronvolt: 1e6 };

interface QuantityLike {
  readonly value: number | null;
  readonly sigma: number | null;
  readonly low: number | null;
  readonly high: number | null;
}

/** An energy in eV, printed in the unit given or in the one that its size suggests. */
export function formatEnergy(
  quantity: QuantityLike,
  unit: EnergyUnit = energyUnit(quantity.value),
  options: Omit<FormatOptions, "low" | "high"> = {},
): string {
  const scaled = scaleQuantity(quantity, unit.perElectronvolt);
  return formatQuantity(scaled.value, scaled.sigma, unit.name, { ...options, ...ends(scaled) });
}

export function scaleQuantity(quantity: QuantityLike, factor: number): QuantityLike {
  const times = (x: number | null): number | null => (x === null ? null : x * factor);
  return {
    value: times(quantity.value),
    sigma: times(quantity.sigma),
    low: times(quantity.low),
    high: times(quantity.high),
  };
}

export function ends(quantity: QuantityLike): { low: number | null; high: number | null } {
  return { low: quantity.low, high: quantity.high };
}

function unequalSides(
  value: number,
  low: number | null | undefined,
  high: number | null | undefined,
): { readonly up: number; readonly down: number } | null {
  if (typeof low !== "number" || typeof high !== "number") return null;
  const up = high - value;
  const down = value - low;
  if (!(up > 0) || !(down > 0) || !Number.isFinite(up) || !Number.isFinite(down)) return null;
  return Math.abs(up - down) > (ASYMMETRY_SHOWN * (up + down)) / 2 ? { up, down } : null;
}

/** Powers of ten are set apart for numbers that would need many zeros; 0 otherwise. */
function scientificPower(value: number, sigma: number): number {
  const size = Math.max(Math.abs(value), sigma);
  const exponent = Number(size.toExponential().split("e")[1]);
  return exponent < -3 || exponent > 5 ? exponent : 0;
}

/** In units of the value's last digit where all lie wholly behind the decimal point, else as plain numbers. */
function inLastPlace(sigmas: readonly number[], place: number, space: string): string[] {
  const units = sigmas.map((sigma) => roundHalfEven(sigma, place));
  const across = place >= 0 || units.some((one) => one >= 10 ** -place);
  return sigmas.map((sigma, i) => (across ? fixed(sigma, place, space) : String(units[i]!)));
}

/** x / 10^place to the nearest integer, ties to even (ISO 80000-1:2022, annex B, rule A), in decimal. */
function roundHalfEven(x: number, place: number): number {
  const shifted = shift(x, -place);
  const floor = Math.floor(shifted);
  const rest = shifted - floor;
  if (rest < 0.5) return floor;
  if (rest > 0.5) return floor + 1;
  return floor % 2 === 0 ? floor : floor + 1;
}

/** x times 10^power by moving the decimal point of its shortest form, which multiplies without a new error. */
function shift(x: number, power: number): number {
  const [mantissa, exponent] = x.toExponential().split("e") as [string, string];
  return Number(`${mantissa}e${Number(exponent) + power}`);
}

function fixed(x: number, place: number, space: string): string {
  const units = roundHalfEven(Math.abs(x), place);
  const sign = x < 0 && units !== 0 ? "-" : "";
  return (
    sign + group(place >= 0 ? shift(units, place).toFixed(0) : shift(units, place).toFixed(-place), space)
  );
}

function plain(x: number, digits: number, space: string): string {
  if (x === 0) return "0";
  const exponent = Number(x.toExponential(digits - 1).split("e")[1]);
  if (exponent < -4 || exponent > 6) {
    const [mantissa, power] = x.toExponential(digits - 1).split("e") as [string, string];
    return `${trimZeros(mantissa)} × 10${superscript(Number(power))}`;
  }
  return group(trimZeros(x.toPrecision(digits)), space);
}

function trimZeros(text: string): string {
  const plainText = text.includes("e") ? String(Number(text)) : text;
  return plainText.includes(".") ? plainText.replace(/\.?0+$/, "") : plainText;
}

/** Digits in groups of three to both sides of the point; four in a row stay together (ISO 80000-1:2022, 7.3.1). */
function group(text: string, space: string): string {
  const sign = text.startsWith("-") ? "-" : "";
  const [whole, fraction] = text.slice(sign.length).split(".") as [string, string | undefined];
  const left = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, space) : whole;
  if (fraction === undefined) return sign + left;
  const right = fraction.length > 4 ? fraction.replace(/(\d{3})(?=\d)/g, `$1${space}`) : fraction;
  return `${sign}${left}.${right}`;
}

function superscript(power: number): string {
  const digits = "⁰¹²³⁴⁵⁶⁷⁸⁹";
  return Array.from(String(power), (c) => (c === "-" ? "⁻" : digits[Number(c)]!)).join("");
}
