import type { Wording } from "../base/index.ts";
import type { SpectrumIssue } from "./issue.ts";

/** What is wrong with a table that is no spectrum, and what would help. */
export function wordSpectrumIssue(issue: SpectrumIssue): Wording {
  const { facts } = issue;
  const say = (key: string): string => String(facts[key] ?? "");
  const file = say("file");
  switch (issue.code) {
    case "spectrum/unknown-column":
      return {
        message: `${file}: ${say("key")} names ${typeof facts["found"] === "number" ? `column ${say("found")}` : `"${say("found")}"`}, which is not in the file`,
        remedy:
          facts["nearest"] === null || facts["nearest"] === undefined
            ? `the file has ${say("columns")}`
            : `did you mean "${say("nearest")}"? The file has ${say("columns")}`,
      };
    case "spectrum/same-column":
      return {
        message: `${file}: ${say("key")} and ${say("other")} name the same column, ${say("found")}`,
        remedy: "name two different columns",
      };
    case "spectrum/no-axis":
      return {
        message: `${file}: no column is a light axis (found ${say("columns")})`,
        remedy:
          'name it with axis.column and axis.unit (eV, meV, nm, Angstrom, um, cm-1, THz), or write a header such as "Energy (eV)"',
      };
    case "spectrum/pixel-axis":
      return {
        message: `${file}: ${say("found")} counts pixels or rows, not light`,
        remedy:
          "export the spectrum with the wavelength calibration of the spectrometer, or add a column of wavelengths or energies and name it with axis.column",
      };
    case "spectrum/unknown-axis-unit":
      return {
        message: `${file}: the unit of the light axis in column ${say("column")} is not known (${say("found")})`,
        remedy: "set axis.unit to eV, meV, nm, Angstrom, um, cm-1 or THz",
      };
    case "spectrum/constant-axis":
      return {
        message: `${file}: the light axis in column ${say("column")} is ${say("found")} in every row`,
        remedy: "name the light axis with axis.column",
      };
    case "spectrum/implausible-energy":
      return {
        message: `${file}: read in ${say("unit")} the photon energies run from ${say("found")}, where no absorption edge is expected${say("likely") === "" ? "" : `; ${say("likely")}`}`,
        remedy:
          issue.facts["suggestion"] === null
            ? "check the heading of the light axis, or set axis.unit (the protocol's word is taken, with a doubt)"
            : `is the axis in ${say("suggestion")}? Correct the heading, or set axis.unit=${say("suggestion")}`,
      };
    case "spectrum/several-measurements":
      return {
        message: `${file}: line ${say("line")} says ${say("found")} where line ${say("first_line")} said ${say("first")}, and the light axis starts again: several measurements in one file`,
        remedy:
          "split the file there, one file a measurement; spectra at several powers then go together into rungline power",
      };
    case "spectrum/no-light":
      return {
        message: `${file}: no point of ${say("found")} has transmitted light above zero`,
        remedy:
          "check signal.column and signal.quantity, and that the dark reading is not larger than the signal",
      };
    case "spectrum/no-signal":
      return {
        message: `${file}: there is a light axis but no signal (found ${say("columns")})`,
        remedy: "name the column with signal.column and what it holds with signal.quantity",
      };
    case "spectrum/reflectance":
      return {
        message: `${file}: ${say("found")} is a reflection, and reflectance contrast is not absorption: its lines have other shapes, shifted maxima and mixed signs`,
        remedy:
          "measure transmission, or turn the reflectance into absorption with a dispersion model first; if the header is wrong name the column with signal.column and its content with signal.quantity",
      };
    case "spectrum/emission":
      return {
        message: `${file}: ${say("found")} is emitted or scattered light, not absorption`,
        remedy:
          "give a transmission or absorption spectrum; if the header is wrong name the column with signal.column and its content with signal.quantity",
      };
    case "spectrum/no-reference":
      return {
        message: `${file}: ${say("found")} looks like the reading of a detector, and without a reference it is no transmission`,
        remedy:
          "add a column with the light without sample and name it with signal.reference_column (and the dark reading with signal.dark_column), or say what the column holds with signal.quantity",
      };
    case "spectrum/no-reflectance":
      return {
        message: `${file}: signal.surface.model is ${say("found")}, but the reflectance of the surface is not known`,
        remedy:
          "set signal.surface.reflectance or signal.surface.index, or choose a material preset with an index",
      };
    case "spectrum/unit-mismatch":
      return {
        message: `${file}: signal.unit is ${say("found")}, which is no unit of ${say("quantity")}`,
        remedy: "fraction and percent belong to transmittance; 1/cm, 1/mm, 1/um and 1/m to alpha",
      };
    case "spectrum/constant-signal":
      return {
        message: `${file}: ${say("found")} has the same value in every row`,
        remedy: "name the signal with signal.column",
      };
    case "spectrum/too-few-points":
      return {
        message: `${file}: ${say("found")} usable points, fewer than ${say("expected")}`,
        remedy: "give a whole spectrum; lines that were left out are listed by rungline inspect",
      };
  }
}
