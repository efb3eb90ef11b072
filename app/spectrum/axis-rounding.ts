import { energyFromReading } from "../units/index.ts";
import type { AxisReading } from "./read-axis.ts";

/** The last digit of the light axis, where it may matter. */
export interface AxisRounding {
  /** As the file writes it, in its own unit. */
  readonly digit: number;
  /** The same in the middle of the axis, eV. */
  readonly digit_eV: number;
}

const MOST_DIGITS = 10;
/** A last digit below this part of the step moves no point. */
const FINE = 0.02;
const WHOLE = 1e-5;

/**
 * What      The last digit to which all values of a light axis are written, where they may have been rounded to it: steps that
 *           differ by single digits, or a step no larger than the digit. An even step of several digits was set, not rounded.
 * Shapes    values (rows), in the unit of the file.
 * Domain    null where the digits are finer than a fiftieth of the step, or there are none that all values share.
 */
export function axisRounding(values: Float64Array, axis: AxisReading): AxisRounding | null {
  const sorted = values.filter(Number.isFinite).sort();
  if (sorted.length < 3) return null;
  const digit = lastDigit(sorted);
  if (digit === null) return null;
  const steps = new Float64Array(sorted.length - 1);
  for (let i = 0; i < steps.length; i++) steps[i] = Math.round((sorted[i + 1]! - sorted[i]!) / digit);
  const real = steps.filter((one) => one > 0).sort();
  if (real.length === 0) return null;
  const usual = real[real.length >> 1]!;
  const uneven = real.length < steps.length || real.some((one) => one !== usual);
  if (FINE * usual > 1 || (!uneven && usual > 1)) return null;
  const middle = sorted[sorted.length >> 1]!;
  const at = (value: number): number => energyFromReading(value * axis.factor, axis.scale);
  return { digit, digit_eV: Math.abs(at(middle + digit) - at(middle)) };
}

function lastDigit(values: Float64Array): number | null {
  let power = 0;
  for (const value of values) {
    // Digits found so far hold for most values: this loop rarely goes round.
    while (!isWhole(value * 10 ** power)) {
      power++;
      if (power > MOST_DIGITS) return null;
    }
  }
  return 10 ** -power;
}

function isWhole(value: number): boolean {
  return Math.abs(value - Math.round(value)) < WHOLE;
}
