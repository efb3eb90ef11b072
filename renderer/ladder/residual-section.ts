import { NOT_DETERMINED } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { formatNumber } from "../../app/report/index.ts";
import type { CardText, LedgerEntry, LedgerSection } from "../ledger/ledger-entry.ts";

const NOISE = "a detector whose readings are independent, or uncertainty.correlated = allow in the protocol";

const CARDS = {
  lag1: {
    definition: "Correlation of each residual with the next one: 0 where they are independent.",
    formula: "Σr_i r_{i+1}/Σr_i²",
    source: "Box and Jenkins, Time Series Analysis (1970), 2.1",
    improve: NOISE,
  },
  time: {
    definition: "How many neighbouring points count as one.",
    formula: "1 + 2 Σρ_k over the lags that stand out",
    source: "Sokal, in Functional Integration (1997), 131",
    improve: NOISE,
  },
  factor: {
    definition:
      "By how much standard errors would grow if size and correlation of the residuals were allowed for.",
    formula: "√(χ²/ν · correlation time)",
    source: "Newey and West, Econometrica 55, 703 (1987)",
    improve: NOISE,
  },
  skewness: {
    definition: "Whether residuals reach further to one side: 0 for a normal distribution.",
    formula: "mean cube over the cube of the standard deviation",
    source: "definition",
    improve: "spikes and saturated points masked (mask_eV)",
  },
  kurtosis: {
    definition: "Whether there are more outliers than normal noise has: 0 for a normal distribution.",
    formula: "mean fourth power over the square of the variance, less 3",
    source: "definition",
    improve: "spikes masked (mask_eV); a standard deviation for each point",
  },
  condition: {
    definition: "Ratio of the best to the worst determined direction of the scaled parameters.",
    formula: "largest over smallest singular value",
    source: "Belsley, Kuh, Welsch, Regression Diagnostics (1980), 3.1",
    improve: "fewer terms in the background, or lines that blend tied to a law",
  },
} as const satisfies Record<string, CardText>;

/** How the residuals are distributed and hang together, as numbers. */
export function residualSection(result: RunglineResult): LedgerSection | null {
  const { diagnostics, fit } = result;
  if (diagnostics === null || diagnostics === undefined || fit === null) return null;
  return {
    title: "Residuals",
    entries: [
      plain("lag1", "ρ", "Neighbours", fit.lag1, 3, CARDS.lag1),
      plain(
        "correlation-time",
        "τ",
        "Correlation time / points",
        diagnostics.correlation_time,
        3,
        CARDS.time,
      ),
      plain("error-factor", "f", "Errors would grow by", diagnostics.error_factor, 3, CARDS.factor),
      plain("skewness", "s", "Skewness", diagnostics.skewness, 2, CARDS.skewness),
      plain("kurtosis", "κ", "Excess kurtosis", diagnostics.excess_kurtosis, 2, CARDS.kurtosis),
    ],
  };
}

/** How well the parameters are told apart. */
export function conditionSection(result: RunglineResult): LedgerSection | null {
  const { diagnostics } = result;
  if (diagnostics === null || diagnostics === undefined) return null;
  const near = diagnostics.bounds.map(
    ({ name, distance_sigma: distance }) => `${name} ${formatNumber(distance, 2)} σ from its bound`,
  );
  return {
    title: "Problem",
    entries: [plain("condition", "κ", "Condition number", diagnostics.condition, 3, CARDS.condition)],
    remark: near.length === 0 ? "No parameter is near a bound." : `${near.join("; ")}.`,
  };
}

function plain(
  id: string,
  letter: string,
  name: string,
  value: number | null,
  places: number,
  card: CardText,
): LedgerEntry {
  return {
    id,
    symbol: { letter },
    name,
    quantity: NOT_DETERMINED,
    unit: "",
    scale: 1,
    notes: [],
    card,
    correlations: [],
    plain: formatNumber(value, places).replace("-", "−"),
  };
}
