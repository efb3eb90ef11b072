import type { Quantity } from "../base/index.ts";
import type { PowerLineResult, PowerResult } from "../protocol/index.ts";
import type { Beam } from "./beam.ts";
import type { GivenInputs } from "./inputs.ts";
import type { JointSaturation, LineTests, Saturation } from "./saturation.ts";
import type { Scaling } from "./scaling.ts";
import type { PowerInput } from "./types.ts";
import type { LineAtZero, LineVolume } from "./volumes.ts";
import type { Broadening, WidthsAtZero } from "./widths.ts";

/** What was found of one line, before it is put into the shape of a result. */
export interface LineFinding {
  readonly n: number;
  readonly area: Saturation | null;
  readonly peak: Saturation | null;
  readonly tests: LineTests | null;
  /** Of the area, from all lines together. */
  readonly zero: Quantity;
  readonly saturation: Quantity;
  readonly reading: PowerLineResult["reading"];
  readonly difference: number | null;
  readonly broadening: Broadening | null;
}

/** Everything that notes are written from. */
export interface Findings {
  readonly input: PowerInput;
  readonly beam: Beam;
  readonly inputs: GivenInputs;
  readonly lines: readonly LineFinding[];
  readonly scaling: Scaling | null;
  readonly widths: WidthsAtZero;
  readonly power: PowerResult;
}

/** All that was found, before it is put into the shape of a result. */
export interface Flow {
  readonly input: PowerInput;
  readonly beam: Beam;
  readonly inputs: GivenInputs;
  readonly lines: readonly LineFinding[];
  /** Lines of the joint saturation fit, by their place in the table. */
  readonly fitted: readonly number[];
  readonly joint: JointSaturation | null;
  readonly widths: WidthsAtZero;
  readonly atZero: readonly LineAtZero[];
  readonly volumes: readonly LineVolume[];
  readonly covariance: Float64Array;
  readonly pump: Pump;
  readonly scaling: Scaling | null;
  readonly factor: number;
  readonly repeatFactor: number;
}

/** The pumped line, null without a fixed pump, `off` where the pump meets no line. */
export type Pump = { readonly line: number; readonly part: number } | "off" | null;
