import type { RunglineResult } from "../protocol/index.ts";
import { areaUnit } from "./area-unit.ts";
import { formatNumber, formatQuantity } from "./format-quantity.ts";
import { textTable } from "./text-table.ts";

/** Lines of other series that share gap and Rydberg energy. */
export function extraPart(result: RunglineResult): string[] {
  const unit = areaUnit(result.reading.signal_unit);
  const words = { exactWord: "held" } as const;
  return (result.extra ?? []).flatMap(({ name, defect, lines }) => [
    "",
    `  Series ${name}, same gap and Rydberg energy, quantum defect ${formatQuantity(defect.value, defect.sigma, "", words)}:`,
    ...textTable(
      [
        ["n", "E_n/eV", "G_n/µeV", `area/(${unit})`, "area/sigma"],
        ...lines.map((line) => [
          String(line.n),
          formatQuantity(line.energy_eV.value, line.energy_eV.sigma, "", words),
          formatQuantity(
            line.width_eV.value === null ? null : 1e6 * line.width_eV.value,
            line.width_eV.sigma === null ? null : 1e6 * line.width_eV.sigma,
            "",
            words,
          ),
          formatQuantity(line.area.value, line.area.sigma, "", words),
          formatNumber(line.significance, 3),
        ]),
      ],
      ["right", "left", "left", "left", "left"],
      "    ",
    ),
  ]);
}

/** Chi square of a law; one that was fitted with the lines has none of its own. */
export function lawChi2InWords(law: {
  readonly chi2: number | null;
  readonly dof: number;
  readonly p: number | null;
}): string {
  if (law.chi2 === null && law.dof === 0)
    return "  the lines are tied to it: fitted with the spectrum, no chi square of its own";
  return `  chi square ${formatNumber(law.chi2)} for ${law.dof} degrees of freedom, p = ${formatNumber(law.p, 3)}`;
}
