import { createHash } from "node:crypto";
import { describe, expect, it } from "vitest";
import {
  Cancelled,
  failure,
  makeRandom,
  NO_WATCH,
  propagate,
  sha256,
  sigmaOf,
  stopIfCancelled,
  success,
  symmetric,
} from "../../../app/base/index.ts";

describe("sha256", () => {
  it("gives the published digests", () => {
    const digest = (text: string): string => sha256(new TextEncoder().encode(text));
    // Source: FIPS PUB 180-2 (2002), appendix B.1, "abc"
    expect(digest("abc")).toBe("ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    // Source: FIPS PUB 180-2 (2002), appendix B.2
    expect(digest("abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq")).toBe(
      "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1",
    );
    // Source: common test vector of the empty message (from memory)
    expect(digest("")).toBe("e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855");
  });

  it("agrees with another implementation at every length around a block, and on part of a buffer", () => {
    const random = makeRandom(3);
    for (let length = 0; length < 200; length++) {
      const all = Uint8Array.from({ length: length + 7 }, () => Math.floor(256 * random.uniform()));
      const bytes = all.subarray(7);
      // Derived: Node's own implementation of the same standard
      expect(sha256(bytes)).toBe(createHash("sha256").update(bytes).digest("hex"));
    }
  });
});

describe("random numbers", () => {
  it("have streams of one seed that do not run together", () => {
    const rows = Array.from({ length: 200 }, (_, stream) => {
      const random = makeRandom(7, stream);
      return Array.from({ length: 50 }, () => random.normal());
    });
    for (const [a, b] of [
      [0, 1],
      [1, 2],
      [7, 8],
      [100, 199],
    ] as const) {
      const product = rows[a]!.reduce((sum, value, i) => sum + value * rows[b]![i]!, 0) / 50;
      // Derived: products of independent normal numbers scatter by 1/sqrt(50) = 0.14; four of it
      expect(Math.abs(product)).toBeLessThan(0.57);
    }
    const means = rows[0]!.map((_, i) => rows.reduce((sum, row) => sum + row[i]!, 0) / rows.length);
    // Derived: means over 200 streams scatter by 1/sqrt(200) = 0.071; the largest of 50 stays below four and a half of it
    expect(Math.max(...means.map(Math.abs))).toBeLessThan(0.32);
  });

  it("are the same for the same seed and others for another", () => {
    const draw = (seed: number): number[] => {
      const random = makeRandom(seed);
      return Array.from({ length: 5 }, () => random.uniform());
    };
    expect(draw(7)).toStrictEqual(draw(7));
    expect(draw(7)).not.toStrictEqual(draw(8));
  });

  it("are uniform on [0, 1) and standard normal to within their own scatter", () => {
    const random = makeRandom(11);
    const count = 200_000;
    let sum = 0;
    let square = 0;
    let fourth = 0;
    let mean = 0;
    for (let i = 0; i < count; i++) {
      const u = random.uniform();
      expect(u >= 0 && u < 1).toBe(true);
      mean += u / count;
      const z = random.normal();
      sum += z / count;
      square += z ** 2 / count;
      fourth += z ** 4 / count;
    }
    // Derived: moments 1/2, 0, 1, 3 with standard errors 1/sqrt(12 N), 1/sqrt N, sqrt(2/N), sqrt(96/N); four of them
    expect(Math.abs(mean - 0.5)).toBeLessThan(4 / Math.sqrt(12 * count));
    expect(Math.abs(sum)).toBeLessThan(4 / Math.sqrt(count));
    expect(Math.abs(square - 1)).toBeLessThan(4 * Math.sqrt(2 / count));
    expect(Math.abs(fourth - 3)).toBeLessThan(4 * Math.sqrt(96 / count));
  });
});

describe("estimates", () => {
  it("propagate with their correlation", () => {
    const covariance = Float64Array.of(4, 3, 3, 9);
    // Derived: var(x + y) = 4 + 2*3 + 9, var(x - y) = 4 - 2*3 + 9
    expect(propagate([1, 1], covariance)).toBe(19);
    expect(propagate([1, -1], covariance)).toBe(7);
    const estimates = {
      names: ["x", "y"],
      units: ["", ""],
      values: Float64Array.of(1, 2),
      covariance,
      degreesOfFreedom: 3,
      sigmaFrom: "given",
    } as const;
    // Derived: square roots of the diagonal
    expect([sigmaOf(estimates, 0), sigmaOf(estimates, 1)]).toStrictEqual([2, 3]);
  });
});

describe("quantities", () => {
  it("have an interval to both sides, and none where sigma is unknown or the value is no number", () => {
    expect(symmetric(2, 0.5, 2)).toStrictEqual({ value: 2, sigma: 0.5, low: 1, high: 3 });
    expect(symmetric(2, null)).toStrictEqual({ value: 2, sigma: null, low: null, high: null });
    expect(symmetric(2, Number.POSITIVE_INFINITY).sigma).toBeNull();
    expect(symmetric(Number.NaN, 1).value).toBeNull();
  });
});

describe("outcomes and watches", () => {
  it("carry a value or every issue", () => {
    expect(success(1)).toStrictEqual({ ok: true, value: 1 });
    const issue = { code: "table/empty", facts: {} };
    expect(failure(issue, issue)).toStrictEqual({ ok: false, issues: [issue, issue] });
  });

  it("stop the work where the watch says so, and only there", () => {
    expect(() => stopIfCancelled(NO_WATCH)).not.toThrow();
    expect(() => stopIfCancelled({ ...NO_WATCH, cancelled: () => true })).toThrow(Cancelled);
  });
});
