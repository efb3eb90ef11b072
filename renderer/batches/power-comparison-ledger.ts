import { formatNumber, powerScatterInWords, spreadInWords } from "../../app/report/index.ts";
import { NOT_DETERMINED } from "../../app/base/index.ts";
import type { ComparedPower, ComparedPowerPart, ComparedSpread } from "../../app/protocol/index.ts";
import { notesAbout, type CardText, type LedgerEntry, type LedgerSection } from "../ledger/ledger-entry.ts";
import { powerPartTitle } from "./power-comparison-figure.ts";

const SYMBOLS = {
  saturation_per_uW: { letter: "S", below: "n" },
  blockade_volume_um3: { letter: "V", below: "n" },
  exponent: { letter: "k" },
} as const;

const CARD: CardText = {
  definition:
    "Mean of the power series of one batch. Where errors are factors, logarithms are compared: the mean is geometric, and its interval runs from the value over its factor to the value times its factor.",
  formula: "ln x̄ = Σ w_i ln x_i/Σ w_i, w_i = 1/(σ_i² + τ²)",
  source: "Paule and Mandel, J. Res. NBS 87, 377 (1982)",
  improve: "power series of more crystals of a batch; a better known spot and power",
};

const DIFFERENCE: CardText = {
  definition:
    "What two batches differ by: the ratio of their means where errors are factors, else the difference. Seen where its corrected probability is below the chosen chance of a false one.",
  formula: "x̄_2/x̄_1, p corrected over all pairs",
  source: "Holm, Scand. J. Stat. 6, 65 (1979)",
  improve: "power series of more crystals of a batch",
};
/** The ledger keeps to one page; the record has all. */
const MOST_PAIRS = 3;

/** Means of the batches and what the tests say, for each compared number. */
export function powerComparisonLedger(power: ComparedPower): readonly LedgerSection[] {
  return power.parts.map((part): LedgerSection => {
    const pairs = [...(part.shifts.length > 0 ? part.shifts : part.pairs)].sort(
      (a, b) => (a.p ?? 2) - (b.p ?? 2),
    );
    return {
      title: powerPartTitle(part),
      entries: [
        ...part.batches.map((batch) => entry(part, power, batch)),
        ...pairs.slice(0, MOST_PAIRS).map((pair) => difference(part, power, pair)),
      ],
      remark: [
        ...(part.batches.length === 0 ? ["no series has it"] : []),
        ...(part.within.tau === null
          ? []
          : [`scatter in batches: ${powerScatterInWords(part, part.within)}`]),
        ...(pairs.length > MOST_PAIRS ? [`${pairs.length - MOST_PAIRS} more pairs in the record`] : []),
      ].join("; "),
    };
  });
}

function difference(
  part: ComparedPowerPart,
  { notes }: ComparedPower,
  pair: ComparedPowerPart["pairs"][number],
): LedgerEntry {
  const chance = (p: number | null): string =>
    p === null ? "not determined" : p < 1e-4 ? "< 0.0001" : formatNumber(p, 2);
  return {
    id: `power-${part.name}-${pair.first}-${pair.second}`,
    symbol: { letter: part.logarithmic ? "r" : "Δ" },
    name: `${pair.second}${part.logarithmic ? "/" : " − "}${pair.first}${pair.seen ? "" : ": not seen"}`,
    quantity: part.logarithmic ? NOT_DETERMINED : pair.difference,
    ...(part.logarithmic && { plain: factorText(pair.difference) }),
    unit: "",
    scale: 1,
    notes: notesAbout(notes, `power.${part.name}`),
    card: DIFFERENCE,
    correlations: [],
    table: {
      caption: "The test",
      head: ["p", "corrected", part.logarithmic ? "factor that could be seen" : "could be seen"],
      rows: [[chance(pair.p), chance(pair.p_corrected), formatNumber(pair.detectable, 3)]],
    },
  };
}

function entry(
  part: ComparedPowerPart,
  { notes }: ComparedPower,
  { batch, samples, mean }: ComparedPowerPart["batches"][number],
): LedgerEntry {
  return {
    id: `power-${part.name}-${batch}`,
    symbol: SYMBOLS[part.name],
    name: `${batch}, ${samples}`,
    quantity: part.logarithmic ? NOT_DETERMINED : mean,
    ...(part.logarithmic && { plain: factorText(mean) }),
    unit: mean.value === null ? "" : part.unit,
    scale: 1,
    notes: notesAbout(notes, `power.${part.name}`),
    card: CARD,
    correlations: [],
    table: {
      caption: "Series of this batch",
      head: ["sample", "value"],
      rows: part.samples
        .filter((one) => one.batch === batch)
        .map((one) => [one.sample, one.left_out ?? spreadInWords(one.quantity, part.unit)]),
    },
  };
}

function factorText({ value, factor }: ComparedSpread): string {
  return value === null || factor === null
    ? "not determined"
    : `${formatNumber(value, 3)} ×/÷ ${formatNumber(factor, 3)}`;
}
