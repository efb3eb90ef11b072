import { makeFact, type DecimalMark } from "../table/index.ts";

export interface FactValue {
  readonly value: number;
  readonly unit: string;
}

const DAY_MS = 86_400_000;
const ISO_DATE = /^(\d{4})-(\d{2})-(\d{2})/;
const EUROPEAN_DATE = /^(\d{1,2})\.(\d{1,2})\.(\d{4})/;

/** Days since 1970-01-01 of a date as headers write it without doubt: year-month-day or day.month.year. */
export function dayNumber(text: string): number | null {
  const iso = ISO_DATE.exec(text.trim());
  const european = iso === null ? EUROPEAN_DATE.exec(text.trim()) : null;
  const parts =
    iso !== null
      ? [iso[1], iso[2], iso[3]]
      : european !== null
        ? [european[3], european[2], european[1]]
        : null;
  if (parts === null) return null;
  const [year, month, day] = parts.map(Number) as [number, number, number];
  const at = Date.UTC(year, month - 1, day);
  const read = new Date(at);
  // 30 February is no date.
  return read.getUTCMonth() === month - 1 && read.getUTCDate() === day ? at / DAY_MS : null;
}

/** A fact as a number: a date as days, everything else by its leading number and unit. */
export function factValue(label: string, text: string, decimal: DecimalMark): FactValue | null {
  const day = dayNumber(text);
  if (day !== null) return { value: day, unit: "d" };
  const { value, unit } = makeFact(label, text, 0, decimal);
  return value === null ? null : { value, unit: unit ?? "" };
}

/** Kelvin from K, mK or degrees Celsius; without a unit kelvin is meant. */
export function temperatureIn({ value, unit }: FactValue): number | null {
  const plain = unit.replace(/\s/g, "");
  const kelvin =
    plain === "" || plain === "K"
      ? value
      : plain === "mK"
        ? value / 1000
        : /^°?C$/.test(plain)
          ? value + 273.15
          : NaN;
  return kelvin >= 0 ? kelvin : null;
}
