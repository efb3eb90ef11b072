import type { Comparison } from "../../protocol/index.ts";
import { PARAMETER_TITLES, sampleLabels } from "../comparison-to-text.ts";
import { linearAxis, namedAxis } from "./axis.ts";
import { batchLook, INK, MUTED } from "./colours.ts";
import { shortName } from "./short-name.ts";
import { FULL_WIDTH_MM, type Figure, type Mark } from "./figure.ts";

/** The figure of quality of every sample as the sum of its parts: bars that follow each other, the sum with its error. */
export function qualityFigure(
  comparison: Comparison,
  quality: NonNullable<Comparison["quality"]>,
): readonly Figure[] {
  const labels = sampleLabels(comparison);
  const order = quality.samples
    .map((sample, i) => ({ sample, label: labels[i]! }))
    .sort((a, b) => (b.sample.figure.value ?? -Infinity) - (a.sample.figure.value ?? -Infinity));
  if (quality.parts.length === 0 || order.length < 2) return [];
  const ends: number[] = [0];
  const bars = quality.parts.map((): { x: number[]; low: number[]; high: number[] }[] => []);
  order.forEach(({ sample }, row) => {
    let above = 0;
    let below = 0;
    quality.parts.forEach(({ name }, k) => {
      const size = sample.contributions[name];
      if (size === undefined) return;
      const from = size >= 0 ? above : below;
      if (size >= 0) above += size;
      else below += size;
      bars[k]!.push({
        x: [Math.min(from, from + size), Math.max(from, from + size)],
        low: [-row - 0.34, -row - 0.34],
        high: [-row + 0.34, -row + 0.34],
      });
      ends.push(from + size);
    });
  });
  const marks = bars.flatMap((list, k): Mark[] =>
    list.map((bar) => ({ kind: "band", ...bar, colour: batchLook(k + PARTS_FROM).colour, opacity: 0.55 })),
  );
  const known = order.flatMap(({ sample: { figure } }, row) =>
    figure.value === null ? [] : [{ figure, value: figure.value, row }],
  );
  return [
    {
      name: "compare-quality",
      caption: `Figure of quality by the weights that were given, the sum of its parts (${quality.parts
        .map(({ name, weight }) => `${PARAMETER_TITLES[name]} ${weight}`)
        .join(", ")}); the best on top.`,
      width_mm: FULL_WIDTH_MM,
      height_mm: 26 + 5.2 * order.length,
      legend: [
        { text: "sum", colour: INK, shape: "diamond" },
        ...quality.parts.map(({ name, weight }, k) => ({
          text: `${PARAMETER_TITLES[name]} × ${weight}`,
          colour: batchLook(k + PARTS_FROM).colour,
          shape: "square" as const,
        })),
      ],
      panels: [
        {
          x: linearAxis("Figure of quality", [
            ...ends,
            ...known.flatMap(({ figure }) => [figure.low, figure.high]),
          ]),
          y: namedAxis(order.map(({ label }) => shortName(label))),
          marks: [
            ...marks,
            { kind: "rule", x: 0, colour: MUTED },
            {
              kind: "points",
              along: "x",
              x: known.map(({ value }) => value),
              y: known.map(({ row }) => -row),
              low: known.map(({ figure }) => figure.low),
              high: known.map(({ figure }) => figure.high),
              colour: INK,
              shape: "diamond",
              size: 2,
            },
          ],
          share: 1,
          grid: "x",
        },
      ],
    },
  ];
}

/** Parts are no batches: their colours start where few batches reach. */
const PARTS_FROM = 3;
