import { expect, test } from "vitest";
import { digamma } from "../../../app/lines/digamma.ts";

test.each([
  // Source: computed with mpmath 1.3.0 (digamma, psi(1, z)) at 30 digits: z; psi; psi'
  [0.5, 0, -1.9635100260214235, 0, 4.934802200544679, 0],
  [1, 0.3, -0.4767548933874728, 0.46652812161509183, 1.389317746595322, -0.6223722536094598],
  [0.01, 4, 1.3912268150279494, 1.6933219336886913, -0.0306443849298899, -0.24751646366333363],
  [3, -2, 1.1645915153739774, -0.6708072826422302, 0.24493116214094457, 0.19282555014722974],
  [11, 7, 2.535338480768197, 0.5877612913310207, 0.06594193898998697, -0.04391536744816448],
  [1, 40, 3.6889315407034475, 1.5582963267948966, 0.0003125, -0.02499739550766705],
])("digamma and trigamma at %f + %f i", (x, y, ...reference) => {
  const out = new Float64Array(4);
  digamma(x, y, out);
  const size = Math.hypot(reference[0]!, reference[1]!);
  const slope = Math.hypot(reference[2]!, reference[3]!);
  expect(Math.hypot(out[0]! - reference[0]!, out[1]! - reference[1]!) / size).toBeLessThan(1e-14);
  expect(Math.hypot(out[2]! - reference[2]!, out[3]! - reference[3]!) / slope).toBeLessThan(1e-14);
});
