import type { LineResult, RunglineResult } from "../protocol/index.ts";
import { areaUnit, signalUnitWords } from "./area-unit.ts";

type Quantity = LineResult["energy_eV"];

/** How a row of the tidy table is written. */
export interface Rows {
  row(section: string, name: string, n: number | null, quantity: Quantity, unit: string, text?: string): void;
  number(section: string, name: string, value: number | null, unit?: string, n?: number | null): void;
  words(section: string, name: string, text: string, n?: number | null): void;
}

/** The part `power` of a result as rows. */
export function powerRows(result: RunglineResult, { row, number, words }: Rows): void {
  const { power } = result;
  if (power === null || power === undefined) return;
  const area = areaUnit(result.reading.signal_unit);
  const signal = signalUnitWords(result.reading.signal_unit);
  words("power", "excitation", power.excitation);
  words("power", "law", power.law);
  power.spectra.forEach((one, i) => {
    const text = one.label;
    row("power_spectrum", "power", null, exact(one.power_uW), "uW", text);
    row("power_spectrum", "gap", null, one.gap_eV, "eV", text);
    row("power_spectrum", "apparent_gap", null, one.apparent_gap_eV, "eV", text);
    row("power_spectrum", "highest_n", null, exact(one.highest_n), "", text);
    row("power_spectrum", "chi2", null, exact(one.chi2), "", text);
    const source = power.fit?.sources[i];
    if (source !== undefined)
      row("power_spectrum", "sha256", null, exact(null), "", `${source.sha256} ${text}`);
  });
  if (power.fit !== undefined) {
    const { fit } = power;
    row("power_fit", "gap", null, fit.gap_eV, "eV");
    row("power_fit", "rydberg", null, fit.rydberg_eV, "eV");
    row("power_fit", "defect0", null, fit.defect0, "");
    row("power_fit", "defect2", null, fit.defect2, "");
    number("power_fit", "chi2", fit.chi2);
    number("power_fit", "dof", fit.dof);
    words("power_fit", "shared", fit.shared.join(" "));
    words("power_fit", "termination", fit.termination);
    for (const { label, message } of fit.failed) words("power_failed", label, message);
  }
  for (const line of power.lines) {
    const put = (name: string, quantity: Quantity, unit: string): void =>
      row("power_line", name, line.n, { ...quantity }, unit);
    words("power_line", "reading", line.reading, line.n);
    put("area0", line.area0, area);
    put("saturation", line.saturation_per_uW, "1/uW");
    number("power_line", "saturation_limit", line.saturation_limit_per_uW, "1/uW", line.n);
    if (line.peak !== null) {
      put("peak0", line.peak.zero, signal);
      put("peak_saturation", line.peak.saturation_per_uW, "1/uW");
    }
    number("power_line", "p", line.area?.p ?? null, "", line.n);
    put("half_power", line.half_power_uW, "uW");
    put("lifetime", line.lifetime_ps, "ps");
    put("density_per_power", line.density_per_uW, "1/(um^3 uW)");
    put("blockade_volume", line.blockade_volume_um3, "um^3");
    number("power_line", "blockade_volume_limit", line.blockade_volume_limit_um3, "um^3", line.n);
    put("blockade_radius", line.blockade_radius_um, "um");
    put("expected_volume", line.expected_volume_um3, "um^3");
    put("measured_over_expected", line.measured_over_expected, "");
    number("power_line", "blocked_fraction_at_highest", line.blocked_fraction_at_highest, "", line.n);
  }
  for (const [name, law] of [
    ["saturation", power.exponent],
    ["volume", power.volume_exponent],
  ] as const) {
    if (law === null) continue;
    const text = `n ${law.fit_n[0]} to ${law.fit_n[1]}`;
    row("power_scaling", `${name}_exponent`, null, law.exponent, "", text);
    row("power_scaling", `${name}_exponent_predicted`, null, law.predicted, "", text);
    number("power_scaling", `${name}_exponent_ideal`, law.ideal);
  }
  for (const input of power.inputs) {
    const sigma =
      input.value === null || input.relative_sigma === null
        ? null
        : Math.abs(input.value) * input.relative_sigma;
    const quantity = { value: input.value, sigma, low: null, high: null };
    row("power_input", input.name, null, quantity, input.unit, `${input.key}: ${input.from}`);
  }
  for (const { input, share } of power.budget) number("power_budget", input, share);
  row("power_other", "gap_shift_at_highest", null, power.other.gap_shift_eV.at_highest, "eV");
  for (const one of power.other.broadening)
    row("power_other", "broadening_at_highest", one.n, one.at_highest, "eV");
  for (const one of power.crystal) {
    row("power_crystal", "spacing", one.n, one.spacing_eV, "eV");
    row("power_crystal", "addressability", one.n, one.addressability, "");
    row("power_crystal", "single_spot", one.n, one.single_spot_um, "um");
  }
  for (const line of power.curves.lines)
    for (const point of line.data) {
      const text = `${point.power_uW} uW`;
      const put = (name: string, value: number | null, sigma: number | null, unit: string): void =>
        row("power_data", name, line.n, { value, sigma, low: null, high: null }, unit, text);
      put("area", point.area, point.area_sigma, area);
      put("width", point.width_eV, point.width_sigma_eV, "eV");
      put("energy", point.energy_eV, point.energy_sigma_eV, "eV");
    }
}

function exact(value: number | null): Quantity {
  return { value, sigma: null, low: null, high: null };
}
