import { formatNumber } from "../../app/report/index.ts";
import { NOT_DETERMINED } from "../../app/base/index.ts";
import type { ComparedParameter, Comparison } from "../../app/protocol/index.ts";
import type { CardText, LedgerSection } from "../ledger/ledger-entry.ts";
import { PARAMETER_SYMBOLS, title, unitFor } from "./parameter-words.ts";

const FIGURE: CardText = {
  definition:
    "The sum of what its parts give, each the distance to the origin in spreads of the samples, weighed.",
  formula: "F = Σ w_k (x_k − x_{0,k})/s_k",
  source: "the weights are yours; no other choice is hidden in it",
  improve: "the errors of the parts that weigh most",
};
const PART: CardText = {
  definition:
    "How one parameter enters: x is the sample's value, the origin the mean of the reference batch (of all without one), the scale the spread of the samples.",
  formula: "w (x − x_0)/s",
  source: "standard deviation of the samples that are shown",
  improve: "another weight; another reference batch",
};
/** The ledger shows the best and keeps to one page; the figure and the table have all. */
const BEST = 8;

/** The parts with their origin and scale, the best samples with what each part gives, and the words that repeat it. */
export function qualityLedger(
  comparison: Comparison,
  weights: Readonly<Partial<Record<ComparedParameter, number>>>,
): readonly LedgerSection[] {
  const { quality } = comparison;
  if (quality === null) return [];
  const notes = comparison.notes.filter(({ about }) => about === "quality");
  const best = [...quality.samples]
    .filter(({ figure }) => figure.value !== null)
    .sort((a, b) => b.figure.value! - a.figure.value!);
  return [
    {
      title: "Parts",
      entries: quality.parts.map(({ name, weight, origin, scale }) => {
        const part = comparison.parameters.find((one) => one.name === name);
        const shown = unitFor({ name, unit: part?.unit ?? "" }, scale);
        const whole = unitFor({ name, unit: part?.unit ?? "" }, Math.abs(origin));
        return {
          id: `quality-part-${name}`,
          symbol: PARAMETER_SYMBOLS[name],
          name: title(name),
          quantity: NOT_DETERMINED,
          plain: `× ${weight} per ${formatNumber(scale * shown.scale, 3)}`,
          unit: shown.unit,
          scale: 1,
          notes,
          card: PART,
          correlations: [],
          table: {
            caption: "Numbers",
            head: ["weight", "origin", "scale"],
            rows: [
              [
                String(weight),
                `${formatNumber(origin * whole.scale, 6)} ${whole.unit}`,
                `${formatNumber(scale * shown.scale, 4)} ${shown.unit}`,
              ],
            ],
          },
        };
      }),
      remark: `origin: mean of ${comparison.choices.reference ?? "all batches"}; scale: spread of the samples`,
    },
    {
      title: "Best samples",
      entries: best.slice(0, BEST).map(({ sample, batch, figure, contributions }) => ({
        id: `quality-${batch}-${sample}`,
        symbol: { letter: "F" },
        name: `${sample}, ${batch}`,
        quantity: figure,
        unit: "",
        scale: 1,
        notes: [],
        card: FIGURE,
        correlations: [],
        table: {
          caption: "What each part gives",
          head: ["part", "gives"],
          rows: quality.parts.map(({ name }) => [title(name), formatNumber(contributions[name] ?? null, 3)]),
        },
      })),
      remark: `On the command line: --quality ${Object.entries(weights)
        .map(([name, weight]) => `${name}=${weight}`)
        .join(",")}`,
    },
  ];
}
