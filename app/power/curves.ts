import type { PowerResult } from "../protocol/index.ts";
import { bleaching, unbleach, type BleachingLaw } from "./bleaching-law.ts";
import { shrinkage } from "./blockade.ts";
import type { Flow } from "./flow.ts";
import { placeOf } from "./line-table.ts";
import { isPumped, nominalDensity, finite } from "./nominal.ts";
import type { Saturation } from "./saturation.ts";
import { LINE_QUANTITIES } from "./types.ts";
import type { LineVolume } from "./volumes.ts";
import { broadeningAt } from "./widths.ts";

const GRID_POINTS = 61;

export function describeCurves(flow: Flow, volumes: readonly LineVolume[]): PowerResult["curves"] {
  const { input, lines, beam } = flow;
  const { table, protocol } = input;
  const positive = table.power_uW.filter((p) => p > 0);
  const from = Math.log(Math.min(...positive) / 2);
  const to = Math.log(Math.max(...positive) * 2);
  const grid = Array.from({ length: GRID_POINTS }, (_, i) =>
    Math.exp(from + ((to - from) * i) / (GRID_POINTS - 1)),
  );
  const interaction = protocol.power.interaction;
  return {
    power_uW: grid,
    lines: lines.map((line, i) => {
      const volume = volumes[i]!;
      const density = nominalDensity(flow, i);
      const s = line.saturation.value;
      const effective = line.reading === "bleaches" && s !== null ? s * beam.areaToVolume : null;
      const value = flow.atZero[i]!.saturation * volume.perSaturation;
      const own = flow.pump === null || isPumped(flow, i);
      const expected = volume.expected[interaction].hard.value;
      const lawOf = (one: Saturation | null, zero: number | null, rate: number | null, law: BleachingLaw) =>
        grid.map((p) =>
          one === null || zero === null || rate === null
            ? null
            : finite(zero * bleaching(law, rate * p, beam.ratio).factor),
        );
      return {
        n: line.n,
        area: lawOf(line.area, line.zero.value, s, beam.areaLaw),
        peak: lawOf(line.peak, line.peak?.zero ?? null, line.peak?.saturation ?? null, beam.peakLaw),
        density_um3: grid.map((p) => (density === null ? null : (density * p) / (1 + (effective ?? 0) * p))),
        blocked_fraction: grid.map((p) =>
          effective === null ? null : (effective * p) / (1 + effective * p),
        ),
        measured_volume_um3: grid.map(() => (own ? finite(value) : null)),
        expected_volume_um3: grid.map((p) => {
          if (expected === null) return null;
          const grown = line.broadening === null ? 1 : broadeningAt(line.broadening, p);
          return expected * shrinkage(interaction, grown * grown - 1);
        }),
        data: table.power_uW.map((power, j) => dataPoint(flow, i, j, power, own ? density : null)),
      };
    }),
  };
}

function dataPoint(
  flow: Flow,
  i: number,
  j: number,
  power: number,
  density: number | null,
): PowerResult["curves"]["lines"][number]["data"][number] {
  const { table } = flow.input;
  const { beam } = flow;
  const size = table.values.length;
  const value = (quantity: 0 | 1 | 2 | 3): number | null =>
    finite(table.values[placeOf(table, quantity, j, i)]!);
  const sigma = (quantity: 0 | 1 | 2 | 3): number | null => {
    const at = placeOf(table, quantity, j, i);
    return value(quantity) === null ? null : Math.sqrt(Math.max(0, table.covariance[at * size + at]!));
  };
  const area = value(LINE_QUANTITIES.area);
  const areaSigma = sigma(LINE_QUANTITIES.area);
  const zero = flow.lines[i]!.zero.value;
  let volume: number | null = null;
  let volumeSigma: number | null = null;
  if (area !== null && zero !== null && zero > 0 && density !== null && power > 0) {
    if (flow.lines[i]!.reading === "bleaches" && beam.excitation !== "broadband") {
      const u = unbleach(beam.areaLaw, area / zero, beam.ratio);
      const slope = Math.abs(bleaching(beam.areaLaw, u, beam.ratio).slope);
      volume = finite((u * beam.areaToVolume) / (power * density));
      volumeSigma =
        areaSigma === null
          ? null
          : finite(((areaSigma / zero / slope) * beam.areaToVolume) / (power * density));
    }
  }
  return {
    power_uW: power,
    area,
    area_sigma: areaSigma,
    peak: value(LINE_QUANTITIES.peak),
    peak_sigma: sigma(LINE_QUANTITIES.peak),
    width_eV: value(LINE_QUANTITIES.width),
    width_sigma_eV: sigma(LINE_QUANTITIES.width),
    energy_eV: value(LINE_QUANTITIES.energy),
    energy_sigma_eV: sigma(LINE_QUANTITIES.energy),
    volume_um3: volume,
    volume_sigma_um3: volumeSigma,
  };
}
