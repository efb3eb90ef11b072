import { NOT_DETERMINED, symmetric, type Quantity } from "../base/index.ts";
import type { Flow } from "./flow.ts";
import type { Saturation } from "./saturation.ts";

export function isPumped(flow: Flow, i: number): boolean {
  return flow.pump !== null && flow.pump !== "off" && flow.pump.line === i;
}

/** Density per uW by the formula, without spread; of the pumped line where a fixed pump makes the excitons. */
export function nominalDensity(flow: Flow, i: number): number | null {
  return finite(1 / flow.volumes[i]!.perSaturation);
}

export function finite(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}

export function spreadOf(gradient: Float64Array, covariance: Float64Array): number {
  const size = gradient.length;
  let sum = 0;
  for (let i = 0; i < size; i++) {
    if (gradient[i] === 0) continue;
    for (let j = 0; j < size; j++) sum += gradient[i]! * covariance[i * size + j]! * gradient[j]!;
  }
  return Math.sqrt(Math.max(0, sum));
}

export function fromAlone(area: Saturation | null, part: 0 | 1, factor: number): Quantity {
  if (area === null) return NOT_DETERMINED;
  return symmetric(area.fit.values[part]!, Math.sqrt(area.fit.covariance[part * 3]!), factor);
}
