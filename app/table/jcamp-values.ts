/** One token of a line of ordinates, as the standard's forms write it. */
type Token =
  | { readonly kind: "value"; readonly value: number }
  | { readonly kind: "difference"; readonly value: number }
  | { readonly kind: "repeat"; readonly count: number };

/** First digit of a number with delimiter and sign in one character: 0 to 9, then -1 to -9. */
const SQUEEZED = "@ABCDEFGHIabcdefghi";
const DIFFERENCE = "%JKLMNOPQRjklmnopqr";
/** How often the ordinate before stands, itself counted: 1 to 9. */
const REPEAT = "STUVWXYZs";

const NUMBER = /[+-]?(?:\d+\.?\d*|\.\d+)(?:[Ee][+-]\d{1,3})?/y;
const REST = /\d*(?:\.\d*)?/y;
const BETWEEN = /[\s,;]+/y;

export interface DecodedLine {
  /** The abscissa at the head of the line, and its text. */
  readonly x: number;
  readonly xText: string;
  /** NaN for `?`. */
  readonly ordinates: readonly number[];
  /** Whether the last ordinate came from a difference: the next line then begins with its value once more. */
  readonly endsWithDifference: boolean;
}

/** What stands in the way of decoding, and where in the line (1-based). */
export interface LineFault {
  readonly fault: string;
  readonly at: number;
}

/**
 * What      One line of `(X++(Y..Y))`: an abscissa in AFFN, then ordinates in any mixture of AFFN, PAC, SQZ, DIF, DUP.
 * Domain    A line without comments that holds at most `most` ordinates: a damaged repetition may ask for any number.
 *           `E` followed by a sign and digits is an exponent, any other `E` the digit 5.
 * Source    R. S. McDonald and P. A. Wilks, "JCAMP-DX: A Standard Form for Exchange of Infrared Spectra in Computer
 *           Readable Form", Appl. Spectrosc. 42, 151 (1988), sections 5.2 to 5.9 and table VII.
 */
export function decodeLine(text: string, most = 1_000_000): DecodedLine | LineFault {
  const start = skip(text, 0);
  const first = match(NUMBER, text, start);
  if (first === null) return { fault: "the line does not begin with a number", at: start + 1 };
  const ordinates: number[] = [];
  let last: Token | null = null;
  let at = skip(text, start + first.length);
  while (at < text.length) {
    const read = readToken(text, at);
    if (read === null) return { fault: `${JSON.stringify(text[at]!)} is no ordinate`, at: at + 1 };
    const { token, end } = read;
    if (token.kind === "repeat") {
      if (last === null || token.count < 1) return { fault: "a repetition of nothing", at: at + 1 };
      if (ordinates.length + token.count - 1 > most)
        return { fault: `a repetition of ${token.count}, more than the points of the file`, at: at + 1 };
      for (let i = 1; i < token.count; i++) append(ordinates, last);
    } else {
      if (token.kind === "difference" && ordinates.length === 0)
        return { fault: "a difference without an ordinate before it", at: at + 1 };
      append(ordinates, token);
      last = token;
    }
    at = skip(text, end);
  }
  return {
    x: Number(first),
    xText: first,
    ordinates,
    endsWithDifference: last?.kind === "difference",
  };
}

function append(ordinates: number[], token: Exclude<Token, { kind: "repeat" }>): void {
  ordinates.push(token.kind === "value" ? token.value : ordinates[ordinates.length - 1]! + token.value);
}

function readToken(text: string, at: number): { token: Token; end: number } | null {
  const character = text[at]!;
  if (character === "?") return { token: { kind: "value", value: NaN }, end: at + 1 };
  const squeezed = SQUEEZED.indexOf(character);
  const difference = DIFFERENCE.indexOf(character);
  if (squeezed >= 0 || difference >= 0) {
    const place = Math.max(squeezed, difference);
    const rest = match(REST, text, at + 1) ?? "";
    const size = Number(`${place > 9 ? place - 9 : place}${rest}`);
    const kind = squeezed >= 0 ? "value" : "difference";
    return { token: { kind, value: place > 9 ? -size : size }, end: at + 1 + rest.length };
  }
  const repeat = REPEAT.indexOf(character);
  if (repeat >= 0) {
    const rest = /^\d*/.exec(text.slice(at + 1, at + 12))![0];
    return { token: { kind: "repeat", count: Number(`${repeat + 1}${rest}`) }, end: at + 1 + rest.length };
  }
  const number = match(NUMBER, text, at);
  return number === null
    ? null
    : { token: { kind: "value", value: Number(number) }, end: at + number.length };
}

/** The text from `at` on that fits, or null. */
function match(pattern: RegExp, text: string, at: number): string | null {
  pattern.lastIndex = at;
  return pattern.exec(text)?.[0] ?? null;
}

function skip(text: string, at: number): number {
  return at + (match(BETWEEN, text, at)?.length ?? 0);
}
