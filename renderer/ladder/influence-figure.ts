import type { RunglineResult } from "../../app/protocol/index.ts";
import { colourOfN, type Palette } from "../plot/colours.ts";
import { composePanels, evenPlaces, type Drawn } from "../plot/compose-panels.ts";
import type { FigureDescription } from "../plot/figure-description.ts";
import { axis, baseLayout } from "../plot/layout.ts";

type Influence = NonNullable<RunglineResult["diagnostics"]>["influence"][number];
type Key = "gap_eV" | "rydberg_eV" | "defect0" | "leverage";

const PANELS: readonly { readonly key: Key; readonly title: string }[] = [
  { key: "gap_eV", title: "Change of gap / σ" },
  { key: "rydberg_eV", title: "Change of Ry / σ" },
  { key: "defect0", title: "Change of δ₀ / σ" },
  { key: "leverage", title: "Leverage" },
];

/** What leaving one line out does to the series, line by line, and how much of its fitted energy is its own reading. */
export function influenceFigure(result: RunglineResult, palette: Palette): FigureDescription {
  const influence = result.diagnostics?.influence ?? [];
  const panels = PANELS.filter(({ key }) => influence.some((one) => one[key] !== null));
  const places = evenPlaces(panels.length);
  return {
    summary:
      influence.length === 0
        ? "No influence of single lines: the level law was not fitted to them"
        : `What leaving out each of ${influence.length} lines does to the series`,
    ...composePanels(
      panels.map(({ key, title }, i) => ({
        place: places[i]!,
        drawn: stems(influence, key, title, palette),
      })),
      { ...baseLayout(palette), hovermode: "closest", uirevision: `${result.source.sha256} influence` },
    ),
  };
}

function stems(influence: readonly Influence[], key: Key, title: string, palette: Palette): Drawn {
  const shown = influence.filter((one) => one[key] !== null);
  const n = shown.map((one) => one.n);
  const values = shown.map((one) => one[key]!);
  const colours = n.map((one) => colourOfN(one, palette.mode));
  const reach = Math.max(...values.map(Math.abs), key === "leverage" ? 0.2 : 1);
  return {
    data: [
      {
        type: "scatter",
        name: "from zero",
        x: n.flatMap((one) => [one, one, null]),
        y: values.flatMap((value) => [0, value, null]),
        mode: "lines",
        line: { width: 1.5, color: palette.muted },
        hoverinfo: "skip",
        meta: { part: "stem" },
      },
      {
        type: "scatter",
        name: "levels",
        x: n,
        y: values,
        mode: "markers",
        customdata: n,
        marker: { opacity: 1, size: n.map(() => 8), color: colours, line: { width: 0 } },
        hovertemplate: "n = %{customdata}<br>%{y:.3f}<extra></extra>",
        meta: { part: "levels" },
      },
    ],
    x: axis(palette, key === "leverage" ? "n" : "n left out", { dtick: n.length > 14 ? 2 : 1 }),
    y: axis(palette, title, {
      nticks: 6,
      zeroline: true,
      zerolinecolor: palette.muted,
      range: key === "leverage" ? [0, 1.12 * reach] : [-1.15 * reach, 1.15 * reach],
    }),
  };
}
