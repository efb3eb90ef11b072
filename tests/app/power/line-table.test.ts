import { expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { placeOf, withPeaks } from "../../../app/power/index.ts";
import { DEFAULT_PROTOCOL, protocolSchema } from "../../../app/protocol/index.ts";

test("peaks and their covariance follow from areas, widths and asymmetries", () => {
  const n = [8, 9];
  const power_uW = [1, 2];
  const block = 4;
  const values = Float64Array.of(
    2.17,
    2.171,
    2.17,
    2.171,
    3e-5,
    2e-5,
    3.1e-5,
    2.2e-5,
    0.02,
    0.015,
    0.018,
    0.012,
  );
  // A covariance from a few random directions, 2 % long.
  const random = makeRandom(4);
  const directions = Array.from({ length: 16 }, () =>
    Float64Array.from(values, (v, i) => (i < block ? 1e-7 : 0.005 * v) * random.normal()),
  );
  const size = 3 * block;
  const covariance = new Float64Array(size * size);
  for (const d of directions)
    for (let i = 0; i < size; i++)
      for (let j = 0; j < size; j++) covariance[i * size + j] = covariance[i * size + j]! + d[i]! * d[j]!;
  const q = [-0.2, 0.1];
  const table = withPeaks(n, power_uW, values, covariance, q);
  const peakOf = (v: Float64Array, j: number, line: number): number => {
    const at = j * 2 + line;
    const g = v[block + at]! / 2;
    // Highest point of (A/pi)(g + 2 q x)/(x^2 + g^2) on a fine grid.
    let best = 0;
    for (let x = -g; x <= g; x += g / 2000)
      best = Math.max(best, ((v[2 * block + at]! / Math.PI) * (g + 2 * q[line]! * x)) / (x * x + g * g));
    return best;
  };
  for (let j = 0; j < 2; j++) {
    for (let line = 0; line < 2; line++) {
      const at = placeOf(table, 3, j, line);
      // Derived: highest point of the line shape by search
      expect(table.values[at]! / peakOf(values, j, line)).toBeCloseTo(1, 6);
      for (const [quantity, i] of [
        [1, 2 * line],
        [2, 2 * j],
        [3, 0],
      ] as const) {
        const other = placeOf(table, quantity, Math.floor(i / 2), i % 2);
        // Derived: sum over the directions of the changes that they make, to first order
        let sum = 0;
        for (const d of directions) {
          const h = 1e-3;
          const moved = Float64Array.from(values, (v, p) => v + h * d[p]!);
          const change = (peakOf(moved, j, line) - peakOf(values, j, line)) / h;
          const otherChange = quantity < 3 ? d[other]! : (peakOf(moved, 0, 0) - peakOf(values, 0, 0)) / h;
          sum += change * otherChange;
        }
        const found = table.covariance[at * 16 + other]!;
        const scale = Math.sqrt(table.covariance[at * 17]! * table.covariance[other * 17]!);
        expect(Math.abs(found - sum) / scale).toBeLessThan(2e-3);
        expect(table.covariance[other * 16 + at]! / found).toBeCloseTo(1, 12);
      }
    }
  }
});

test("a resolved protocol from before the power keys still holds, filled with the defaults", () => {
  const older: Record<string, unknown> = { ...DEFAULT_PROTOCOL };
  delete older["power"];
  // Derived: the defaults of the schema
  expect(protocolSchema.parse(older)).toEqual(DEFAULT_PROTOCOL);
});
