import { doubt, type Note, type Watch } from "../base/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import type { FullFit } from "./fit-full.ts";
import type { ModelChoices } from "./ladder-model.ts";
import { depthPerSignal } from "./light.ts";
import { fitInDomain } from "./measured-domain.ts";
import type { SelectedPoints } from "./select-points.ts";

/** A misfit that asks for the trial. */
const MISFIT = 1.3;
/** Lines this deep in optical depth show a floor of the light. */
const DEEP = 1.2;
/** The trial has to explain this part of what chi square is too large by, with stray light by so many standard errors. */
const EXPLAINED = 0.5;
const SIGNIFICANT = 5;

/**
 * Where transmitted light does not fit and lines are deep: a fit with free stray light, and a doubt where that explains most
 * of the misfit. It is offered, not taken: other things can flatten the strongest lines.
 */
export function strayLightNotes(
  full: FullFit,
  fitted: SelectedPoints,
  chosen: { readonly full: FullFit; readonly points: SelectedPoints; readonly choices: ModelChoices },
  spectrum: Spectrum,
  protocol: Protocol,
  watch: Watch,
): Note[] {
  const { stray_light } = protocol.signal;
  const fringes = protocol.background.some(({ term }) => term === "fringes");
  if (spectrum.transmittance === null || stray_light !== null || fringes) return [];
  if (protocol.lines.domain === "alpha" || fitted.energy.length === 0) return [];
  const before = reduced(full);
  const depth = depthPerSignal(spectrum);
  if (before < MISFIT || depth === null) return [];
  let low = Infinity;
  let high = -Infinity;
  for (const value of full.fit.solution.fitted) {
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  const deep = full.domain.name === "alpha" ? depth * (high - low) : Math.log(high / Math.max(low, 1e-6));
  if (deep < DEEP) return [];
  const other = fitInDomain(
    chosen.full,
    spectrum,
    chosen.points,
    { ...protocol, signal: { ...protocol.signal, stray_light: "free" } },
    chosen.choices,
    watch,
    () => undefined,
  );
  const stray = other.full.domain.parts?.find(({ term }) => term === "stray-light");
  if (stray === undefined || !(stray.value > SIGNIFICANT * stray.sigma)) return [];
  const after = reduced(other.full);
  if (!other.full.fit.solution.converged || after - 1 > (1 - EXPLAINED) * (before - 1)) return [];
  return [
    doubt(
      "stray-light-seen",
      "lines",
      `The strongest lines end at a floor of the light: with ${(100 * stray.value).toPrecision(2)} % of stray light (standard error ${(100 * stray.sigma).toPrecision(1)} %) reduced chi square falls from ${before.toPrecision(3)} to ${after.toPrecision(3)}.`,
      "set signal.stray_light=free to fit it, or to the measured part; block the light beside the sample and measure the dark reading anew",
    ),
  ];
}

function reduced({ fit }: FullFit): number {
  return fit.solution.chi2 / Math.max(1, fit.solution.degreesOfFreedom);
}
