import type { RunglineResult } from "../../protocol/index.ts";
import { linearAxis } from "./axis.ts";
import { ACCENT, colourOfPower, DATA, INK, MUTED } from "./colours.ts";
import { FULL_WIDTH_MM, type Figure, type Mark } from "./figure.ts";
import { stackSpectra, type PowerSpectrum } from "./stack-spectra.ts";
import { thinned } from "./thin.ts";

/** Room to the right for the powers, as a share of the range of energies. */
const ROOM = 0.1;

/** The spectra of a power series towards the gap, offset by power: what bleaches is seen before it is a number. */
export function powerSpectraFigures(
  result: RunglineResult,
  spectra: readonly PowerSpectrum[],
): readonly Figure[] {
  const stacked = stackSpectra(result, spectra);
  if (stacked === null) return [];
  const { low, high, least, most, rows } = stacked;
  const marks: Mark[] = rows.flatMap(({ power_uW, x, signal, model }, k): Mark[] => {
    const colour = colourOfPower(k, rows.length, "light", ACCENT);
    const end = model.findLast((value) => Number.isFinite(value));
    return [
      { kind: "line", ...thinned(x, signal, low, high), colour: DATA, width: 0.4 },
      { kind: "line", ...thinned(x, model, low, high), colour, width: 0.8 },
      ...(end === undefined
        ? []
        : [
            {
              kind: "label" as const,
              x: high + 0.01 * (high - low),
              y: end,
              text: `${power_uW} µW`,
              colour: INK,
              anchor: "start" as const,
              lift: -2.3,
            },
          ]),
    ];
  });
  const gap = result.series?.gap_eV.value ?? null;
  const numbers = result.lines.flatMap((line): Mark[] => {
    const energy = line.energy_eV.value;
    if (energy === null || energy < low || energy > high) return [];
    return [{ kind: "label", x: energy, y: most, text: String(line.n), colour: MUTED, lift: -5 }];
  });
  const unit = result.reading.signal_unit === "1/cm" ? "*α* / cm^{−1}" : "Optical depth *αd*";
  return [
    {
      name: "spectra-by-power",
      caption: `Spectra towards the gap at ${rows.length} powers, each above the one before by the same offset: data (grey), model (the higher the power the lighter; highest red). Numbers: *n*${
        gap !== null && gap <= high ? "; dashed: gap" : ""
      }.`,
      width_mm: FULL_WIDTH_MM,
      height_mm: Math.min(150, 52 + 8 * rows.length),
      legend: [],
      panels: [
        {
          x: linearAxis("Photon energy / eV", [low, high + ROOM * (high - low)], { pad: 0, count: 6 }),
          y: linearAxis(`${unit}, offset by power`, [least, most], { pad: 0 }),
          marks: [
            ...(gap === null || gap > high
              ? []
              : [{ kind: "rule" as const, x: gap, colour: ACCENT, dash: "2 2" }]),
            ...marks,
            ...numbers,
          ],
          share: 1,
        },
      ],
    },
  ];
}
