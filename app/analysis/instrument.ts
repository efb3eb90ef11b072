import type { Protocol } from "../protocol/index.ts";
import { HC_EV_NM } from "../units/index.ts";

const STD_OF_FWHM = 1 / (2 * Math.sqrt(2 * Math.LN2));
/** eV of one cm^-1. */
const EV_PER_CM1 = HC_EV_NM * 1e-7;

/** The Gaussian slit of the protocol: its full width at an energy, and whether it changes with energy. */
export interface Slit {
  readonly given: boolean;
  /** Constant in wavelength: the energy width grows as E^2 (dE = E^2 d lambda/hc). */
  readonly grows: boolean;
  fwhmAt(energy: number): number;
  stdAt(energy: number): number;
}

export function slitOf(protocol: Protocol): Slit {
  const { slit_fwhm_eV, slit_fwhm_nm, slit_fwhm_cm1 } = protocol.lines;
  const constant = slit_fwhm_eV ?? (slit_fwhm_cm1 === null ? null : slit_fwhm_cm1 * EV_PER_CM1);
  const fwhmAt = (energy: number): number =>
    constant ?? (slit_fwhm_nm === null ? 0 : (energy * energy * slit_fwhm_nm) / HC_EV_NM);
  return {
    given: fwhmAt(1) > 0,
    grows: constant === null && slit_fwhm_nm !== null,
    fwhmAt,
    stdAt: (energy) => STD_OF_FWHM * fwhmAt(energy),
  };
}

/** The protocol as it acts on a spectrum: with the slit of the header, which is there only where the protocol names none. */
export function withHeaderSlit(
  protocol: Protocol,
  slit: { readonly value: number; readonly unit: "eV" | "nm" | "cm-1" } | undefined,
): Protocol {
  if (slit === undefined) return protocol;
  const key = ({ eV: "slit_fwhm_eV", nm: "slit_fwhm_nm", "cm-1": "slit_fwhm_cm1" } as const)[slit.unit];
  return { ...protocol, lines: { ...protocol.lines, [key]: slit.value } };
}

/** The same protocol without a slit, for a model on which the slit acts afterwards. */
export function withoutSlit(protocol: Protocol): Protocol {
  return {
    ...protocol,
    lines: { ...protocol.lines, slit_fwhm_eV: null, slit_fwhm_nm: null, slit_fwhm_cm1: null },
  };
}
