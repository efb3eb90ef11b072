export interface Tick {
  readonly at: number;
  /** "" for a tick without a number. */
  readonly label: string;
}

export interface AxisDescription {
  /** Quantity / unit, in the marks of rich-text.ts. */
  readonly title: string;
  readonly scale: "linear" | "logarithmic";
  readonly low: number;
  readonly high: number;
  readonly ticks: readonly Tick[];
}

/** Room beyond the outermost values, as a share of the range. */
const PAD = 0.06;

interface AxisChoices {
  readonly pad?: number;
  /** The axis reaches down to zero. */
  readonly fromZero?: boolean;
  readonly count?: number;
}

export function linearAxis(
  title: string,
  values: readonly (number | null)[],
  { pad = PAD, fromZero = false, count = 5 }: AxisChoices = {},
): AxisDescription {
  const known = values.filter((value): value is number => value !== null && Number.isFinite(value));
  let low = known.reduce((a, b) => Math.min(a, b), fromZero ? 0 : Infinity);
  let high = known.reduce((a, b) => Math.max(a, b), -Infinity);
  if (!Number.isFinite(low) || !Number.isFinite(high)) [low, high] = [0, 1];
  if (low === high) {
    const reach = low === 0 ? 1 : Math.abs(low) * 0.1;
    [low, high] = [low - reach, high + reach];
  }
  const room = pad * (high - low);
  const from = fromZero && low === 0 ? 0 : low - room;
  return {
    title,
    scale: "linear",
    low: from,
    high: high + room,
    ticks: linearTicks(from, high + room, count),
  };
}

/** Ticks at 1, 2 or 5 times a power of ten, about `count` of them. */
export function linearTicks(low: number, high: number, count = 5): Tick[] {
  const rough = (high - low) / count;
  const power = Math.floor(Math.log10(rough));
  const lead = rough / 10 ** power;
  const step = (lead < 1.5 ? 1 : lead < 3.5 ? 2 : lead < 7.5 ? 5 : 10) * 10 ** power;
  const decimals = Math.max(0, -Math.floor(Math.log10(step) + 1e-9));
  const ticks: Tick[] = [];
  for (let i = Math.ceil(low / step - 1e-9); i * step <= high + 1e-9 * step; i++)
    ticks.push({ at: i * step, label: signed((i * step).toFixed(Math.min(decimals, 12))) });
  return ticks;
}

export function logarithmicAxis(
  title: string,
  values: readonly (number | null)[],
  { pad = PAD }: AxisChoices = {},
): AxisDescription {
  const known = values.filter(
    (value): value is number => value !== null && value > 0 && Number.isFinite(value),
  );
  let low = known.reduce((a, b) => Math.min(a, b), Infinity);
  let high = known.reduce((a, b) => Math.max(a, b), 0);
  if (!Number.isFinite(low) || high <= 0) [low, high] = [1, 10];
  const room = (high / low) ** pad * 1.05;
  return {
    title,
    scale: "logarithmic",
    low: low / room,
    high: high * room,
    ticks: logarithmicTicks(low / room, high * room),
  };
}

/** All of 1 to 9 times powers of ten; numbered at the powers, over a short range at 2 and 5 too. */
function logarithmicTicks(low: number, high: number): Tick[] {
  const decades = Math.log10(high / low);
  const numbered = decades < 0.75 ? [1, 2, 3, 4, 5, 6, 7, 8] : decades < 2.2 ? [1, 2, 5] : [1];
  const every = Math.max(1, Math.ceil(decades / 6));
  const ticks: Tick[] = [];
  for (let power = Math.floor(Math.log10(low)); power <= Math.ceil(Math.log10(high)); power++)
    for (let lead = 1; lead < 10; lead++) {
      const at = Number(`${lead}e${power}`);
      if (at < low || at > high) continue;
      if (lead > 1 && decades > 8) continue;
      const shown = numbered.includes(lead) && power % every === 0;
      ticks.push({ at, label: shown ? numberLabel(lead, power) : "" });
    }
  return ticks;
}

function numberLabel(lead: number, power: number): string {
  if (power >= -3 && power <= 4) return String(Number(`${lead}e${power}`));
  const tens = `10^{${signed(String(power))}}`;
  return lead === 1 ? tens : `${lead}·${tens}`;
}

/** Principal quantum numbers: whole numbers, thinned where they would crowd; numbers thin out on a logarithmic axis. */
export function quantumNumberAxis(
  ns: readonly number[],
  scale: "linear" | "logarithmic",
  title = "*n*",
): AxisDescription {
  const first = Math.min(...ns, 30);
  const last = Math.max(...ns, first + 1);
  const [low, high] = scale === "linear" ? [first - 0.6, last + 0.6] : [first * 0.88, last * 1.1];
  const ticks: Tick[] = [];
  let lastLabel = -Infinity;
  const place = (n: number): number =>
    scale === "linear" ? (n - low) / (high - low) : Math.log(n / low) / Math.log(high / low);
  for (let n = first; n <= last; n++) {
    const roomy = place(n) - lastLabel >= 0.07;
    if (roomy) lastLabel = place(n);
    ticks.push({ at: n, label: roomy ? String(n) : "" });
  }
  return { title, scale, low, high, ticks };
}

/** Names instead of numbers, first name on top. */
export function namedAxis(names: readonly string[]): AxisDescription {
  return {
    title: "",
    scale: "linear",
    low: -names.length + 0.4,
    high: 0.6,
    ticks: names.map((label, i) => ({ at: -i, label: label.replace(/[*_^]/g, " ") })),
  };
}

function signed(text: string): string {
  return text.startsWith("-") ? (Number(text) === 0 ? text.slice(1) : `−${text.slice(1)}`) : text;
}
