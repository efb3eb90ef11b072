import { readFileSync } from "node:fs";
import { expect, test } from "vitest";

interface Generator {
  makeFiles(): Map<string, string>;
  complexErrorFunction(x: number, y: number, how?: "series" | "integral"): [number, number];
}

const fixtures = new URL("../../fixtures/", import.meta.url);
const script = new URL("generated/make-demo.mjs", fixtures).href;
const generator = (await import(script)) as Generator;

test("the generator makes every committed demo and synthetic file again, byte for byte", () => {
  const files = generator.makeFiles();
  // Derived: five demo files and four synthetic ones, each with its truth.
  expect(files.size).toBe(18);
  for (const [path, text] of files) {
    expect(readFileSync(new URL(path, fixtures), "utf8") === text, `fixtures/${path} differs`).toBe(true);
  }
});

test("series and integral of the generator's complex error function agree where both hold", () => {
  for (const [x, y] of [
    [0, 0.3],
    [0.7, 0.4],
    [1.2, 1],
    [-1.5, 0.8],
    [0.1, 1.9],
  ] as const) {
    const [seriesRe, seriesIm] = generator.complexErrorFunction(x, y, "series");
    const [integralRe, integralIm] = generator.complexErrorFunction(x, y, "integral");
    // Derived: two independent forms of one function; the trapezium rule's error is exp(-2 pi 0.3/0.05) = 4e-17.
    expect(Math.hypot(seriesRe - integralRe, seriesIm - integralIm)).toBeLessThan(2e-14);
  }
});
