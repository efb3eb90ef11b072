import type { Quantity } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { formatNumber } from "../../app/report/index.ts";
import { fittedParameter, PARAMETER_ORDER, rowName, SERIES_PARAMETERS } from "./series-parameters.ts";

export interface TableText {
  readonly title: string;
  readonly head: readonly string[];
  readonly rows: readonly (readonly string[])[];
  readonly remark?: string;
}

const ABSENT = "not det.";

/** Correlation of the series parameters with each other, from the covariance of the level law. */
export function correlationTable(result: RunglineResult): TableText | null {
  const table = result.series?.correlation;
  if (table === undefined) return null;
  const shown = table.names.flatMap((name, i) =>
    name in SERIES_PARAMETERS && (table.matrix[i]?.some((r, j) => j !== i && r !== 0) ?? false)
      ? [{ i, symbol: SERIES_PARAMETERS[name as keyof typeof SERIES_PARAMETERS].symbol }]
      : [],
  );
  if (shown.length < 2) return null;
  return {
    title: "Correlation",
    head: ["", ...shown.map(({ symbol }) => symbol)],
    rows: shown.map(({ i, symbol }) => [
      symbol,
      ...shown.map(({ i: j }) => (i === j ? "1" : signed(table.matrix[i]?.[j] ?? Number.NaN, 3))),
    ]),
  };
}

/** Standard errors beside the ends of the intervals, counted from the fitted value. */
export function intervalTable(result: RunglineResult): TableText {
  const rows = PARAMETER_ORDER.flatMap((parameter): string[][] => {
    const quantity = fittedParameter(result, parameter);
    if (quantity === null) return [];
    const { scale } = SERIES_PARAMETERS[parameter];
    return [[rowName(parameter), digits(quantity.sigma! * scale), ...endsOf(quantity, quantity, scale)]];
  });
  return {
    title: "Intervals",
    head: ["", "σ", "low", "high"],
    rows,
    remark: `${percent(result)} intervals, counted from the fitted value`,
  };
}

/** Intervals of the spectra drawn anew beside those of the fit. */
export function drawnTable(result: RunglineResult): TableText | null {
  const { resampled } = result;
  if (resampled === null || resampled === undefined) return null;
  const rows = PARAMETER_ORDER.flatMap((parameter): string[][] => {
    const quantity = fittedParameter(result, parameter);
    const drawn = resampled[parameter];
    if (quantity === null || drawn.low === null || drawn.high === null) return [];
    const { scale } = SERIES_PARAMETERS[parameter];
    const fit = endsOf(quantity, quantity, scale);
    const ratio =
      quantity.low === null || quantity.high === null
        ? ABSENT
        : ((drawn.high - drawn.low) / (quantity.high - quantity.low)).toFixed(2);
    return [[rowName(parameter), fit.join(" "), endsOf(drawn, quantity, scale).join(" "), ratio]];
  });
  const blocks = resampled.block_points > 1 ? `, in blocks of ${resampled.block_points} points` : "";
  const failed = resampled.failed === 0 ? "none failed" : `${resampled.failed} failed and are left out`;
  return {
    title: `${resampled.count} spectra drawn anew`,
    head: ["", "fit", "drawn", "ratio"],
    rows,
    remark: `${percent(result)} intervals from the fitted value; ${
      resampled.kind === "parametric" ? "the stated noise" : "the fit’s residuals"
    }${blocks}, seed ${resampled.seed}; ${failed}. The ratio of ${resampled.count} draws is good to ${(
      120 / Math.sqrt(resampled.count)
    ).toFixed(0)} %.`,
  };
}

/** Pairs of line parameters that hang together most. */
export function strongestTable(result: RunglineResult): TableText {
  const strongest = result.diagnostics?.strongest ?? [];
  return {
    title: "Strongest correlations",
    head: ["", "with", "r"],
    rows: strongest.slice(0, 10).map(({ a, b, correlation }) => [words(a), words(b), signed(correlation, 3)]),
    ...(strongest.length === 0 && { remark: "None beyond 0.9 in size." }),
  };
}

/** `width[14]` as `Γ 14`. */
function words(name: string): string {
  const match = /^(\w+)\[(\d+)\]$/.exec(name);
  const letters: Readonly<Record<string, string>> = { energy: "E", width: "Γ", area: "A", asymmetry: "q" };
  return match === null ? (letters[name] ?? name) : `${letters[match[1]!] ?? match[1]!} ${match[2]!}`;
}

function endsOf({ low, high }: Pick<Quantity, "low" | "high">, { value }: Quantity, scale: number): string[] {
  if (low === null || high === null || value === null) return [ABSENT, ABSENT];
  return [low, high].map((end) => plus((end - value) * scale));
}

function plus(value: number): string {
  return `${value < 0 ? "−" : "+"}${digits(Math.abs(value))}`;
}

function digits(value: number): string {
  return formatNumber(value, 3);
}

function signed(value: number, places: number): string {
  return value.toFixed(places).replace("-", "−");
}

function percent(result: RunglineResult): string {
  return `${Number((100 * result.protocol.uncertainty.level).toPrecision(4))} %`;
}
