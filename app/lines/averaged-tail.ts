/** Columns of the averaged tail; each is written at [offset + i]. */
export interface AveragedTailOutputs {
  readonly absorptive: Float64Array;
  readonly dispersive: Float64Array;
  readonly absorptiveByGap?: Float64Array;
  readonly absorptiveByRydberg?: Float64Array;
  readonly absorptiveByBroadening?: Float64Array;
  readonly dispersiveByGap?: Float64Array;
  readonly dispersiveByRydberg?: Float64Array;
  readonly dispersiveByBroadening?: Float64Array;
}

/**
 * What      All lines from effective quantum number m upward (m half way between two lines, n_c + 1/2 - delta) taken as
 *           one band of height C/(2 Ry), C = 1, between E_c = E_g - Ry/m^2 and the gap, each piece with the line pair of
 *           full width G:
 *             L = [atan((E-E_c)/g) - atan((E-E_g)/g)]/(2 pi Ry),
 *             D = ln{[(E-E_c)^2 + g^2]/[(E-E_g)^2 + g^2]}/(4 pi Ry),  g = G/2.
 * Shapes    as linePair.
 * Units     energies, gap, rydberg, width in eV; columns 1/eV, derivatives 1/eV^2.
 * Domain    rydberg > 0, m > 0, width > 0.
 * Accuracy  against the sum over n^-3 lines of one width: relative m^-2 of the band at its lower edge (the midpoint
 *           rule in n) where lines overlap; lines that stand apart there must be summed one by one instead.
 * Source    density of states dn/dE = n^3/(2 Ry); Elliott, Phys. Rev. 108, 1384 (1957).
 */
export function averagedTail(
  energies: Float64Array,
  from: number,
  to: number,
  gap: number,
  rydberg: number,
  effectiveN: number,
  width: number,
  outputs: AveragedTailOutputs,
  offset = 0,
): void {
  const g = width / 2;
  const depth = rydberg / (effectiveN * effectiveN);
  const height = 1 / (2 * Math.PI * rydberg);
  const { absorptive, dispersive } = outputs;
  for (let i = from; i < to; i++) {
    const top = energies[i]! - gap;
    const bottom = top + depth;
    const topInverse = 1 / (top * top + g * g);
    const bottomInverse = 1 / (bottom * bottom + g * g);
    const k = offset + i;
    // atan difference as one angle, so that far wings do not cancel.
    const a = height * Math.atan2(g * depth, g * g + bottom * top);
    const d = 0.5 * height * Math.log1p(depth * (bottom + top) * topInverse);
    absorptive[k] = a;
    dispersive[k] = d;
    // d/dE of each end's function: atan' = g/(u^2+g^2), (ln/2)' = u/(u^2+g^2).
    const atanTop = g * topInverse;
    const atanBottom = g * bottomInverse;
    const logTop = top * topInverse;
    const logBottom = bottom * bottomInverse;
    const depthByRydberg = depth / rydberg;
    if (outputs.absorptiveByGap) outputs.absorptiveByGap[k] = height * (atanTop - atanBottom);
    if (outputs.dispersiveByGap) outputs.dispersiveByGap[k] = height * (logTop - logBottom);
    if (outputs.absorptiveByRydberg)
      outputs.absorptiveByRydberg[k] = -a / rydberg + height * atanBottom * depthByRydberg;
    if (outputs.dispersiveByRydberg)
      outputs.dispersiveByRydberg[k] = -d / rydberg + height * logBottom * depthByRydberg;
    if (outputs.absorptiveByBroadening)
      outputs.absorptiveByBroadening[k] = 0.5 * height * (logTop - logBottom);
    if (outputs.dispersiveByBroadening)
      outputs.dispersiveByBroadening[k] = 0.5 * height * (atanBottom - atanTop);
  }
}
