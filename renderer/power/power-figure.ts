import type { Quantity } from "../../app/base/index.ts";
import type { PowerLineResult, PowerResult } from "../../app/protocol/index.ts";
import type { AnalysedSeries } from "../../app/tasks/index.ts";
import { colourOfN, type Palette } from "../plot/colours.ts";
import type { Axis, FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout, logarithmic } from "../plot/layout.ts";
import { spectraPanel } from "./spectra-panel.ts";

export type PowerPanel = "all" | "bleaching" | "scaling" | "volumes" | "spectra" | "other" | "crystal";

type Drawn = { data: Trace[]; x: Axis; y: Axis };
type PanelName =
  | "bleaching"
  | "scaling"
  | "byN"
  | "byPower"
  | "density"
  | "spectra"
  | "gap"
  | "widths"
  | "alone"
  | "radii"
  | "spot";

interface Place {
  readonly x: readonly [number, number];
  readonly y: readonly [number, number];
}

const WIDE: readonly [number, number] = [0, 1];
const LEFT: readonly [number, number] = [0, 0.43];
const RIGHT: readonly [number, number] = [0.57, 1];
const PLACES: Readonly<Record<PowerPanel, Partial<Record<PanelName, Place>>>> = {
  all: {
    bleaching: { x: [0, 0.55], y: [0.44, 1] },
    byPower: { x: [0, 0.55], y: [0, 0.31] },
    scaling: { x: [0.68, 1], y: [0.58, 1] },
    byN: { x: [0.68, 1], y: [0, 0.43] },
  },
  bleaching: { bleaching: { x: WIDE, y: WIDE } },
  scaling: { scaling: { x: WIDE, y: WIDE } },
  volumes: {
    byN: { x: LEFT, y: WIDE },
    byPower: { x: RIGHT, y: [0.57, 1] },
    density: { x: RIGHT, y: [0, 0.42] },
  },
  spectra: { spectra: { x: WIDE, y: WIDE } },
  other: { widths: { x: LEFT, y: WIDE }, gap: { x: RIGHT, y: WIDE } },
  crystal: {
    alone: { x: [0, 0.26], y: WIDE },
    radii: { x: [0.38, 0.63], y: WIDE },
    spot: { x: [0.75, 1], y: WIDE },
  },
};

/** The plots a referee asks of a power series, as plain data. */
export function powerFigure(
  analysed: AnalysedSeries,
  palette: Palette,
  panel: PowerPanel,
): FigureDescription {
  const { result } = analysed;
  const power = result.power ?? null;
  const data: Trace[] = [];
  const layout: Record<string, unknown> = {
    ...baseLayout(palette),
    hovermode: "closest",
    uirevision: `${result.source.sha256} ${panel}`,
  };
  if (power === null) return { summary: "No power series was fitted", data, layout };
  const panels = Object.entries(PLACES[panel]) as [PanelName, Place][];
  panels.forEach(([name, place], i) => {
    const suffix = i === 0 ? "" : String(i + 1);
    const names = { xaxis: `x${suffix}`, yaxis: `y${suffix}` };
    const drawn = draw(name, power);
    data.push(...drawn.data.map((trace) => ({ ...trace, ...names })));
    layout[`xaxis${suffix}`] = { ...drawn.x, domain: place.x, anchor: names.yaxis };
    layout[`yaxis${suffix}`] = { ...drawn.y, domain: place.y, anchor: names.xaxis };
  });
  return { summary: summarise(power), data, layout };

  function draw(name: PanelName, part: PowerResult): Drawn {
    switch (name) {
      case "bleaching":
        return bleaching(part, palette);
      case "scaling":
        return scaling(part, palette);
      case "byN":
        return volumesByN(part, palette);
      case "byPower":
        return byPower(part, palette);
      case "density":
        return densities(part, palette);
      case "spectra":
        return spectraPanel(analysed, palette);
      case "gap":
        return gaps(part, palette);
      case "widths":
        return widths(part, palette);
      case "alone":
        return addressable(part, palette);
      case "radii":
        return radii(part, palette);
      case "spot":
        return spots(part, palette);
    }
  }
}

function summarise(power: PowerResult): string {
  const seen = power.lines.filter(({ reading }) => reading === "bleaches").map(({ n }) => n);
  const powers = power.spectra.map(({ power_uW }) => power_uW);
  const range = `${power.spectra.length} spectra from ${Math.min(...powers)} to ${Math.max(...powers)} µW`;
  return seen.length === 0
    ? `Power series of ${range}: no line bleaches`
    : `Power series of ${range}: lines n = ${seen[0]} to ${seen[seen.length - 1]} bleach`;
}

/** A/A_0 against log P: data with their errors, the law through them, each line named where it has fallen to half. */
function bleaching(power: PowerResult, palette: Palette): Drawn {
  const data: Trace[] = [];
  const all: number[] = [];
  const grid = power.curves.power_uW;
  const x: number[] = [];
  const y: number[] = [];
  const error: number[] = [];
  const numbers: number[] = [];
  const labels: { n: number; x: number; y: number }[] = [];
  for (const curve of power.curves.lines) {
    const zero = power.lines.find(({ n }) => n === curve.n)?.area0.value ?? null;
    if (zero === null || !(zero > 0)) continue;
    const law = curve.area.map((area) => (area === null ? null : area / zero));
    data.push(lawLine(curve.n, grid, law, palette));
    for (const point of curve.data) {
      if (point.area === null || !(point.power_uW > 0)) continue;
      x.push(point.power_uW);
      y.push(point.area / zero);
      error.push((point.area_sigma ?? 0) / zero);
      numbers.push(curve.n);
      all.push(point.power_uW);
    }
    const label = placeLabel(curve.n, grid, law, all);
    if (label !== null && labels.every((one) => apart(one, label))) labels.push(label);
  }
  data.push(levels(x, y, error, numbers, palette, "%{x:.3g} µW<br>A/A₀ = %{y:.3f}", 6));
  data.push({
    type: "scatter",
    name: "names",
    x: labels.map((one) => one.x),
    y: labels.map((one) => one.y),
    mode: "text",
    text: labels.map(({ n }) => String(n)),
    textposition: "top right",
    textfont: { size: 12, color: labels.map(({ n }) => colourOfN(n, palette.mode)) },
    hoverinfo: "skip",
    meta: { part: "names" },
  });
  return {
    data,
    x: axis(palette, "Power / µW", logarithmic(all)),
    y: axis(palette, "Area A/A₀", { range: [-0.06, 1.18], dtick: 0.25, showgrid: true }),
  };
}

/** Two names are apart when a decade's eighth or a tenth of the height lies between them. */
function apart(one: { x: number; y: number }, other: { x: number; y: number }): boolean {
  return Math.abs(Math.log10(one.x / other.x)) > 0.13 || Math.abs(one.y - other.y) > 0.055;
}

/** Where the law has fallen to half, else at the highest power if it has fallen at all. */
function placeLabel(
  n: number,
  grid: readonly number[],
  law: readonly (number | null)[],
  shown: readonly number[],
): { n: number; x: number; y: number } | null {
  const low = Math.min(...shown);
  const high = Math.max(...shown);
  let last: { n: number; x: number; y: number } | null = null;
  for (let i = 0; i < grid.length; i++) {
    const value = law[i] ?? null;
    const at = grid[i]!;
    if (value === null || at < low || at > high) continue;
    last = { n, x: at, y: value };
    if (value < 0.5) return last;
  }
  return last;
}

function scaling(power: PowerResult, palette: Palette): Drawn {
  const data: Trace[] = [];
  const lines = power.lines;
  const fit = power.exponent;
  const seen = lines.filter((line) => line.reading === "bleaches" && positive(line.saturation_per_uW));
  const limits = lines.flatMap((line) =>
    line.reading !== "bleaches" && line.saturation_limit_per_uW !== null && line.saturation_limit_per_uW > 0
      ? [{ n: line.n, value: line.saturation_limit_per_uW }]
      : [],
  );
  if (fit !== null) {
    const anchor = centre(
      seen.filter(({ n }) => n >= fit.fit_n[0] && n <= fit.fit_n[1]),
      (line) => line.saturation_per_uW.value!,
    );
    data.push(...guides(fit, anchor, lines, palette, "S"));
  }
  data.push(quantityLevels("levels", seen, (line) => line.saturation_per_uW, palette, "S = %{y:.3g} /µW"));
  data.push(upperLimits(limits, palette, "S below %{y:.3g} /µW"));
  const values = [...seen.map((line) => line.saturation_per_uW.value!), ...limits.map(({ value }) => value)];
  return {
    data,
    x: logN(palette, lines),
    y: axis(palette, "Saturation S / µW⁻¹", logarithmic(values)),
  };
}

function volumesByN(power: PowerResult, palette: Palette): Drawn {
  const data: Trace[] = [];
  const lines = power.lines;
  const measured = lines.filter((line) => positive(line.blockade_volume_um3));
  const expected = lines.filter((line) => positive(line.expected_volume_um3));
  const limits = lines.flatMap((line) =>
    line.blockade_volume_um3.value === null &&
    line.blockade_volume_limit_um3 !== null &&
    line.blockade_volume_limit_um3 > 0
      ? [{ n: line.n, value: line.blockade_volume_limit_um3 }]
      : [],
  );
  const fit = power.volume_exponent;
  if (fit !== null) {
    const anchor = centre(
      measured.filter(({ n }) => n >= fit.fit_n[0] && n <= fit.fit_n[1]),
      (line) => line.blockade_volume_um3.value!,
    );
    data.push(...guides(fit, anchor, lines, palette, "V").filter(({ name }) => name !== "predicted"));
  }
  const shown = expected.map((line) => line.expected_volume_um3);
  data.push({
    type: "scatter",
    name: "expected",
    x: expected.map(({ n }) => n),
    y: shown.map(({ value }) => value),
    mode: "lines",
    line: { width: 1.5, color: palette.ink, dash: "dot" },
    hovertemplate: "n = %{x}<br>expected %{y:.3g} µm³<extra></extra>",
    meta: { part: "expected" },
  });
  data.push(
    quantityLevels("levels", measured, (line) => line.blockade_volume_um3, palette, "V = %{y:.3g} µm³"),
  );
  data.push(upperLimits(limits, palette, "V below %{y:.3g} µm³"));
  const values = [
    ...measured.map((line) => line.blockade_volume_um3.value!),
    ...shown.map(({ value }) => value!),
  ];
  return {
    data,
    x: logN(palette, lines),
    y: axis(palette, "Blockade volume / µm³", logarithmic(values)),
  };
}

/** The volume that every single power gives, and what the interaction makes expected: together, per line. */
function byPower(power: PowerResult, palette: Palette): Drawn {
  const data: Trace[] = [];
  const grid = power.curves.power_uW;
  const x: number[] = [];
  const y: number[] = [];
  const error: number[] = [];
  const numbers: number[] = [];
  const reach: number[] = [];
  for (const curve of power.curves.lines) {
    const line = power.lines.find(({ n }) => n === curve.n);
    if (line?.reading !== "bleaches" || !positive(line.blockade_volume_um3)) continue;
    reach.push(line.blockade_volume_um3.value!);
    data.push(lawLine(curve.n, grid, curve.measured_volume_um3, palette));
    data.push({
      ...lawLine(curve.n, grid, curve.expected_volume_um3, palette),
      name: `expected n = ${curve.n}`,
      line: { width: 1.1, color: colourOfN(curve.n, palette.mode), dash: "dot" },
    });
    for (const value of curve.expected_volume_um3) if (value !== null && value > 0) reach.push(value);
    for (const point of curve.data) {
      const value = point.volume_um3;
      const sigma = point.volume_sigma_um3;
      // A volume that one power cannot tell from nothing would stretch the axis over decades.
      if (value === null || sigma === null || !(value > 2 * sigma) || !(point.power_uW > 0)) continue;
      x.push(point.power_uW);
      y.push(value);
      error.push(sigma);
      numbers.push(curve.n);
      reach.push(value);
    }
  }
  data.push(levels(x, y, error, numbers, palette, "%{x:.3g} µW<br>V = %{y:.3g} µm³", 5));
  const powers = power.spectra.map(({ power_uW }) => power_uW);
  return {
    data,
    x: axis(palette, "Power / µW", logarithmic(powers)),
    y: axis(palette, "Blockade volume / µm³", logarithmic(reach)),
  };
}

function densities(power: PowerResult, palette: Palette): Drawn {
  const data: Trace[] = [];
  const reach: number[] = [];
  const powers = power.spectra.map(({ power_uW }) => power_uW).filter((one) => one > 0);
  const low = Math.min(...powers);
  const high = Math.max(...powers);
  for (const curve of power.curves.lines) {
    data.push(lawLine(curve.n, power.curves.power_uW, curve.density_um3, palette));
    curve.density_um3.forEach((value, i) => {
      const at = power.curves.power_uW[i]!;
      if (value !== null && value > 0 && at >= low && at <= high) reach.push(value);
    });
  }
  return {
    data,
    x: axis(palette, "Power / µW", logarithmic(powers)),
    y: axis(palette, "Density / µm⁻³", logarithmic(reach)),
  };
}

/** Where every spectrum has its own gap, that; else how far all lines have moved together. */
function gaps(power: PowerResult, palette: Palette): Drawn {
  const free = power.spectra.filter(({ gap_eV: gap, power_uW: p }) => gap.value !== null && p > 0);
  const first = free[0]?.gap_eV.value ?? 0;
  const moved: readonly Moved[] =
    free.length > 0
      ? free.map(({ power_uW: p, gap_eV: gap }) => ({
          power: p,
          shift: gap.value! - first,
          sigma: gap.sigma ?? 0,
        }))
      : commonShift(power);
  const name = free.length > 0 ? "Gap" : "Lines together";
  return {
    data: [
      {
        type: "scatter",
        name,
        x: moved.map((one) => one.power),
        y: moved.map((one) => one.shift * 1e6),
        mode: "markers",
        marker: { size: 8, symbol: "circle", color: palette.ink },
        error_y: {
          type: "data",
          array: moved.map((one) => one.sigma * 1e6),
          thickness: 1,
          width: 0,
          color: palette.muted,
        },
        hovertemplate: "%{x:.3g} µW<br>%{y:.3g} µeV<extra></extra>",
        meta: { part: "gap" },
      },
    ],
    x: axis(palette, "Power / µW", logarithmic(power.spectra.map(({ power_uW }) => power_uW))),
    y: axis(palette, `${name}, shift / µeV`, { zeroline: true, zerolinecolor: palette.muted }),
  };
}

interface Moved {
  readonly power: number;
  readonly shift: number;
  readonly sigma: number;
}

/** Weighted mean over the lines of their shift from the lowest power. */
function commonShift(power: PowerResult): readonly Moved[] {
  const sums = new Map<number, { weight: number; moved: number }>();
  for (const { data } of power.curves.lines) {
    const rest = data[0];
    if (rest === undefined || rest.energy_eV === null || rest.energy_sigma_eV === null) continue;
    for (const { power_uW: at, energy_eV: energy, energy_sigma_eV: sigma } of data) {
      if (energy === null || sigma === null || !(sigma > 0) || !(at > 0)) continue;
      const sum = sums.get(at) ?? { weight: 0, moved: 0 };
      const weight = sigma ** -2;
      sum.weight += weight;
      sum.moved += weight * (energy - rest.energy_eV);
      sums.set(at, sum);
    }
  }
  return [...sums].map(([at, { weight, moved }]) => ({
    power: at,
    shift: moved / weight,
    sigma: weight ** -0.5,
  }));
}

function widths(power: PowerResult, palette: Palette): Drawn {
  const x: number[] = [];
  const y: number[] = [];
  const error: number[] = [];
  const numbers: number[] = [];
  for (const { n, data } of power.curves.lines)
    for (const point of data) {
      const { width_eV: width, width_sigma_eV: sigma } = point;
      if (width === null || sigma === null || !(width > 2 * sigma) || !(point.power_uW > 0)) continue;
      x.push(point.power_uW);
      y.push(width * 1e6);
      error.push(sigma * 1e6);
      numbers.push(n);
    }
  return {
    data: [levels(x, y, error, numbers, palette, "%{x:.3g} µW<br>Γ = %{y:.3g} µeV", 6)],
    x: axis(palette, "Power / µW", logarithmic(power.spectra.map(({ power_uW }) => power_uW))),
    y: axis(palette, "Width (FWHM) / µeV", logarithmic(y)),
  };
}

function addressable({ crystal }: PowerResult, palette: Palette): Drawn {
  const shown = crystal.filter((one) => positive(one.addressability));
  const n = shown.map((one) => one.n);
  const drawn = quantityLevels(
    "levels",
    shown,
    (one) => one.addressability,
    palette,
    "spacing/width %{y:.3g}",
  );
  const border: Trace = {
    type: "scatter",
    name: "one width apart",
    x: [Math.min(...n), Math.max(...n)],
    y: [1, 1],
    mode: "lines",
    line: { width: 1, color: palette.accent },
    hoverinfo: "skip",
    meta: { part: "law" },
  };
  return {
    data: n.length > 0 ? [border, drawn] : [drawn],
    x: logN(palette, shown),
    y: axis(palette, "Spacing / width", logarithmic([1, ...shown.map((one) => one.addressability.value!)])),
  };
}

function radii({ crystal }: PowerResult, palette: Palette): Drawn {
  const blocked = crystal.filter((one) => positive(one.blockade_radius_um));
  const orbits = crystal.filter((one) => positive(one.orbit_radius_um));
  const orbit: Trace = {
    type: "scatter",
    name: "orbit",
    x: orbits.map(({ n }) => n),
    y: orbits.map((one) => one.orbit_radius_um.value),
    mode: "lines",
    line: { width: 1.5, color: palette.muted, dash: "dash" },
    hovertemplate: "n = %{x}<br>orbit %{y:.3g} µm<extra></extra>",
    meta: { part: "orbit" },
  };
  const drawn = quantityLevels(
    "levels",
    blocked,
    (one) => one.blockade_radius_um,
    palette,
    "blockade %{y:.3g} µm",
  );
  const values = [
    ...blocked.map((one) => one.blockade_radius_um.value!),
    ...orbits.map((one) => one.orbit_radius_um.value!),
  ];
  const open = blocked.map((one) => (one.blockade_from === "measured" ? "circle" : "circle-open"));
  return {
    data: [orbit, { ...drawn, marker: { ...(drawn["marker"] as object), symbol: open } }],
    x: logN(palette, crystal),
    y: axis(palette, "Blockade and orbit radius / µm", logarithmic(values)),
  };
}

function spots({ crystal }: PowerResult, palette: Palette): Drawn {
  const shown = crystal.filter((one) => positive(one.single_spot_um));
  return {
    data: [
      quantityLevels("levels", shown, (one) => one.single_spot_um, palette, "one excitation in %{y:.3g} µm"),
    ],
    x: logN(palette, crystal),
    y: axis(
      palette,
      "Spot of one excitation / µm",
      logarithmic(shown.map((one) => one.single_spot_um.value!)),
    ),
  };
}

const positive = (quantity: Quantity): boolean => quantity.value !== null && quantity.value > 0;

/** Geometric centre of points of a power law: its line passes there whatever its slope. */
function centre(
  lines: readonly PowerLineResult[],
  value: (line: PowerLineResult) => number,
): { n: number; value: number } | null {
  if (lines.length === 0) return null;
  const mean = (of: (line: PowerLineResult) => number): number =>
    lines.reduce((sum, line) => sum + Math.log(of(line)), 0) / lines.length;
  return { n: Math.exp(mean(({ n }) => n)), value: Math.exp(mean(value)) };
}

function guides(
  fit: NonNullable<PowerResult["exponent"]>,
  anchor: { n: number; value: number } | null,
  lines: readonly PowerLineResult[],
  palette: Palette,
  letter: string,
): Trace[] {
  if (anchor === null || lines.length === 0) return [];
  const ends = [lines[0]!.n, lines[lines.length - 1]!.n];
  const line = (name: string, exponent: number | null, style: object): Trace[] =>
    exponent === null
      ? []
      : [
          {
            type: "scatter",
            name,
            x: ends,
            y: ends.map((n) => anchor.value * (n / anchor.n) ** exponent),
            mode: "lines",
            line: { width: 1.5, color: palette.accent, ...style },
            hovertemplate: `${letter} ~ n^${exponent.toFixed(1)}, ${name}<extra></extra>`,
            meta: { part: name },
          },
        ];
  return [
    ...line("ideal", fit.ideal, { width: 1, color: palette.muted, dash: "dash" }),
    ...line("predicted", fit.predicted.value, { color: palette.ink, dash: "dot" }),
    ...line("fitted", fit.exponent.value, {}),
  ];
}

/** The law of one line, drawn as the components of a spectrum are: quiet until its n is pointed at. */
function lawLine(n: number, x: readonly number[], y: readonly (number | null)[], palette: Palette): Trace {
  return {
    type: "scatter",
    name: `n = ${n}`,
    x,
    y,
    mode: "lines",
    opacity: 0.55,
    line: { width: 1.1, color: colourOfN(n, palette.mode) },
    hoverinfo: "skip",
    meta: { part: "line", n },
  };
}

function levels(
  x: readonly number[],
  y: readonly number[],
  error: readonly number[],
  numbers: readonly number[],
  palette: Palette,
  hover: string,
  size: number,
): Trace {
  const colours = numbers.map((n) => colourOfN(n, palette.mode));
  return {
    type: "scatter",
    name: "levels",
    x,
    y,
    mode: "markers",
    customdata: numbers,
    marker: {
      opacity: 1,
      size: numbers.map(() => size),
      symbol: numbers.map(markOfN),
      color: colours,
      line: { width: 0 },
    },
    error_y: { type: "data", array: error, thickness: 1, width: 0, color: palette.muted },
    hovertemplate: `n = %{customdata}<br>${hover}<extra></extra>`,
    meta: { part: "levels" },
  };
}

/** Neighbours in n have different marks: nothing by colour alone. */
const MARKS = ["circle", "square", "diamond", "cross"] as const;
const markOfN = (n: number): string => MARKS[n % MARKS.length]!;

function quantityLevels<T extends { readonly n: number }>(
  part: string,
  lines: readonly T[],
  of: (line: T) => Quantity,
  palette: Palette,
  hover: string,
): Trace {
  const up = (quantity: Quantity): number =>
    quantity.high === null ? (quantity.sigma ?? 0) : quantity.high - quantity.value!;
  const down = (quantity: Quantity): number =>
    quantity.low === null ? (quantity.sigma ?? 0) : quantity.value! - quantity.low;
  const shown = lines.map(of);
  return {
    type: "scatter",
    name: part,
    x: lines.map(({ n }) => n),
    y: shown.map(({ value }) => value),
    mode: "markers",
    customdata: lines.map(({ n }) => n),
    marker: {
      opacity: 1,
      size: lines.map(() => 8),
      symbol: lines.map(() => "circle"),
      color: lines.map(({ n }) => colourOfN(n, palette.mode)),
      line: { width: 1.5, color: lines.map(({ n }) => colourOfN(n, palette.mode)) },
    },
    error_y: {
      type: "data",
      symmetric: false,
      array: shown.map(up),
      arrayminus: shown.map(down),
      thickness: 1,
      width: 0,
      color: palette.muted,
    },
    hovertemplate: `n = %{customdata}<br>${hover}<extra></extra>`,
    meta: { part },
  };
}

/** Not seen: a hollow triangle that points down from the limit. */
function upperLimits(
  limits: readonly { readonly n: number; readonly value: number }[],
  palette: Palette,
  hover: string,
): Trace {
  return {
    type: "scatter",
    name: "upper limits",
    x: limits.map(({ n }) => n),
    y: limits.map(({ value }) => value),
    mode: "markers",
    customdata: limits.map(({ n }) => n),
    marker: {
      size: 9,
      symbol: "triangle-down-open",
      color: limits.map(({ n }) => colourOfN(n, palette.mode)),
    },
    hovertemplate: `n = %{customdata}<br>${hover} (95 %)<extra></extra>`,
    meta: { part: "limits" },
  };
}

function logN(palette: Palette, lines: readonly { readonly n: number }[]): Axis {
  const first = lines[0]?.n ?? 1;
  const last = lines[lines.length - 1]?.n ?? 10;
  const ticks = [1, 2, 3, 4, 5, 6, 8, 10, 12, 15, 20, 25, 30, 40].filter((n) => n >= first && n <= last);
  return axis(palette, "n", {
    type: "log",
    tickvals: ticks,
    ticktext: ticks.map(String),
    range: [Math.log10(first * 0.94), Math.log10(last * 1.06)],
  });
}
