import { NOT_DETERMINED, symmetric } from "../base/index.ts";
import { HBAR } from "../laws/index.ts";
import type { PowerLineResult, PowerResult } from "../protocol/index.ts";
import { INTERACTIONS, type Interaction } from "./blockade.ts";
import { fitCurve } from "./fit-curve.ts";
import type { Flow } from "./flow.ts";
import { spreadOf } from "./nominal.ts";
import { weightedSlope } from "./scaling.ts";
import { FIT_PARTS } from "./volumes.ts";

/** Logarithm of what the sample's widths and areas predict for S_n up to a constant, and its gradient. */
function predictedLogs(
  flow: Flow,
  i: number,
  interaction: Interaction,
): {
  saturation: number;
  volume: number;
  byArea: number;
  byWidth: number;
  byLaw: number;
  volumeByLaw: number;
} {
  const { power, growth } = INTERACTIONS[interaction];
  const zero = flow.atZero[i]!;
  const volumeByLaw = -3 / power;
  const volume = ((3 * growth) / power) * Math.log(zero.n) + volumeByLaw * Math.log(zero.lawWidth);
  const given = flow.inputs.lifetime?.(zero.n) ?? null;
  const lifetime = given !== null ? Math.log(given) : Math.log(HBAR / zero.lawWidth);
  return {
    volume,
    saturation: volume + lifetime + Math.log(zero.area) - Math.log(zero.width),
    byArea: 1,
    byWidth: -1,
    byLaw: volumeByLaw - (given === null ? 1 : 0),
    volumeByLaw,
  };
}

export function describeExponent(flow: Flow): PowerResult["exponent"] {
  const { scaling, lines, joint, fitted, input, factor } = flow;
  if (scaling === null || joint === null) return null;
  const interaction = input.protocol.power.interaction;
  const k = lines.length;
  const inRange = lines
    .map((line, i) => ({ line, i }))
    .filter(
      ({ line, i }) =>
        line.n >= scaling.fit_n[0] &&
        line.n <= scaling.fit_n[1] &&
        (line.reading === "bleaches" || line.reading === "not-seen") &&
        Number.isFinite(predictedLogs(flow, i, interaction).saturation),
    );
  const ideal = flow.pump === null ? 10 : null;
  const base = {
    exponent: symmetric(scaling.exponent, scaling.sigma, factor),
    ideal,
    fit_n: [scaling.fit_n[0], scaling.fit_n[1]] as [number, number],
    chi2: scaling.chi2,
    dof: scaling.degreesOfFreedom,
    p: scaling.p,
  };
  if (inRange.length < 2 || flow.pump !== null) return { ...base, predicted: NOT_DETERMINED };
  // The same weights as the measured slope has: each line by S over its error.
  const reference = inRange[inRange.length - 1]!;
  const anchor = Math.abs(reference.line.saturation.value ?? 1);
  const weights = inRange.map(({ line, i }) => {
    const at = fitted.indexOf(i);
    const sigma = Math.sqrt(joint.covariance[(fitted.length + at) * 2 * fitted.length + fitted.length + at]!);
    const s = anchor * Math.pow(line.n / reference.line.n, scaling.exponent);
    return (s / sigma) ** 2;
  });
  const logs = inRange.map(({ i }) => predictedLogs(flow, i, interaction));
  const slope = weightedSlope(
    inRange.map(({ line }) => Math.log(line.n)),
    logs.map((one) => one.saturation),
    weights,
  );
  const gradient = new Float64Array(4 * k);
  inRange.forEach(({ i }, at) => {
    gradient[FIT_PARTS.area * k + i] = slope.gain[at]! * logs[at]!.byArea;
    gradient[FIT_PARTS.width * k + i] = slope.gain[at]! * logs[at]!.byWidth;
    gradient[FIT_PARTS.lawWidth * k + i] = slope.gain[at]! * logs[at]!.byLaw;
  });
  return { ...base, predicted: symmetric(slope.slope, spreadOf(gradient, flow.covariance), factor) };
}

/** ln V against ln n by generalised least squares; common inputs shift all lines alike and drop out. */
export function describeVolumeExponent(
  flow: Flow,
  results: readonly PowerLineResult[],
): PowerResult["volume_exponent"] {
  const { lines, volumes, beam, pump, covariance, factor } = flow;
  if (beam.excitation === "broadband" || pump === "off") return null;
  const k = lines.length;
  const used = results.flatMap((line, i) => {
    const v = flow.atZero[i]!.saturation * volumes[i]!.perSaturation;
    const range = flow.scaling?.fit_n;
    const inside = range === undefined || (line.n >= range[0] && line.n <= range[1]);
    return line.reading === "bleaches" && v > 0 && inside ? [{ i, n: line.n, log: Math.log(v) }] : [];
  });
  if (used.length < 3) return null;
  const r = used.length;
  const gradients = used.map(({ i }) => {
    const gradient = new Float64Array(4 * k);
    for (let part = 0; part < 4; part++) {
      const own = part === FIT_PARTS.saturation || pump === null;
      const given = part === FIT_PARTS.lawWidth && (flow.inputs.lifetime?.(lines[i]!.n) ?? null) !== null;
      if (own && !given) gradient[part * k + i] = volumes[i]!.response[part]!;
    }
    return gradient;
  });
  const matrix = new Float64Array(r * r);
  const size = 4 * k;
  for (let a = 0; a < r; a++) {
    for (let b = 0; b < r; b++) {
      let sum = 0;
      for (let x = 0; x < size; x++) {
        const g = gradients[a]![x]!;
        if (g === 0) continue;
        for (let y = 0; y < size; y++) sum += g * covariance[x * size + y]! * gradients[b]![y]!;
      }
      matrix[a * r + b] = sum;
    }
  }
  const fit = fitCurve({
    data: Float64Array.from(used, ({ log }) => log),
    covariance: matrix,
    parameters: 2,
    at: (theta, at, out) => {
      out[0] = 1;
      out[1] = Math.log(used[at]!.n);
      return theta[0]! + theta[1]! * out[1]!;
    },
    start: Float64Array.of(used[0]!.log - 7 * Math.log(used[0]!.n), 7),
  });
  if (fit === null) return null;
  const interaction = flow.input.protocol.power.interaction;
  const logs = used.map(({ i }) => predictedLogs(flow, i, interaction));
  const slope = weightedSlope(
    used.map(({ n }) => Math.log(n)),
    logs.map((one) => one.volume),
    used.map((_, a) => 1 / matrix[a * r + a]!),
  );
  const gradient = new Float64Array(4 * k);
  used.forEach(({ i }, at) => {
    gradient[FIT_PARTS.lawWidth * k + i] = slope.gain[at]! * logs[at]!.volumeByLaw;
  });
  return {
    exponent: symmetric(fit.values[1]!, Math.sqrt(fit.covariance[3]!), factor),
    predicted:
      pump === null ? symmetric(slope.slope, spreadOf(gradient, covariance), factor) : NOT_DETERMINED,
    ideal: pump === null ? 7 : null,
    fit_n: [used[0]!.n, used[r - 1]!.n],
    chi2: fit.chi2,
    dof: fit.degreesOfFreedom,
    p: fit.p,
  };
}
