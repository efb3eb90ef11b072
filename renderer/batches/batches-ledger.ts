import { NOT_DETERMINED, symmetric } from "../../app/base/index.ts";
import { formatNumber, formatQuantity, PARAMETER_TITLES, roundSigma } from "../../app/report/index.ts";
import type {
  ComparedDifference,
  ComparedParameter,
  ComparedPart,
  Comparison,
} from "../../app/protocol/index.ts";
import { notesAbout, type CardText, type LedgerEntry, type LedgerSection } from "../ledger/ledger-entry.ts";
import { THIN } from "../ledger/value-text.ts";
import { differenceUnit, MAIN_PARAMETERS, PARAMETER_SYMBOLS, title, valueUnit } from "./parameter-words.ts";

const MORE_CRYSTALS = "more crystals of each batch; a smaller systematic part of each fit";

const CARDS = {
  mean: {
    definition: "The common mean over batches, with the scatter between them in its uncertainty.",
    formula: "μ = Σ w_i x_i/Σ w_i, w_i = 1/(σ_i² + τ²)",
    source: "Paule and Mandel, J. Res. NBS 87, 377 (1982)",
    improve: MORE_CRYSTALS,
  },
  alike: {
    definition: "The chance that samples which are all alike scatter this much or more within their errors.",
    formula: "Q = Σ (x_i − x̄)²/σ_i², against χ² of its degrees of freedom",
    source: "Cochran, J. R. Stat. Soc. Suppl. 4, 102 (1937); Birge, Phys. Rev. 40, 207 (1932)",
    improve: "repeats of one crystal: they tell whether errors or crystals make the scatter",
  },
  within: {
    definition: "How much crystals of one batch truly differ, beyond their errors.",
    formula: "τ: the scatter at which Q equals its degrees of freedom",
    source: "Paule and Mandel, J. Res. NBS 87, 377 (1982)",
    improve: "at least three crystals of a batch",
  },
  between: {
    definition: "How much batches truly differ, beyond errors and crystals.",
    formula: "τ of the batch means",
    source: "Paule and Mandel, J. Res. NBS 87, 377 (1982)",
    improve: "more batches",
  },
  difference: {
    definition:
      "The difference of two batch means; seen where its corrected probability is below the chosen chance of a false one.",
    formula: "Δ = x_2 − x_1, p corrected over all pairs",
    source: "Holm, Scand. J. Stat. 6, 65 (1979)",
    improve: MORE_CRYSTALS,
  },
  batch: {
    definition: "The mean of the crystals of this batch.",
    formula: "x̄ = Σ w_i x_i/Σ w_i, w_i = 1/(σ_i² + τ²)",
    source: "Paule and Mandel, J. Res. NBS 87, 377 (1982)",
    improve: "more crystals of this batch",
  },
  trend: {
    definition: "The slope of the line through all samples along the named quantity.",
    formula: "x = x_0 + s (t − t_0), weighted by errors and scatter",
    source: "weighted least squares",
    improve: "a wider range of the quantity",
  },
} as const satisfies Readonly<Record<string, CardText>>;

/** Verdicts on the main parameters, or all that is known of one. */
export function batchesLedger(
  comparison: Comparison,
  one: ComparedParameter | null,
): readonly LedgerSection[] {
  if (one !== null) {
    const part = comparison.parameters.find(({ name }) => name === one);
    return part === undefined ? [] : wholePart(part, comparison);
  }
  return comparison.parameters
    .filter(({ name, samples }) => MAIN_PARAMETERS.includes(name) && samples > 0)
    .map((part) => shortPart(part, comparison));
}

function shortPart(part: ComparedPart, comparison: Comparison): LedgerSection {
  const first = gravest(part);
  return {
    title: title(part.name),
    entries: [
      mean(part, comparison),
      alike(part, comparison),
      ...(first === undefined ? [] : [difference(part, comparison, first, "pair")]),
    ],
    remark: verdict(part),
  };
}

function wholePart(part: ComparedPart, comparison: Comparison): readonly LedgerSection[] {
  const { scale, unit } = differenceUnit(part);
  const scatter = (id: "within" | "between", name: string): LedgerEntry => {
    const { tau, low, high } = part[id];
    const known = tau !== null;
    return entry(part, comparison, id, name, CARDS[id], {
      quantity: NOT_DETERMINED,
      scale: 1,
      unit: known ? unit : "",
      plain: known
        ? `${formatNumber(tau * scale, 2)}${
            low !== null && high !== null
              ? ` (${formatNumber(low * scale, 2)} to ${formatNumber(high * scale, 2)})`
              : ""
          }`
        : "not determined",
    });
  };
  const { homogeneity } = part;
  return [
    {
      title: title(part.name),
      entries: [
        mean(part, comparison),
        alike(part, comparison),
        scatter("within", "Scatter in batches"),
        scatter("between", "between batches"),
      ],
      remark:
        homogeneity.q === null
          ? verdict(part)
          : `Q = ${formatNumber(homogeneity.q, 3)} for ${homogeneity.dof}${
              homogeneity.birge === null ? "" : `, Birge ratio ${formatNumber(homogeneity.birge, 2)}`
            }${homogeneity.i2 === null ? "" : `, I² = ${Math.round(100 * homogeneity.i2)} %`}`,
    },
    ...(part.batches.length > 1
      ? [
          {
            title: "Batches",
            entries: part.batches.map((batch) =>
              entry(
                part,
                comparison,
                `batch-${batch.batch}`,
                `${batch.batch}, ${batch.samples}`,
                CARDS.batch,
                {
                  quantity: batch.mean,
                  ...valueUnit(part, comparison),
                },
              ),
            ),
          },
        ]
      : []),
    ...(part.pairs.length > 0
      ? [
          {
            title: "Differences",
            entries: part.pairs.map((pair) => difference(part, comparison, pair, "pair")),
            remark: verdict(part),
          },
        ]
      : []),
    ...(part.shifts.length > 0
      ? [
          {
            title: `Against ${part.shifts[0]!.first}`,
            entries: part.shifts.map((pair) => difference(part, comparison, pair, "shift")),
          },
        ]
      : []),
    ...(part.trend === null ? [] : [trendSection(part, comparison)]),
  ];
}

function trendSection(part: ComparedPart, comparison: Comparison): LedgerSection {
  const trend = part.trend!;
  const per = trend.unit === "" ? "" : `/${trend.unit}`;
  const { unit, scale } = differenceUnit(part);
  return {
    title: `Trend along ${trend.against}`,
    entries: [
      entry(part, comparison, "trend", "Slope", CARDS.trend, {
        quantity: trend.slope,
        scale,
        unit: `${unit === "" && per !== "" ? "1" : unit}${per}`,
      }),
    ],
    remark: trend.seen
      ? `a trend is seen${trend.p === null ? "" : `, ${chanceText(trend.p)}`}`
      : `no trend seen${
          trend.detectable === null
            ? ""
            : `; one of ${formatNumber(trend.detectable * scale, 2)} ${unit}${per} would have been`
        }`,
  };
}

/** The pair that differs most surely; with a reference batch, against it. */
function gravest(part: ComparedPart): ComparedDifference | undefined {
  const pairs = part.shifts.length > 0 ? part.shifts : part.pairs;
  // Many corrected probabilities are one: then the bare ones tell which pair is the furthest apart.
  return [...pairs].sort((a, b) => (a.p_corrected ?? 2) - (b.p_corrected ?? 2) || (a.p ?? 2) - (b.p ?? 2))[0];
}

/** Below a ten-thousandth the figure says no more than that. */
function chanceText(p: number): string {
  return p < 1e-4 ? "p < 0.0001" : `p = ${formatNumber(p, 2)}`;
}

/** Whether batches differ, in a sentence; "no difference" never without the size that could have been seen. */
export function verdict(part: ComparedPart): string {
  const pairs = part.shifts.length > 0 ? part.shifts : part.pairs;
  if (pairs.length === 0) {
    const { p } = part.homogeneity;
    if (p === null) return "too few samples to compare";
    return p < 0.05 ? "samples scatter beyond their errors" : "samples agree within their errors";
  }
  const { unit, scale } = differenceUnit(part);
  const seen = pairs.filter((pair) => pair.seen);
  const words = pairs.length === 1 ? "" : ` of ${pairs.length}`;
  if (seen.length > 0)
    return `${pairs.length === 1 ? "a difference is seen" : `${seen.length}${words} differences seen`}, ${chanceText(
      Math.min(...seen.map((pair) => pair.p_corrected ?? 1)),
    )}`;
  const sizes = pairs.flatMap((pair) => (pair.detectable === null ? [] : [pair.detectable]));
  if (sizes.length === 0) return "no difference could be seen with so few crystals";
  const size = `${formatNumber(Math.max(...sizes) * scale, 2)}${unit === "" ? "" : ` ${unit}`}`;
  return `no difference seen; one of ${size} would have been`;
}

function mean(part: ComparedPart, comparison: Comparison): LedgerEntry {
  const { value, sigma } = part.mean;
  return entry(part, comparison, "mean", part.batches.length > 1 ? "Mean of batches" : "Mean", CARDS.mean, {
    quantity: value === null || sigma === null ? NOT_DETERMINED : symmetric(value, sigma),
    ...valueUnit(part, comparison),
    main: true,
  });
}

function alike(part: ComparedPart, comparison: Comparison): LedgerEntry {
  const { p } = part.homogeneity;
  return entry(part, comparison, "alike", "All samples alike", CARDS.alike, {
    quantity: NOT_DETERMINED,
    scale: 1,
    unit: "",
    plain: p === null ? "not determined" : chanceText(p),
  });
}

function difference(
  part: ComparedPart,
  comparison: Comparison,
  pair: ComparedDifference,
  kind: "pair" | "shift",
): LedgerEntry {
  const { unit, scale } = differenceUnit(part);
  const size = (value: number | null): string =>
    value === null ? "not determined" : `${formatNumber(value * scale, 2)} ${unit}`.trim();
  return {
    ...entry(
      part,
      comparison,
      `${kind}-${pair.first}-${pair.second}`,
      `${pair.second} − ${pair.first}${pair.seen ? "" : ": not seen"}`,
      CARDS.difference,
      { quantity: pair.difference, unit, scale },
    ),
    symbol: { letter: "Δ" },
    table: {
      caption: "The test",
      head: ["p", "corrected", "could be seen"],
      rows: [[bareChance(pair.p), bareChance(pair.p_corrected), size(pair.detectable)]],
    },
  };
}

const bareChance = (p: number | null): string =>
  p === null ? "not determined" : chanceText(p).replace(/^p (= )?/, "");

interface Shown {
  readonly quantity: LedgerEntry["quantity"];
  readonly scale: number;
  readonly unit: string;
  readonly plain?: string;
  readonly main?: boolean;
}

function entry(
  part: ComparedPart,
  { notes }: Comparison,
  id: string,
  name: string,
  card: CardText,
  shown: Shown,
): LedgerEntry {
  return {
    id: `batches-${part.name}-${id}`,
    symbol: PARAMETER_SYMBOLS[part.name],
    name,
    notes: notesAbout(notes, `parameters.${part.name}`),
    card,
    correlations: [],
    ...shown,
  };
}

/** A measured parameter with its parts apart as a table shows it: value(statistical)(systematic), both in its last place. */
export function measuredText(
  one: { value: number | null; statistical: number | null; systematic: number | null } | undefined,
  scale: number,
): string {
  if (one === undefined || one.value === null) return "not determined";
  const scaled = (value: number | null): number | null => (value === null ? null : value * scale);
  const statistical = scaled(one.statistical);
  if (statistical === null || !(statistical > 0)) return formatNumber(one.value * scale);
  const bare = formatQuantity(scaled(one.value), statistical, "", { groupSpace: THIN });
  if (one.systematic === null) return bare;
  const { place } = roundSigma(statistical);
  const last = (one.systematic * scale) / 10 ** place;
  // With decimals in the brackets before, as in 13.7(2.7), there is no bare last place to count in.
  const written =
    bare.includes(".") && /\(\d+\)$/.test(bare)
      ? last >= 0.5 || last === 0
        ? String(Math.round(last))
        : "<1"
      : formatNumber(one.systematic * scale, 2);
  return `${bare}(${written})`;
}

export const parameterWords = (name: ComparedParameter): string => PARAMETER_TITLES[name];
