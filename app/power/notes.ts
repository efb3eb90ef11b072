import { assumption, doubt, type Note } from "../base/index.ts";
import { chiSquareSurvival } from "../solve/index.ts";
import type { Findings, LineFinding } from "./flow.ts";

/** Blocked part of the volume above which a first order in the density is not enough. */
const BEYOND_LINEAR = 0.3;
/** Standard errors beyond which a test speaks. */
const SPEAKS = 3;

function short(value: number): string {
  return String(Number(value.toPrecision(3)));
}

function list(n: readonly number[]): string {
  return n.join(", ");
}

/** Every doubt and every assumption of a power series, in words. */
export function describeNotes(findings: Findings): Note[] {
  return [
    ...howTaken(findings),
    ...inputNotes(findings),
    ...saturationNotes(findings),
    ...volumeNotes(findings),
    ...otherNotes(findings),
  ];
}

function howTaken({ input, beam }: Findings): Note[] {
  const { power } = input.protocol;
  const notes: Note[] = [];
  if (power.excitation === null)
    notes.push(
      assumption(
        "excitation-assumed",
        "power.excitation",
        "It was not said how the series was taken: a separate pump that a weak probe reads is assumed. Where the swept laser itself bleaches the line, the areas follow another law and S is read too low.",
        "set power.excitation to separate-pump, scanned-probe or broadband",
      ),
    );
  if (power.spot_profile === null)
    notes.push(
      assumption(
        "profile-assumed",
        "power.law",
        "The beam is taken as evenly bright over its spot. In a Gaussian beam this reads S too low, by 13 to 55 % where S P reaches 0.5 to 10.",
        "set power.spot_profile to flat or gaussian",
      ),
    );
  if (beam.profile === "gaussian" && (power.spot_definition === null || power.spot_definition === "full"))
    notes.push(
      assumption(
        "spot-definition-assumed",
        "power.inputs",
        "The diameter of the Gaussian beam is taken between the points of 1/e2 of its highest intensity.",
        "set power.spot_definition to 1/e2 or fwhm",
      ),
    );
  if (
    beam.profile === "flat" &&
    beam.excitation === "separate-pump" &&
    power.probe_diameter_um !== null &&
    power.spot_diameter_um !== null &&
    power.probe_diameter_um > power.spot_diameter_um
  )
    notes.push(
      doubt(
        "probe-larger-than-pump",
        "power.lines",
        "The probe reads places that the pump does not reach: the bleaching comes out too small.",
        "make the probe smaller than the pump, or set power.spot_profile=gaussian",
      ),
    );
  if (beam.excitation === "broadband")
    notes.push(
      doubt(
        "broadband-no-volume",
        "power.lines",
        "Broadband light excites all lines and the continuum at once, so the excitons of one line cannot be counted: no density and no volume is given.",
        "repeat with a laser on one line, or with a separate pump",
      ),
    );
  return notes;
}

function inputNotes({ input, beam, inputs }: Findings): Note[] {
  const notes: Note[] = [];
  if (beam.excitation === "broadband") return notes;
  const missing: string[] = [];
  if (inputs.spot === null) missing.push("power.spot_diameter_um");
  if (inputs.thickness === null) missing.push("signal.thickness_um");
  if (inputs.reflectance === null) missing.push("signal.surface.reflectance");
  if (missing.length > 0)
    notes.push(
      doubt(
        "volume-not-determined",
        "power.lines",
        `Densities and volumes are not determined: ${missing.join(", ")} not given.`,
        `set ${missing.join(", ")}`,
      ),
    );
  if (inputs.reflectance !== null && input.protocol.signal.surface.reflectance === null)
    notes.push(
      assumption(
        "reflectance-assumed",
        "power.inputs",
        `The reflectance of the front face, ${short(inputs.reflectance.value)}, is computed from the index of refraction.`,
        "set signal.surface.reflectance",
      ),
    );
  const { quantity, surface } = input.protocol.signal;
  const read = quantity === null || quantity === "transmittance" || quantity === "counts";
  if (read && surface.model === "none" && inputs.reflectance !== null)
    notes.push(
      doubt(
        "surface-in-depth",
        "power.lines",
        "If transmission was read, the light lost at the faces counts as absorption beside the line; the density then comes out too small and the volume too large.",
        "set signal.surface.model to single or all",
      ),
    );
  if (inputs.transmission.from === "default")
    notes.push(
      assumption(
        "transmission-assumed",
        "power.inputs",
        "All of the stated power is taken to reach the sample. Windows and lenses take some, and the volume grows with what they take.",
        "set power.transmission_to_sample",
      ),
    );
  const assumed = inputs.rows.filter((row) => row.sigma_from === "default");
  if (assumed.length > 0)
    notes.push(
      assumption(
        "input-sigma-assumed",
        "power.inputs",
        `Relative standard errors are defaults for: ${assumed.map((row) => `${row.name} (${short(row.relative_sigma ?? 0)})`).join(", ")}.`,
        "set power.value_sigma, spot_sigma, transmission_sigma, thickness_sigma, reflectance_sigma, lifetime_sigma, coefficient_factor",
      ),
    );
  if (inputs.coefficient["dipole-dipole"]?.from === "default")
    notes.push(
      assumption(
        "coefficient-assumed",
        "power.lines",
        "The dipole-dipole coefficient is an order of magnitude (2.37e-4 n^4 µeV µm^3, Bohr radius 1.11 nm, permittivity 7.5), so expected volumes hold within a factor 3.",
        "set power.c3_ueV_um3; power.c6_ueV_um6 for van der Waals, which is not determined without",
      ),
    );
  return notes;
}

function saturationNotes(findings: Findings): Note[] {
  const { lines, power, scaling, beam } = findings;
  const notes: Note[] = [];
  const of = (reading: LineFinding["reading"]): number[] =>
    lines.filter((line) => line.reading === reading).map((line) => line.n);
  const rising = of("rises");
  for (const n of rising)
    notes.push(
      doubt(
        "absorption-rises",
        `power.lines[n=${n}].saturation_per_uW`,
        `The absorption of n = ${n} grows with power, at least at low power: the saturation law does not hold and no volume is given.`,
        "compare up and down sweeps of the power; pump light can clean a crystal of charges",
      ),
    );
  if (rising.length > 0)
    notes.push(
      doubt(
        "purification",
        "power.other",
        `Rising absorption (n = ${list(rising)}) is what pumping away charged impurities does. Lines that do bleach may be cleaned at the same time, and their S is then too low.`,
        "keep a constant cleaning light on during the whole series, or wait at each power until nothing changes",
      ),
    );
  const unseen = of("not-seen");
  if (unseen.length > 0)
    notes.push(
      doubt(
        "bleaching-not-seen",
        "power.lines",
        `No bleaching within 2 standard errors for n = ${list(unseen)}: upper limits only.`,
        "go to higher power or to a smaller spot",
      ),
    );
  const lost = of("not-determined");
  if (lost.length > 0)
    notes.push(
      doubt(
        "saturation-not-determined",
        "power.lines",
        `No saturation could be fitted for n = ${list(lost)}: the line is there at fewer than two powers, or its areas have no usable errors.`,
        "set lines.n to the lines that are seen at all powers",
      ),
    );
  const loose = lines
    .filter(
      (line) =>
        line.reading === "bleaches" && (line.saturation.value ?? 0) < 2 * (line.saturation.sigma ?? Infinity),
    )
    .map((line) => line.n);
  if (loose.length > 0)
    notes.push(
      doubt(
        "saturation-unbounded",
        "power.lines",
        `n = ${list(loose)} bleach clearly, but S itself is loose: the lowest power already saturates them, so the unbleached area is not known.`,
        "add a spectrum at a much lower power",
      ),
    );
  const rejected = lines
    .filter((line) => line.area !== null && (line.area.fit.p ?? 1) < 0.01)
    .map((line) => line.n);
  const together = lines.reduce(
    (sum, line) => ({
      chi2: sum.chi2 + (line.area?.fit.chi2 ?? 0),
      dof: sum.dof + (line.area?.fit.degreesOfFreedom ?? 0),
    }),
    { chi2: 0, dof: 0 },
  );
  const all = together.dof > 0 ? chiSquareSurvival(together.chi2, together.dof) : 1;
  if (rejected.length > 0 || all < 0.01)
    notes.push(
      doubt(
        "saturation-law-rejected",
        "power.lines",
        `The saturation law does not describe the areas within their errors (${rejected.length > 0 ? `n = ${list(rejected)}` : `all lines together, chi square ${short(together.chi2)} for ${together.dof} degrees of freedom`}).`,
        "check power.excitation and power.spot_profile, and whether the sample drifted during the series",
      ),
    );
  const bent = lines
    .filter((line) => {
      const test = line.tests?.exponent;
      return (
        line.reading === "bleaches" &&
        test !== null &&
        test !== undefined &&
        Math.abs(test.value - 1) > SPEAKS * test.sigma &&
        test.gain > SPEAKS * SPEAKS
      );
    })
    .map((line) => line.n);
  // Many lines a little off say more than one line far off.
  const tests = lines.flatMap((line) =>
    line.reading === "bleaches" && line.tests !== null && line.tests.exponent !== null
      ? [line.tests.exponent]
      : [],
  );
  const weight = tests.reduce((sum, t) => sum + 1 / t.sigma ** 2, 0);
  const mean = tests.reduce((sum, t) => sum + t.value / t.sigma ** 2, 0) / weight;
  const meanAway = tests.length > 1 ? (mean - 1) * Math.sqrt(weight) : 0;
  if (bent.length > 0 || Math.abs(meanAway) > SPEAKS)
    notes.push(
      doubt(
        "saturation-exponent",
        "power.lines",
        bent.length > 0
          ? `The absorption falls with another power of P than the law has (n = ${list(bent)}).`
          : `All lines together fall as P^${short(mean)} in the law, ${short(Math.abs(meanAway))} standard errors from 1.`,
        "below 1: a swept laser (power.excitation=scanned-probe) or a Gaussian beam; above 1: heating or a plasma",
      ),
    );
  const [best] = power.law_comparison;
  const chosen = power.law_comparison.find((one) => one.chosen);
  if (best !== undefined && chosen !== undefined && chosen.chi2 - best.chi2 > SPEAKS * SPEAKS)
    notes.push(
      doubt(
        "other-law-fits-better",
        "power.law",
        `The areas follow ${LAW_WORDS[best.law] ?? best.law} better than ${LAW_WORDS[chosen.law] ?? chosen.law} (chi square ${short(best.chi2)} against ${short(chosen.chi2)} for ${chosen.dof} degrees of freedom).`,
        "check power.excitation and power.spot_profile against how the series was taken",
      ),
    );
  // Laws that these areas cannot tell apart, though S would differ by more than its error.
  const precision = Math.sqrt(
    1 /
      lines.reduce(
        (sum, line) =>
          line.reading === "bleaches" && line.area !== null
            ? sum + (line.area.saturation / line.area.sigma) ** 2
            : sum,
        1e-12,
      ),
  );
  const open = power.law_comparison.filter(
    (one) =>
      !one.chosen &&
      chosen !== undefined &&
      Math.abs(one.chi2 - chosen.chi2) <= SPEAKS * SPEAKS &&
      Math.abs(Math.log(one.saturation_ratio ?? 1)) > 2 * precision,
  );
  // What the user said is an assumption; what was assumed for the user is a doubt.
  const { excitation, spot_profile: profile } = findings.input.protocol.power;
  const raise = excitation !== null && profile !== null ? assumption : doubt;
  if (open.length > 0)
    notes.push(
      raise(
        "law-not-distinguished",
        "power.law",
        `These areas do not tell the chosen law from ${open.map((one) => `${LAW_WORDS[one.law] ?? one.law} (S times ${short(one.saturation_ratio ?? 1)})`).join(" or ")}. S and the volumes rest on power.excitation and power.spot_profile being right.`,
        "check both against how the series was taken; powers both far below and far above 1/S tell the laws apart",
      ),
    );
  const disagreement = areaPeakDisagreement(lines);
  const far = lines
    .filter((line) => line.reading === "bleaches" && Math.abs(line.difference ?? 0) > SPEAKS)
    .map((line) => line.n);
  if (far.length > 0 || disagreement.p < 0.01) {
    const hint =
      beam.excitation === "scanned-probe"
        ? "a swept laser makes the peak fall twice as fast as the area; check power.excitation, or look at the broadening"
        : "lines that broaden lose more peak than area; a swept laser does so by a factor 2 (power.excitation=scanned-probe)";
    notes.push(
      doubt(
        "area-peak-disagree",
        "power.lines",
        `Area and peak give different saturations${far.length > 0 ? ` for n = ${list(far)}` : ", all lines together"} (chi square ${short(disagreement.chi2)}). The volumes rest on the areas.`,
        hint,
      ),
    );
  }
  if (scaling !== null && scaling.degreesOfFreedom > 0 && scaling.p < 0.01)
    notes.push(
      doubt(
        "scaling-rejected",
        "power.exponent",
        `S_n follows no single power of n from n = ${scaling.fit_n[0]} to ${scaling.fit_n[1]} (chi square ${short(scaling.chi2)} for ${scaling.degreesOfFreedom} degrees of freedom).`,
        "look at S_n against n: floors of the widths and weak high lines bend it",
      ),
    );
  else if (scaling !== null && lines[0] !== undefined && scaling.fit_n[0] > lines[0].n)
    notes.push(
      doubt(
        "scaling-range-cut",
        "power.exponent",
        `The power of n is taken from n = ${scaling.fit_n[0]} on; lower lines do not follow it.`,
        "look at S_n against n",
      ),
    );
  if (power.repeat_factor > 1)
    notes.push(
      doubt(
        "repeats-scatter",
        "power.repeat_factor",
        `Spectra repeated at one power scatter more than their noise: all errors of areas, peaks and widths were multiplied by ${short(power.repeat_factor)}.`,
        "look for drift of the laser, the temperature or the place on the sample",
      ),
    );
  return notes;
}

const LAW_WORDS: Readonly<Record<string, string>> = {
  "separate-pump": "the law of a flat pump read by a weak probe",
  "scanned-probe": "the law of a swept laser with a flat beam",
  "gaussian-self": "the law of a Gaussian pump read by a Gaussian probe",
  "gaussian-scanned": "the law of a swept laser with a Gaussian beam",
  "gaussian-two-beam": "the law of two Gaussian beams",
};

export function areaPeakDisagreement(lines: readonly LineFinding[]): { chi2: number; p: number } {
  const known = lines.flatMap((line) =>
    line.reading === "bleaches" && line.difference !== null ? [line.difference] : [],
  );
  const chi2 = known.reduce((sum, d) => sum + d * d, 0);
  return { chi2, p: known.length === 0 ? 1 : chiSquareSurvival(chi2, known.length) };
}

function volumeNotes({ power, inputs, input, widths }: Findings): Note[] {
  const notes: Note[] = [];
  const withVolume = power.lines.filter((line) => line.blockade_volume_um3.value !== null);
  const between = power.inter_state?.volumes.some((one) => one.volume_um3.value !== null) ?? false;
  const last = power.lines.length - 1;
  const falling = widths.fallingPart[last] ?? 1;
  const floor =
    falling < 0.95
      ? ` If the floor of the width law shortens no life, the volume of n = ${power.lines[last]!.n} is ${short(falling)} of what is given.`
      : "";
  if ((withVolume.length > 0 || between) && inputs.lifetime === null)
    notes.push(
      doubt(
        "volume-upper-limit",
        "power.lines",
        `The lifetime is hbar over the width. What else widens a line (a floor, the instrument, dephasing) makes it too short and the volume too large: the volumes are upper limits.${floor}`,
        "set power.lifetime_ps if it was measured",
      ),
    );
  const beyond = power.lines
    .filter((line) => (line.blocked_fraction_at_highest ?? 0) > BEYOND_LINEAR)
    .map((line) => line.n);
  if (beyond.length > 0)
    notes.push(
      doubt(
        "beyond-linear",
        "power.lines",
        `At the highest power more than ${BEYOND_LINEAR * 100} % of the volume is blocked for n = ${list(beyond)}: blocked volumes overlap and the law is good to first order only.`,
        "rest the volumes on the lower powers",
      ),
    );
  const thin = power.lines.filter((line) => (line.radius_over_thickness ?? 0) > 1).map((line) => line.n);
  if (thin.length > 0)
    notes.push(
      doubt(
        "blockade-larger-than-crystal",
        "power.lines",
        `The blockade radius exceeds the thickness of the crystal for n = ${list(thin)}: the blocked region is a disc, not a sphere.`,
        "read the volume as area times thickness",
      ),
    );
  const outside = power.lines
    .filter((line) => (line.radius_over_orbit ?? Infinity) < 1)
    .map((line) => line.n);
  if (outside.length > 0)
    notes.push(
      doubt(
        "blockade-smaller-than-orbit",
        "power.lines",
        `The blockade radius is smaller than the orbit for n = ${list(outside)}: interaction laws for distant excitons do not hold there.`,
        "do not compare these lines with an interaction coefficient",
      ),
    );
  const pump = power.inter_state;
  if (pump !== null && pump.pump_n === null)
    notes.push(
      doubt(
        "pump-on-no-line",
        "power.inter_state",
        `The pump at ${pump.pump_energy_eV} eV meets no line within its width, so it is not known which excitons it makes: no volume is given.`,
        "check power.pump_energy_eV",
      ),
    );
  else if (pump !== null)
    notes.push(
      assumption(
        "inter-state-volume",
        "power.inter_state",
        `The pump makes excitons of n = ${pump.pump_n}; the volumes are those that one of them blocks for the other lines. The exponents 10 and 7 do not apply.`,
        "set power.pump_energy_eV to null where the pump follows the line",
      ),
    );
  const negative = input.surrounding.some((v, i) => v < -3 * (input.surroundingSigma[i] ?? 0));
  if (negative)
    notes.push(
      doubt(
        "surrounding-negative",
        "power.lines",
        "The absorption beside the lines is below zero; it was taken as zero for the absorbed power.",
        "check signal.surface.* and the reference measurement",
      ),
    );
  return notes;
}

function otherNotes({ power }: Findings): Note[] {
  const notes: Note[] = [];
  const evidence = power.other.plasma
    .map((one) => `${one.evidence}: ${one.value === null ? "-" : short(one.value)} (${one.speaks})`)
    .join("; ");
  notes.push(
    doubt(
      "plasma-not-excluded",
      "power.other.plasma",
      `One colour cannot tell blockade from bleaching by a plasma or by heat. Evidence here: ${evidence === "" ? "none" : evidence}.`,
      !power.other.plasma.some((one) => one.evidence.includes("control"))
        ? "take a control series with the pump between the lines or above the gap at the same absorbed power (rungline power --control)"
        : "the control series speaks per incident power: compare the absorbed powers of the two pumps",
    ),
  );
  if ((power.other.heating.significance ?? 0) > SPEAKS)
    notes.push(
      doubt(
        "heating",
        "power.other.heating",
        `The lowest lines (n = ${list(power.other.heating.n)}) broaden with power, by ${short(100 * (power.other.heating.at_highest.value ?? 0))} % at the highest: the crystal warms or its lines dephase, and part of the bleaching is not blockade.`,
        "compare with a temperature series; use shorter exposures or a better thermal contact",
      ),
    );
  const shift = power.other.gap_shift_eV;
  if (Math.abs(shift.significance ?? 0) > SPEAKS)
    notes.push(
      doubt(
        "lines-shift-with-power",
        "power.other.gap_shift_eV",
        `The lines move together by ${short(1e6 * (shift.at_highest.value ?? 0))} µeV up to the highest power, which blockade does not do.`,
        "look for heating or a drift of the light axis",
      ),
    );
  const broad = power.other.broadening.filter((one) => (one.significance ?? 0) > SPEAKS).map((one) => one.n);
  if (broad.length > 0)
    notes.push(
      doubt(
        "lines-broaden-with-power",
        "power.other.broadening",
        `n = ${list(broad)} broaden with power. Lifetimes and expected volumes are taken at zero power; expected volumes shrink with power as the curves show.`,
        "compare the broadening with the saturation: power broadening, dephasing by neighbours or heat",
      ),
    );
  if ((power.other.highest_n.lost ?? 0) > 0)
    notes.push(
      doubt(
        "high-lines-lost",
        "power.other.highest_n",
        `The highest line seen falls from n = ${power.other.highest_n.at_lowest} at the lowest power to n = ${power.other.highest_n.at_highest} at the highest.`,
        "a bleached line is lost to noise first; compare with the saturation law before calling it a plasma",
      ),
    );
  return notes;
}
