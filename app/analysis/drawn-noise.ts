import type { Random } from "../base/index.ts";
import { drawAutoregression, type Autoregression } from "../solve/index.ts";

/**
 * Noise of one drawn spectrum, in standard deviations of its points. `gaussian`: normal numbers, white or with the correlation
 * of an autoregression, times `scale`. `own`: the fit's residuals in blocks of neighbours.
 */
export type NoiseSource =
  | { readonly kind: "gaussian"; readonly scale: number; readonly process: Autoregression | null }
  | { readonly kind: "own"; readonly pool: Float64Array; readonly block: number };

/** Noise for m points. */
export function drawNoise(source: NoiseSource, random: Random, m: number): Float64Array {
  const out = new Float64Array(m);
  if (source.kind === "gaussian") {
    if (source.process === null) for (let i = 0; i < m; i++) out[i] = random.normal();
    else drawAutoregression(source.process, () => random.normal(), out);
    for (let i = 0; i < m; i++) out[i] = out[i]! * source.scale;
    return out;
  }
  const { pool, block } = source;
  for (let i = 0; i < m; i += block) {
    const from = Math.floor(random.uniform() * (pool.length - block + 1));
    for (let j = 0; j < block && i + j < m; j++) out[i + j] = pool[from + j]!;
  }
  return out;
}
