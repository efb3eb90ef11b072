import { findPreset, type BackgroundTerm, type Protocol } from "../protocol/index.ts";

/** The choices that shape a number, in the words of a methods section. */
export function protocolInWords(protocol: Protocol): readonly string[] {
  const { material, signal, axis, lines, series, width, strength, tail, uncertainty } = protocol;
  const said: string[] = [];
  if (material.preset === null) said.push("no material preset");
  else {
    const title = findPreset(material.preset)?.title;
    said.push(`material ${material.preset}${title === undefined ? "" : ` (${title})`}: starting values only`);
  }
  if (protocol.window_eV !== null) said.push(`window ${protocol.window_eV.join(" to ")} eV`);
  if (protocol.mask_eV.length > 0)
    said.push(`left out ${protocol.mask_eV.map((mask) => mask.join(" to ")).join(", ")} eV`);
  if (axis.offset_sigma_eV > 0) said.push(`axis offset uncertain by ${axis.offset_sigma_eV} eV`);
  if (axis.jitter_eV > 0) said.push(`axis uncertain by ${axis.jitter_eV} eV from line to line`);
  if (axis.scale_sigma > 0) said.push(`axis scale uncertain by ${axis.scale_sigma}`);
  if (signal.thickness_um !== null) said.push(`thickness ${signal.thickness_um} µm`);
  said.push(surfaceInWords(signal.surface));
  if (signal.stray_light !== null)
    said.push(signal.stray_light === "free" ? "stray light free" : `stray light ${signal.stray_light}`);
  said.push(lines.n === "auto" ? `lines found, n up to ${lines.max_n}` : `lines n = ${lines.n.join(", ")}`);
  said.push(
    {
      shared: "one asymmetry for all lines",
      free: "asymmetry free per line",
      zero: "symmetric lines",
      law: "asymmetry q0 + q1/n^2",
    }[lines.asymmetry],
  );
  if (lines.slit_fwhm_eV !== null) said.push(`instrument ${lines.slit_fwhm_eV} eV full width`);
  if (lines.slit_fwhm_nm !== null) said.push(`instrument ${lines.slit_fwhm_nm} nm full width`);
  if (lines.slit_fwhm_cm1 !== null) said.push(`instrument ${lines.slit_fwhm_cm1} cm^-1 full width`);
  if (lines.instrument_lorentz_fwhm_eV > 0)
    said.push(`Lorentzian instrument of ${lines.instrument_lorentz_fwhm_eV} eV taken off the widths`);
  said.push(`background ${protocol.background.map(termInWords).join(" + ") || "none"}`);
  said.push(tail.model === "law" ? "tail of the series tied to the laws" : "tail of the series left out");
  if (tail.smeared === "none") said.push("nothing looked for between the lines");
  said.push(
    {
      none: "quantum defect held at zero",
      constant: "constant quantum defect",
      ritz: "quantum defect after Ritz",
    }[series.defect],
  );
  said.push(series.mode === "free" ? "free levels" : "levels tied to the series law");
  if (series.fit_n !== "auto") said.push(`series from n = ${series.fit_n[0]} to ${series.fit_n[1]}`);
  said.push(
    `widths on ${width.base} with exponent ${width.exponent === "free" ? "free" : `held at ${width.exponent}`}, ${
      width.floor_kind === "none" ? "no floor" : `${width.floor_kind} floor`
    }`,
  );
  if (width.mode === "tied") said.push("widths tied to their law");
  said.push(
    `strengths ${strength.law} on ${strength.base}${strength.mode === "tied" ? ", areas tied to them" : ""}`,
  );
  for (const one of lines.constraints) said.push(constraintInWords(one));
  for (const one of series.extra)
    said.push(
      `extra series ${one.name}, n = ${one.n.join(", ")}, defect ${one.hold_defect ? "held at" : "from"} ${one.defect}`,
    );
  said.push(
    uncertainty.scale_by_residuals
      ? "standard errors scaled by the residuals"
      : "standard errors from the given or estimated noise",
  );
  if (uncertainty.correlated === "note") said.push("correlation of residuals not allowed for");
  if (uncertainty.correlated === "allow") said.push("correlation of residuals allowed for");
  said.push(`intervals at ${percent(uncertainty.level)}`);
  return said;
}

function constraintInWords(one: Protocol["lines"]["constraints"][number]): string {
  const what = `${one.parameter} of n = ${typeof one.n === "number" ? one.n : one.n.join(", ")}`;
  if (one.hold !== undefined) return `${what} held at ${one.hold}`;
  if (one.tie === "law") return `${what} tied to the law`;
  if (one.tie === "shared") return `${what} shared`;
  if (one.tie === "free") return `${what} free`;
  return `${what} within ${one.low ?? "no bound"} and ${one.high ?? "no bound"}`;
}

export function percent(level: number): string {
  return `${Number((100 * level).toPrecision(4))} %`;
}

function surfaceInWords(surface: Protocol["signal"]["surface"]): string {
  if (surface.model === "none") return "surfaces not corrected";
  const by =
    surface.reflectance !== null
      ? `R = ${surface.reflectance}`
      : surface.index !== null
        ? `index ${surface.index} against ${surface.surround_index}`
        : "R from the material's index";
  return `surfaces corrected (${surface.model === "all" ? "all reflections" : "single pass"}, ${by})`;
}

function termInWords(term: BackgroundTerm): string {
  switch (term.term) {
    case "polynomial":
      return `polynomial of order ${term.order}`;
    case "square-root":
      return `square-root onset at ${term.onset_eV} eV`;
    case "urbach":
      return `Urbach tail of ${term.energy_eV} eV`;
    case "fringes":
      return `fringes${term.period_eV === null ? "" : ` of period ${term.period_eV} eV`}${term.phase === "auto" ? "" : term.phase === "constant" ? " at constant index" : " with the index of the lines"}`;
    case "measured":
      return `measured curve of ${term.energy_eV.length} points`;
  }
}
