import { depthPerSignal, slitOf } from "../analysis/index.ts";
import { doubt, type Note } from "../base/index.ts";
import { slitBias } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { FittedMember, FittedSeries } from "./fit-series.ts";
import type { ReferenceResult } from "./reference-state.ts";

/** As where one spectrum is fitted: noise of the light above this part of it puts the logarithm off. */
const NOISY = 0.1;
/** A loss of area below this part is not worth a doubt. */
const LEAST_BIAS = 5e-4;
/** Where slitBias ends. */
const DEEPEST = 5;
const WIDEST_SLIT = 3;
/** Areas this many standard errors above zero are compared between the two fits of the reference. */
const STRONG = 20;
/** A line that has lost less than this says nothing about how a bias acts on S. */
const CLEARLY_BLEACHED = 1.1;

/**
 * What      All powers are fitted together on the absorption, where one spectrum on its own is fitted on the light if a slit,
 *           stray light or noise asks for it. What that does: the area that the slit hides at the lowest power (slitBias) and
 *           what its change with bleaching makes of S; the bias 0.5 (sigma_T/T)^2 of a noisy logarithm; and how far the areas
 *           of the reference, which has been fitted both ways, stand apart.
 * Units     protocol with the slit of the header; areas eV times the unit of the signal.
 * Empty     where nothing asks for the light.
 */
export function lightBias(fitted: FittedSeries, reference: ReferenceResult, protocol: Protocol): Note[] {
  const { members } = fitted;
  const parts = [
    ...slitParts(members, protocol),
    ...noiseParts(members),
    ...(protocol.signal.stray_light !== null && protocol.signal.stray_light !== 0
      ? ["stray light flattens the strongest lines and was not taken off"]
      : []),
    ...bothWays(members[0]!, reference),
  ];
  if (parts.length === 0) return [];
  return [
    doubt(
      "power-fit-on-absorption",
      "power.fit",
      `All powers are fitted together on the absorption, and not on the transmitted light: ${parts.join("; ")}. The errors do not hold that.`,
      "fit the powers one by one (rungline fit, lines.domain=transmittance) and compare the areas; a narrower slit, a thinner crystal or more light makes it small",
    ),
  ];
}

/** Part of its area that the slit adds to each line of one spectrum, by n, with the widths of the reference. */
function biases(
  { fit }: FittedMember,
  reference: FittedMember,
  depth: number,
  slitAt: (energy: number) => number,
): Map<number, number> {
  const { ns, energy, width } = reference.fit.lines;
  return new Map(
    ns.map((n, j) => {
      const area = fit.lines.area[fit.lines.ns.indexOf(n)] ?? NaN;
      const peak = (2 * area * depth) / (Math.PI * width[j]!);
      const ratio = Math.min(WIDEST_SLIT, slitAt(energy[j]!) / width[j]!);
      return [n, slitBias(Math.min(DEEPEST, peak), ratio).area];
    }),
  );
}

function slitParts(members: readonly FittedMember[], protocol: Protocol): string[] {
  const slit = slitOf(protocol);
  if (!slit.given) return [];
  const first = members[0]!;
  const last = members[members.length - 1]!;
  const depth = depthPerSignal(first.member.spectrum);
  if (depth === null)
    return [
      "the slit averages light, and without the thickness (signal.thickness_um) the area that it hides cannot be estimated",
    ];
  const before = biases(first, first, depth, slit.fwhmAt);
  const after = biases(last, first, depth, slit.fwhmAt);
  const [worst] = [...before].sort(([, a], [, b]) => Math.abs(b) - Math.abs(a));
  if (worst === undefined || !(Math.abs(worst[1]) > LEAST_BIAS)) return [];
  const [n, loss] = worst;
  const parts = [
    `the slit averages light, and the area of n = ${n} comes out about ${percent(loss)} too ${loss < 0 ? "small" : "large"} at ${first.member.power_uW} uW, taken as a line on its own`,
  ];
  let most = { n: 0, by: 0 };
  for (const [line, b] of before) {
    const kept = areaOf(last, line) / areaOf(first, line);
    const c = after.get(line);
    // A0/A as it is, from the areas as they came out; S goes as that minus 1.
    const ratio = (1 + (c ?? NaN)) / (kept * (1 + b));
    if (!(kept > 0) || !(ratio > CLEARLY_BLEACHED)) continue;
    const by = (1 / kept - 1) / (ratio - 1) - 1;
    if (Math.abs(by) > Math.abs(most.by)) most = { n: line, by };
  }
  if (Math.abs(most.by) > LEAST_BIAS)
    parts.push(
      `a line that bleaches hides less, which puts S off by at most about ${percent(most.by)} (n = ${most.n}, too ${most.by < 0 ? "small" : "large"})`,
    );
  return parts;
}

function areaOf({ fit }: FittedMember, n: number): number {
  return fit.lines.area[fit.lines.ns.indexOf(n)] ?? NaN;
}

function noiseParts(members: readonly FittedMember[]): string[] {
  let worst = { relative: 0, energy: 0, power: 0 };
  let dark = 0;
  for (const { member, points } of members) {
    const light = member.spectrum.transmittance;
    if (light === null) continue;
    points.sigma.forEach((sigma, i) => {
      const relative = sigma * light.thickness_cm;
      if (relative > worst.relative) worst = { relative, energy: points.energy[i]!, power: member.power_uW };
    });
    const last = points.place[points.place.length - 1]!;
    for (let i = points.place[0]!; i <= last; i++) if (light.sigma[i]! > 0 && !(light.value[i]! > 0)) dark++;
  }
  return [
    ...(worst.relative > NOISY
      ? [
          `the noise is up to ${percent(worst.relative)} of the transmitted light (at ${worst.energy.toFixed(5)} eV, ${worst.power} uW), which puts the logarithm off by about ${(0.5 * worst.relative ** 2).toPrecision(2)} in optical depth there`,
        ]
      : []),
    ...(dark > 0
      ? [`${dark} ${dark === 1 ? "point" : "points"} with no light above zero had to be left out`]
      : []),
  ];
}

/** The reference on its own was fitted on the light: how far its areas stand from those of the joint fit. */
function bothWays(first: FittedMember, { lines, fit }: ReferenceResult): string[] {
  if (fit?.domain !== "transmittance") return [];
  let worst = { n: 0, by: 0 };
  for (const { n, area } of lines) {
    const { value, sigma } = area;
    if (value === null || sigma === null || !(value > STRONG * sigma)) continue;
    const by = areaOf(first, n) / value - 1;
    if (Math.abs(by) > Math.abs(worst.by)) worst = { n, by };
  }
  if (worst.n === 0) return ["the lowest power on its own was fitted on the light"];
  return [
    `the lowest power on its own was fitted on the light, and of the lines that stand ${STRONG} standard errors above zero n = ${worst.n} differs most: its area here is ${percent(worst.by)} ${worst.by < 0 ? "smaller" : "larger"}`,
  ];
}

function percent(part: number): string {
  return `${Number((100 * Math.abs(part)).toPrecision(2))} %`;
}
