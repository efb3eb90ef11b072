import { expect, test } from "vitest";
import { axisRounding } from "../../../app/spectrum/axis-rounding.ts";
import { lightScale, STANDARD_AIR } from "../../../app/units/index.ts";

const nm = { scale: lightScale("nm", "vacuum", STANDARD_AIR), factor: 1, reason: "", notes: [] };
const eV = { scale: lightScale("eV", "vacuum", STANDARD_AIR), factor: 1, reason: "", notes: [] };
const grid = (count: number, at: (i: number) => number): Float64Array =>
  Float64Array.from({ length: count }, (_, i) => at(i));

test("the last digit counts where steps show that values were rounded to it", () => {
  const rounded = axisRounding(
    grid(2000, (i) => Number((570 + 0.00137 * i).toFixed(3))),
    nm,
  )!;
  expect(rounded.digit).toBeCloseTo(0.001, 12);
  // Derived: dE = hc dlambda/lambda^2 with hc = 1239.842 eV nm, in the middle at 571.37 nm
  expect(rounded.digit_eV / ((1239.842 * 0.001) / 571.37 ** 2)).toBeCloseTo(1, 4);
});

test("so does a step of one digit, which may hide anything below it", () => {
  expect(
    axisRounding(
      grid(500, (i) => Number((2.14 + 1e-5 * i).toFixed(5))),
      eV,
    )!.digit_eV,
  ).toBeCloseTo(1e-5, 12);
});

test("an even step of several digits was set, and fine digits move nothing", () => {
  expect(
    axisRounding(
      grid(500, (i) => Number((570 + 0.005 * i).toFixed(3))),
      nm,
    ),
  ).toBeNull();
  expect(
    axisRounding(
      grid(500, (i) => Number((2.14 + 4.137e-6 * i).toFixed(9))),
      eV,
    ),
  ).toBeNull();
  expect(
    axisRounding(
      grid(500, (i) => 2.14 + (Math.PI / 1e6) * i),
      eV,
    ),
  ).toBeNull();
});
