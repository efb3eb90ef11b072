import { doubt, type Note } from "../base/index.ts";
import { faultyPoints } from "./faulty-points.ts";
import { count, lines, type Points } from "./gather-points.ts";
import type { PointNoise } from "./point-noise.ts";
import { smoothCurve } from "./smooth-curve.ts";
import { noiseContrasts, robustScale } from "./white-noise.ts";

export interface JudgedPoints {
  /** 1 where a point is left out. */
  readonly leftOut: Uint8Array;
  /** The value without its noise and without what is left out, for weights. */
  readonly smooth: Float64Array;
  readonly notes: readonly Note[];
}

/** Below this part of the range there is no noise, and nothing to judge a reading by. */
const NOISELESS = 1e-7;
const SHOWN = 6;
const ABOUT = "fit";

/** `scale`: what readings of the file were multiplied with. Readings that no light made, named with their lines of the file, and left out unless the protocol keeps them. */
export function judgePoints(
  points: Points,
  noise: PointNoise,
  ratio: boolean,
  scale: number,
  keep: boolean,
): JudgedPoints {
  const { energy_eV, value, line } = points;
  const m = value.length;
  const leftOut = new Uint8Array(m);
  const nothing = { leftOut, smooth: noise.smooth, notes: [] };
  let range = 0;
  for (const one of noise.smooth) range = Math.max(range, Math.abs(one - noise.smooth[0]!));
  // A sigma that is given may be too small: then every reading would be far off.
  const real = Math.max(1, robustScale(noiseContrasts(energy_eV, value, noise.sigma).z));
  if (!(real * noise.sigma[m >> 1]! > NOISELESS * range)) return nothing;
  const sigma = noise.sigma.map((one) => real * one);
  const { spikes, dead, clipped } = faultyPoints(energy_eV, value, sigma, noise.smooth, ratio ? -1 : 1);
  const notes: Note[] = [];
  const name = ratio ? "T = " : "reading ";
  const read = (i: number): string => short(value[i]! / scale);
  const what = keep
    ? "They stay in the fit, as noise.faulty_points=keep asks"
    : "They are left out of the fit";
  const masks = (places: readonly (readonly [number, number])[]): string =>
    `mask_eV=${JSON.stringify(places.slice(0, SHOWN).map(([a, b]) => [edge(a, -1), edge(b, 1)]))}`;
  const remedy = (places: readonly (readonly [number, number])[]): string =>
    keep
      ? `leave them out: ${masks(places)}, or noise.faulty_points=leave-out`
      : "look at these lines of the file; noise.faulty_points=keep fits them like any other";
  if (spikes.length > 0) {
    const told = spikes
      .slice(0, SHOWN)
      .map((i) => `line ${line[i]!} (${energy_eV[i]!.toFixed(6)} eV, ${name}${read(i)})`);
    notes.push(
      doubt(
        "isolated-readings",
        ABOUT,
        `${count(spikes.length, "reading")} stand${spikes.length === 1 ? "s" : ""} far off while the neighbours on both sides keep to the curve, narrower than any line (a cosmic ray, a dead pixel): ${told.join(", ")}${more(spikes.length)}. ${what}.`,
        remedy(spikes.map((i) => [i, i])),
      ),
    );
  }
  if (dead.length > 0) {
    const told = dead
      .slice(0, SHOWN)
      .map(
        ([a, b]) =>
          `lines ${Math.min(line[a]!, line[b]!)} to ${Math.max(line[a]!, line[b]!)} (${energy_eV[a]!.toFixed(6)} to ${energy_eV[b]!.toFixed(6)} eV, ${name}${read(a)})`,
      );
    notes.push(
      doubt(
        "dead-readings",
        ABOUT,
        `The same value repeats without noise: ${told.join(", ")}${more(dead.length)}. ${what}.`,
        remedy(dead),
      ),
    );
  }
  if (clipped !== null) {
    const { places } = clipped;
    const upper = clipped.value > (noise.smooth[0] ?? 0);
    notes.push(
      doubt(
        "clipped-readings",
        "lines",
        `The readings stop at ${name}${short(clipped.value / scale)}, the ${upper ? "highest" : "lowest"} value of the file, and repeat it: the instrument's limit, not the sample's. ${count(places.length, "point")} at the limit or within ${MARGIN_WORDS} of it by the smoothed curve, from ${lines([line[places[0]!]!])} on: ${what.replace("They stay", "they stay").replace("They are", "they are")}.`,
        keep
          ? "noise.faulty_points=leave-out masks them; measure a thinner crystal or with more light"
          : "measure a thinner crystal, or with more light, where the line is cut; noise.faulty_points=keep fits them like any other",
      ),
    );
  }
  if (notes.length === 0) return nothing;
  const places = [
    ...spikes,
    ...dead.flatMap(([a, b]) => Array.from({ length: b - a + 1 }, (_, k) => a + k)),
    ...(clipped?.places ?? []),
  ];
  if (keep) return { ...nothing, notes };
  for (const i of places) leftOut[i] = 1;
  const root = Math.sqrt(noise.pointsAsOne);
  const patched = bridged(value, leftOut);
  return {
    leftOut,
    smooth: smoothCurve(
      patched,
      noise.sigma.map((one) => root * one),
    ),
    notes,
  };

  /** Half way to the next point. */
  function edge(i: number, side: 1 | -1): number {
    const next = energy_eV[i + side];
    const step = next === undefined ? energy_eV[i - side]! - energy_eV[i]! : next - energy_eV[i]!;
    return Number((energy_eV[i]! + (next === undefined ? -step / 2 : step / 2)).toFixed(8));
  }
}

const MARGIN_WORDS = "three standard deviations";

function more(length: number): string {
  return length > SHOWN ? ` and ${length - SHOWN} more` : "";
}

function short(value: number): string {
  return String(Number(value.toPrecision(4)));
}

/** Straight lines over what is left out. */
function bridged(value: Float64Array, leftOut: Uint8Array): Float64Array {
  const out = value.slice();
  const m = value.length;
  for (let i = 0; i < m; i++) {
    if (leftOut[i] === 0) continue;
    let end = i;
    while (end < m && leftOut[end] === 1) end++;
    const before = i > 0 ? out[i - 1]! : out[end]!;
    const after = end < m ? value[end]! : before;
    if (before === undefined || after === undefined) return value.slice();
    for (let k = i; k < end; k++) out[k] = before + ((after - before) * (k - i + 1)) / (end - i + 1);
    i = end;
  }
  return out;
}
