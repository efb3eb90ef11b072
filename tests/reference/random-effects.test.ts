import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import {
  chiSquareQuantile,
  commonMean,
  compareParameter,
  derSimonianLaird,
  holm,
  homogeneityOf,
  pauleMandel,
  pooledMean,
  straightLine,
  tauInterval,
  twoSidedQuantile,
} from "../../app/batch/index.ts";
import { comparedSamples, comparisonChoices } from "../support/compared-samples.ts";
import { referenceTable } from "../support/reference-table.ts";

interface Computed {
  readonly trials_common: { readonly tau2: number; readonly mean: number };
  readonly trials_line: Record<"centre" | "tau2" | "level" | "slope" | "slope_sigma", number>;
  readonly nested: {
    readonly groups: readonly number[];
    readonly values: readonly number[];
    readonly sigma: readonly number[];
    readonly within2: number;
    readonly means: readonly number[];
    readonly mean_sigma: readonly number[];
    readonly between2: number;
    readonly mean: number;
    readonly mean_sigma_all: number;
    readonly pairs: readonly (Record<"first" | "second" | "dof" | "p" | "holm" | "detectable", number> &
      object)[];
  };
  readonly quantiles: readonly Record<"p" | "dof" | "t" | "chi2", number>[];
}
const computed = JSON.parse(
  readFileSync(new URL("../../fixtures/generated/batch-statistics.json", import.meta.url), "utf8"),
) as Computed;

const column = (table: Record<string, string>[], name: string): Float64Array =>
  Float64Array.from(table, (row) => Number(row[name]));

describe("nine laboratories (Kacker 2004)", () => {
  const table = referenceTable("interlaboratory.csv");
  const y = column(table, "value");
  const v = column(table, "variance");
  const one = commonMean(y, v);

  it("give the published scatter after Paule and Mandel and the mean of a reference implementation", () => {
    const tau2 = pauleMandel(one);
    // Source: Kacker, Metrologia 41, 132 (2004), Table 1, first row: 0.8399, four digits
    expect(Math.abs(Math.sqrt(tau2) - 0.8399)).toBeLessThan(0.00006);
    // Source: R package metafor, rma(method = "PM", tol = 1e-9), as listed in the tests of statsmodels (test_meta.py)
    expect(tau2).toBeCloseTo(0.705395309224248, 9);
    const { mean, sigma } = pooledMean(y, v, tau2);
    // Source: as above
    expect(mean).toBeCloseTo(62.4076199113286, 9);
    // Source: as above
    expect(sigma).toBeCloseTo(0.338030602684471, 9);
  });

  it("give the published scatter after DerSimonian and Laird", () => {
    const tau2 = derSimonianLaird(y, v);
    // Source: Kacker 2004, Table 1: 0.5359; the reference implementations agree with it to 0.001 only
    expect(Math.abs(Math.sqrt(tau2) - 0.5359)).toBeLessThan(0.001);
    // Source: metafor, rma(method = "DL"), as above
    expect(tau2).toBeCloseTo(0.288049246973751, 9);
    const { mean, sigma, sigmaFromScatter } = pooledMean(y, v, tau2);
    // Source: as above
    expect(mean).toBeCloseTo(62.3901386044504, 9);
    // Source: as above
    expect(sigma).toBeCloseTo(0.245749668040304, 9);
    // Source: metafor, rma(method = "DL", test = "knha"), as above (Hartung and Knapp)
    expect(sigmaFromScatter).toBeCloseTo(0.29477605699879, 9);
  });

  it("are not homogeneous: Cochran's Q, its probability, I2 and the Birge ratio", () => {
    const { q, dof, p, birge, i2 } = homogeneityOf(one);
    // Source: metafor, as above: QE, QEp, I2
    expect(q).toBeCloseTo(24.801897741835, 8);
    expect(dof).toBe(8);
    // Source: as above
    expect(p).toBeCloseTo(0.00167935146372742, 12);
    // Source: as above
    expect(i2).toBeCloseTo(0.67744403741711, 9);
    // Derived: root of Q over its degrees of freedom
    expect(birge).toBeCloseTo(Math.sqrt(24.801897741835 / 8), 9);
  });
});

describe("thirteen trials (Colditz et al. 1994)", () => {
  const table = referenceTable("vaccine_trials.csv");
  const [a, b, c, d] = ["treated_cases", "treated_others", "control_cases", "control_others"].map((name) =>
    column(table, name),
  ) as [Float64Array, Float64Array, Float64Array, Float64Array];
  const y = a.map((_, i) => Math.log(a[i]! / (a[i]! + b[i]!)) - Math.log(c[i]! / (c[i]! + d[i]!)));
  const v = a.map((_, i) => 1 / a[i]! - 1 / (a[i]! + b[i]!) + 1 / c[i]! - 1 / (c[i]! + d[i]!));

  it("give the log risk ratio of two statistics packages, with and without random effects", () => {
    const fixed = commonMean(y, v).fit(0);
    // Source: Stata metan and R metafor (tests of metafor, "rma.uni() against metan with 'dat.bcg'"), four digits
    expect(fixed.beta[0]).toBeCloseTo(-0.4303, 4);
    // Source: as above
    expect(fixed.q).toBeCloseTo(152.233, 4);
    const tau2 = derSimonianLaird(y, v);
    // Source: as above
    expect(tau2).toBeCloseTo(0.3088, 4);
    const { mean, sigma } = pooledMean(y, v, tau2);
    // Source: as above
    expect(mean).toBeCloseTo(-0.7141, 4);
    // Source: as above, 95 % interval -1.0644 to -0.3638
    expect(mean - 1.959964 * sigma).toBeCloseTo(-1.0644, 4);
    // Source: as above
    expect(mean + 1.959964 * sigma).toBeCloseTo(-0.3638, 4);
    // Source: as above, I2 = 92.1173 %
    expect(homogeneityOf(commonMean(y, v)).i2).toBeCloseTo(0.921173, 5);
  });

  it("give the interval of the scatter from the quantiles of Q, for log odds ratios", () => {
    const odds = a.map((_, i) => Math.log((a[i]! * d[i]!) / (b[i]! * c[i]!)));
    const variances = a.map((_, i) => 1 / a[i]! + 1 / b[i]! + 1 / c[i]! + 1 / d[i]!);
    const [low, high] = tauInterval(commonMean(odds, variances), 0.95);
    // Source: R metafor, confint (Q profile) on van Houwelingen et al. 2002 (metafor-project.org): 0.1302 to 1.1812, found
    // by a root finder that stops at 1e-4 (scipy's, to the last digit, gives 0.130149 and 1.181186)
    expect(Math.abs(low - 0.1302)).toBeLessThan(1e-4);
    // Source: as above
    expect(Math.abs(high - 1.1812)).toBeLessThan(1e-4);
    // Source: scipy.optimize.brentq on Q(tau^2) = chi2.ppf(0.975, 12)
    expect(low).toBeCloseTo(0.1301491152383901, 10);
    // Source: as above, 0.025
    expect(high).toBeCloseTo(1.1811857921572089, 10);
  });

  it("give a line against latitude, as computed apart", () => {
    const { centre, tau2, level, slope, slope_sigma } = computed.trials_line;
    const line = straightLine(y, v, column(table, "latitude"), centre);
    // Source: fixtures/generated/make-batch-statistics.py (scipy)
    expect(pauleMandel(line)).toBeCloseTo(tau2, 10);
    const fit = line.fit(tau2);
    // Source: as above
    expect([fit.beta[0]! - level, fit.beta[1]! - slope].every((x) => Math.abs(x) < 1e-10)).toBe(true);
    // Source: as above
    expect(Math.sqrt(fit.covariance[3]!)).toBeCloseTo(slope_sigma, 10);
    // Source: as above
    expect(pauleMandel(commonMean(y, v))).toBeCloseTo(computed.trials_common.tau2, 10);
  });
});

describe("several tests", () => {
  it("are corrected after Holm as a reference implementation does", () => {
    const p = [
      0.838541367553, 0.642193923795, 0.680845947633, 0.967833824309, 0.71626938238, 0.177096952723,
      5.23656777208e-5, 0.0202732688798, 0.00028140506198, 0.0149877310796,
    ];
    const corrected = holm(p);
    // Source: R package multtest, mt.rawp2adjp, as listed in the tests of statsmodels (test_multi.py), column Holm
    const expected = [1, 1, 1, 1, 1, 1, 5.23656777208e-4, 0.1419128821586, 0.00253264555782, 0.1199018486368];
    corrected.forEach((value, i) => expect(value).toBeCloseTo(expected[i]!, 12));
  });

  it("reject what a published example rejects", () => {
    // Source: R package HDLSSkST 2.1.0, example of Holm(): 0 0 1 0 0 0 1 at 0.05
    expect(holm([0.5, 0.01, 0.001, 0.69, 0.02, 0.05, 0.0025]).map((p) => (p < 0.05 ? 1 : 0))).toStrictEqual([
      0, 0, 1, 0, 0, 0, 1,
    ]);
  });

  it("use quantiles of Student's t and of chi square", () => {
    for (const { p, dof, t, chi2 } of computed.quantiles) {
      // Source: scipy.stats.t.isf and chi2.ppf (fixtures/generated/make-batch-statistics.py)
      expect(Math.abs(twoSidedQuantile(p, dof) / t - 1)).toBeLessThan(1e-9);
      // Source: as above
      expect(Math.abs(chiSquareQuantile(1 - p, dof) / chi2 - 1)).toBeLessThan(1e-9);
    }
  });
});

describe("samples in batches", () => {
  const { nested } = computed;
  const part = compareParameter(
    "gap_eV",
    "eV",
    comparedSamples(
      nested.values,
      nested.sigma,
      nested.groups.map((group) => `b${group}`),
    ),
    comparisonChoices({ parameters: ["gap_eV"] }),
    "",
  );

  it("have scatter within and between batches, and batch means, as computed apart", () => {
    // Source: fixtures/generated/make-batch-statistics.py
    expect(part.within.tau! ** 2).toBeCloseTo(nested.within2, 9);
    // Source: as above
    expect(part.between.tau! ** 2).toBeCloseTo(nested.between2, 9);
    part.batches.forEach(({ mean }, b) => {
      // Source: as above
      expect(mean.value).toBeCloseTo(nested.means[b]!, 10);
      // Source: as above
      expect(mean.sigma).toBeCloseTo(nested.mean_sigma[b]!, 10);
    });
    // Source: as above
    expect(part.mean.value).toBeCloseTo(nested.mean, 9);
    // Source: as above
    expect(part.mean.sigma).toBeCloseTo(nested.mean_sigma_all, 9);
  });

  it("differ in pairs with corrected probabilities and sizes that could have been seen, as computed apart", () => {
    expect(part.pairs).toHaveLength(nested.pairs.length);
    nested.pairs.forEach((expected, k) => {
      const found = part.pairs[k]!;
      expect([found.first, found.second]).toStrictEqual([`b${expected.first}`, `b${expected.second}`]);
      // Source: fixtures/generated/make-batch-statistics.py
      expect(found.dof! / expected.dof).toBeCloseTo(1, 7);
      // Source: as above
      expect(found.p).toBeCloseTo(expected.p, 8);
      // Source: as above
      expect(found.p_corrected).toBeCloseTo(expected.holm, 8);
      // Source: as above
      expect(found.detectable! / expected.detectable).toBeCloseTo(1, 7);
    });
  });
});
