import {
  formatNumber,
  powerPairInWords,
  powerScatterInWords,
  spreadInWords,
} from "../../app/report/index.ts";
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

/** Means of the batches and what the tests say, for each compared number. */
export function powerComparisonLedger(power: ComparedPower): readonly LedgerSection[] {
  return power.parts.map((part): LedgerSection => {
    const pairs = part.shifts.length > 0 ? part.shifts : part.pairs;
    return {
      title: powerPartTitle(part),
      entries: part.batches.map((batch) => entry(part, power, batch)),
      remark: [
        ...(part.batches.length === 0 ? ["no series has it"] : []),
        ...pairs.slice(0, 3).map((pair) => powerPairInWords(part, pair)),
        ...(pairs.length > 3 ? [`${pairs.length - 3} more pairs in the record`] : []),
        ...(part.within.tau === null ? [] : [`scatter in batches ${powerScatterInWords(part, part.within)}`]),
      ].join("; "),
    };
  });
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
