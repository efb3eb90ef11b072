/** Powers in one microwatt, by unit in small letters with a plain u. */
const UNITS: Readonly<Record<string, number>> = {
  pw: 1e-6,
  nw: 1e-3,
  uw: 1,
  mw: 1e3,
  w: 1e6,
  kw: 1e9,
  microwatt: 1,
  microwatts: 1,
  milliwatt: 1e3,
  milliwatts: 1e3,
  nanowatt: 1e-3,
  nanowatts: 1e-3,
  watt: 1e6,
  watts: 1e6,
};

/** Factor from a unit as written to uW; null where it is no unit of power. `MW` is refused: nobody means it. */
export function microwattsPer(unit: string): number | null {
  const written = unit.trim().replace(/[\u00b5\u03bc]/g, "u");
  if (/^MW$/.test(written)) return null;
  return UNITS[written.toLowerCase()] ?? null;
}

/** A power as a text gives it. */
export interface PowerFound {
  readonly power_uW: number;
  /** The characters that say so. */
  readonly text: string;
  /** Null where the number stands without one and `bareUnit` was taken. */
  readonly unit: string | null;
}

const NUMBER = String.raw`\d+(?:[.,]\d+)?(?:[eE][+-]?\d+)?`;
const UNIT = String.raw`(?:[pnumkµμ]?W|[nu]w|mw|(?:micro|milli|nano)?[wW]atts?)`;
const WITH_UNIT = new RegExp(
  String.raw`(?<![\p{L}\d.,])([-\u2212]?)\s*(${NUMBER})[\s_]*[([]?\s*(${UNIT})(?![\p{L}\d/])`,
  "u",
);
/** `P = 20`, `power: 20`, `pump 20`. */
const NAMED = new RegExp(
  String.raw`(?<!\p{L})(?:P|[pP]ower|[pP]ump(?: power)?|Leistung|puissance|potencia)\s*[=:]\s*([-\u2212]?)(${NUMBER})\s*$`,
  "u",
);
/** Words for a spectrum without any exciting light. */
const OFF =
  /\b(pump|laser|light|excitation)[\s_-]*(off|blocked|closed)\b|\b(no|without)[\s_-]*(pump|laser|excitation)\b|\bunpumped\b|\bohne[\s_-]*(pumpe|laser|anregung)\b/i;
const DARK = /^\s*(dark|dunkel)\s*(spectrum|reference|trace)?\s*$/i;

/**
 * The power that a column header or a header fact states: `5 uW`, `0.1 mW`, `P = 20 µW`, `20µW`, `T (0,5 µW)`; a word
 * such as `pump off` is zero. A minus is kept: what a negative power means is for others to say. Null: none.
 */
export function powerInText(text: string, bareUnit: string | null): PowerFound | null {
  const match = WITH_UNIT.exec(text);
  if (match !== null) return found(match[1]!, match[2]!, match[3]!, match[0], false);
  const named = NAMED.exec(text);
  if (named !== null) return found(named[1]!, named[2]!, null, named[0], false, bareUnit);
  if (OFF.test(text)) return { power_uW: 0, text: text.trim(), unit: "uW" };
  return null;
}

/** Whether a column header is no more than the word for a spectrum in the dark. */
export function saysDark(text: string): boolean {
  return DARK.test(text);
}

/**
 * The power in a file name, ending and all: a hyphen or underscore before the number parts words and is no sign, and
 * `p` may stand for the decimal mark (`run_0p5mW.csv`).
 */
export function powerInFileName(file: string): PowerFound | null {
  const name = file.replace(/\.[^.]*$/, "");
  const match = new RegExp(
    String.raw`(?:^|[^\p{L}\d.,]|(?<=\p{L})(?<!\d\p{L}))(\d+(?:[.,p]\d+)?)[\s_-]*(${UNIT})(?![\p{L}\d])`,
    "u",
  ).exec(name);
  if (match !== null) return found("", match[1]!, match[2]!, match[0].replace(/^[^\d]/, ""), true);
  return OFF.test(name.replace(/[_-]/g, " ")) ? { power_uW: 0, text: name, unit: "uW" } : null;
}

/**
 * The power by a pattern of the user's: `{power}` stands for a number with or without unit, `*` for anything, the rest for
 * itself; the whole name without its ending has to fit. Null: it does not.
 */
export function powerByPattern(file: string, pattern: string, bareUnit: string | null): PowerFound | null {
  const name = file.replace(/\.[^.]*$/, "");
  const plain = pattern.replace(/\.[^.{}*]*$/, "");
  const parts = plain.split("{power}").map((part) =>
    part
      .split("*")
      .map((piece) => piece.replace(/[.*+?^${}()|[\]\\]/g, "\\$&"))
      .join(".*?"),
  );
  if (parts.length < 2) return null;
  const power = String.raw`(?<number>\d+(?:[.,p]\d+)?(?:[eE][+-]?\d+)?)[\s_-]*(?<unit>${UNIT})?`;
  const rest = parts.slice(1).join(String.raw`\S+?`);
  const match = new RegExp(`^${parts[0]!}${power}${rest}$`, "u").exec(name);
  const groups = match?.groups;
  if (groups?.["number"] === undefined) return null;
  return found("", groups["number"], groups["unit"] ?? null, name, true, bareUnit);
}

function found(
  sign: string,
  digits: string,
  unit: string | null,
  text: string,
  inName: boolean,
  bareUnit: string | null = null,
): PowerFound | null {
  const perUnit = microwattsPer(unit ?? bareUnit ?? "uW");
  const value = Number((inName ? digits.replace("p", ".") : digits).replace(",", "."));
  if (perUnit === null || !Number.isFinite(value)) return null;
  // Twelve digits: 0.1 mW is 100 uW and not 100.00000000000001.
  const power = Number((value * perUnit).toPrecision(12));
  return { power_uW: sign === "" ? power : -power, text: text.trim(), unit };
}
