import { assumption, type Note } from "../base/index.ts";
import type { Table } from "../table/index.ts";
import type { ReadingChoices, Spectrum } from "./spectrum.ts";

type HeaderSlit = NonNullable<Spectrum["slit"]>;

/** Spectral widths as they are written; factor to the unit in which the protocol takes them. */
const WIDTHS: Readonly<Record<string, readonly [HeaderSlit["unit"], number]>> = {
  ev: ["eV", 1],
  mev: ["eV", 1e-3],
  uev: ["eV", 1e-6],
  nm: ["nm", 1],
  pm: ["nm", 1e-3],
  a: ["nm", 0.1],
  angstrom: ["nm", 0.1],
  "cm-1": ["cm-1", 1],
  "1/cm": ["cm-1", 1],
};

/**
 * The full width of the instrument as the header states it, unless the protocol names one; 0 means none. A width of the
 * slit's opening (um, mm) or one without unit says nothing of the spectral width, and is not taken.
 */
export function findSlit(table: Table, choices: ReadingChoices, notes: Note[]): HeaderSlit | null {
  const { lines } = choices;
  const named = [lines?.slit_fwhm_eV, lines?.slit_fwhm_nm, lines?.slit_fwhm_cm1].some(
    (one) => one !== null && one !== undefined,
  );
  if (named) return null;
  const facts = table.facts.filter((fact) => fact.key === "slit" && fact.value !== null);
  for (const fact of facts) {
    const width = WIDTHS[plainUnit(fact.unit ?? "")];
    if (width === undefined || !(fact.value! > 0)) continue;
    const [unit, factor] = width;
    const value = Number((fact.value! * factor).toPrecision(12));
    notes.push(
      assumption(
        "slit-from-header",
        "lines",
        `the instrument is taken as a Gaussian of ${fact.value} ${fact.unit} full width, read from line ${fact.line} ("${fact.label}: ${fact.text}")`,
        "set lines.slit_fwhm_eV, .slit_fwhm_nm or .slit_fwhm_cm1 where the header is wrong; lines.slit_fwhm_eV=0 for none",
      ),
    );
    return { value, unit };
  }
  const unread = facts.find((fact) => fact.value! > 0);
  if (unread !== undefined)
    notes.push(
      assumption(
        "slit-not-taken",
        "lines",
        `the slit on line ${unread.line} ("${unread.label}: ${unread.text}") is no spectral width (eV, nm, cm^-1), so no instrument is allowed for`,
        "set lines.slit_fwhm_eV, .slit_fwhm_nm or .slit_fwhm_cm1 to the full width that a sharp line is seen with",
      ),
    );
  return null;
}

function plainUnit(unit: string): string {
  return unit
    .replace(/[\u00b5\u03bc]/g, "u")
    .replace(/\u207b\u00b9|\u2212 ?1|\u207b1/g, "-1")
    .replace(/[\u00c5\u212b]/g, "A")
    .replace(/[\s^{}$]/g, "")
    .toLowerCase();
}
