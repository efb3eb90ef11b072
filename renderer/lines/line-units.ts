import type { RunglineResult } from "../../app/protocol/index.ts";
import type { LineParameter } from "./line-rules.ts";

/** How a parameter of a line is printed and typed: `scale` takes the protocol's unit to the printed one. */
export interface PrintedUnit {
  readonly unit: string;
  readonly scale: number;
}

export type LineUnits = Readonly<Record<LineParameter, PrintedUnit>>;

/** eV, or eV/cm: above it areas are printed in milli-units. */
const LARGE_AREA = 0.02;

/** One unit for all areas of a result, so that they can be compared at a glance. */
export function lineUnits(result: RunglineResult): LineUnits {
  const large = result.lines.some((line) => (line.area.value ?? 0) > LARGE_AREA);
  const per = result.reading.signal_unit === "1/cm" ? "/cm" : "";
  return {
    energy: { unit: "eV", scale: 1 },
    width: { unit: "µeV", scale: 1e6 },
    area: { unit: `${large ? "meV" : "µeV"}${per}`, scale: large ? 1e3 : 1e6 },
    asymmetry: { unit: "", scale: 1 },
  };
}

/** Digits that a decimal number keeps through a change of unit. */
const KEPT_DIGITS = 14;

/** A value of the protocol in its printed unit, without the dust of the multiplication. */
export function printed(value: number, { scale }: PrintedUnit): string {
  return String(Number((value * scale).toPrecision(KEPT_DIGITS)));
}

/** What was typed in the printed unit as a value of the protocol: 172.8 µeV gives 0.0001728 and not a neighbour. */
export function fromPrinted(typed: number, { scale }: PrintedUnit): number {
  return Number((typed / scale).toPrecision(KEPT_DIGITS));
}
