import type { Diagnostics, Resampling, RunglineResult } from "../protocol/index.ts";
import { formatNumber } from "./format-quantity.ts";
import { textTable } from "./text-table.ts";

/** Which lines carry the series, and what else a referee looks at first; the whole of it stands in the result. */
export function diagnosticsLines(diagnostics: Diagnostics): string[] {
  const out: string[] = [];
  const rho = diagnostics.autocorrelation.slice(0, 5).map((value) => formatNumber(value, 2));
  out.push(
    `  Residuals: autocorrelation ${rho.join(", ")} at lags 1 to ${rho.length}; skewness ${formatNumber(diagnostics.skewness, 2)}, excess kurtosis ${formatNumber(diagnostics.excess_kurtosis, 2)}`,
    `  Their size and correlation multiply standard errors of independent noise by about ${formatNumber(diagnostics.error_factor, 3)}.`,
  );
  if (diagnostics.strongest.length > 0)
    out.push(
      `  Strongest correlations: ${diagnostics.strongest
        .slice(0, 4)
        .map(({ a, b, correlation }) => `${a}, ${b} ${correlation.toFixed(3)}`)
        .join("; ")}`,
    );
  for (const { name, value, bound, distance_sigma } of diagnostics.bounds)
    out.push(
      `  ${name} = ${formatNumber(value, 3)} lies ${formatNumber(distance_sigma, 2)} standard errors from its bound ${bound}`,
    );
  if (diagnostics.influence.length > 0)
    out.push(
      "",
      "  Single lines in the level law; changes in standard errors when the line is left out:",
      ...textTable(
        [
          ["n", "leverage", "residual", "E_g", "Ry", "delta"],
          ...diagnostics.influence.map((one) => [
            String(one.n),
            fixed(one.leverage),
            fixed(one.residual),
            fixed(one.gap_eV),
            fixed(one.rydberg_eV),
            fixed(one.defect0),
          ]),
        ],
        ["right", "right", "right", "right", "right", "right"],
        "    ",
      ),
    );
  return out;
}

function fixed(value: number | null): string {
  return value === null ? "-" : value.toFixed(2);
}

/** Medians and intervals over drawn spectra, beside how many of them failed. */
export function resamplingLines(resampled: Resampling, level: number): string[] {
  const row = (name: string, one: Resampling["gap_eV"], digits: number): string[][] =>
    one.median === null || one.low === null || one.high === null
      ? []
      : [[name, one.median.toFixed(digits), `${one.low.toFixed(digits)} to ${one.high.toFixed(digits)}`]];
  const blocks = resampled.block_points > 1 ? ` in blocks of ${resampled.block_points} points` : "";
  const order = resampled.autoregression?.length ?? 0;
  const correlated =
    order > 0 ? ` with the correlation of the residuals (autoregression of order ${order})` : "";
  return [
    "",
    `  ${resampled.count} spectra drawn anew (${resampled.kind}${blocks}${correlated}, seed ${resampled.seed}), ${resampled.failed} failed:`,
    ...textTable(
      [
        ["", "median", `interval at ${(100 * level).toPrecision(4)} %`],
        ...row("E_g/eV", resampled.gap_eV, 8),
        ...row("Ry/eV", resampled.rydberg_eV, 7),
        ...row("delta", resampled.defect0, 5),
        ...row("exponent of the widths", resampled.width_exponent, 4),
      ],
      ["left", "right", "right"],
      "    ",
    ),
  ];
}

/** Both parts where the result holds them. */
export function diagnosticsPart(result: RunglineResult): string[] {
  const { diagnostics, resampled } = result;
  const out: string[] = [];
  if (diagnostics !== undefined && diagnostics !== null) out.push(...diagnosticsLines(diagnostics));
  if (resampled !== undefined && resampled !== null)
    out.push(...resamplingLines(resampled, result.protocol.uncertainty.level));
  return out;
}
