import { describe, expect, it } from "vitest";
import {
  findComparisonChoices,
  parseProtocolSource,
  parseResults,
  resultSchema,
  type ComparisonChoicesInput,
} from "../../../app/protocol/index.ts";
import { reportToHtml, REPORT_HTML_MARK, type ReportInput } from "../../../app/report/index.ts";
import { compareSamples } from "../../../app/tasks/index.ts";
import { samplePower } from "../../renderer/power-sample.ts";
import { reportCurves, reportSamples } from "../../support/report-samples.ts";

const RUN = { version: "0.1.0", node: "v20.0.0", started: "2026-01-02T03:04:05.000Z" };

function input(
  count: number,
  withCurves = false,
  choices: ComparisonChoicesInput = {},
  results = reportSamples(count),
): ReportInput {
  const compared = count > 1 ? compareSamples(results, choices, RUN) : null;
  if (compared !== null && !compared.ok) throw new Error(JSON.stringify(compared.issues));
  return {
    results,
    curves: results.map((result) => (withCurves ? reportCurves(result) : null)),
    comparison: compared === null ? null : compared.value,
    run: RUN,
  };
}

describe("a report", () => {
  const html = reportToHtml(input(2, true));

  it("holds job, samples, reading, protocol, figures, tables, notes, methods, versions, hashes and cautions", () => {
    expect(html.startsWith(REPORT_HTML_MARK)).toBe(true);
    for (const words of [
      "Exciton series of 2 samples",
      "Comparison",
      "Job and reading",
      "SHA-256",
      "Figures",
      "Lines",
      "Notes, the gravest first",
      "Methods and sources",
      "Golub and Pereyra",
      "Cautions",
      "Liquid helium",
      "To repeat the run",
    ])
      expect(html).toContain(words);
    // Derived: the gap of makeResult as formatQuantity prints it, groups parted by a thin space
    expect(html).toContain("2.172\u202f080\u202f0(12) eV");
  });

  it("stands alone: no script that runs, no link, picture or style from anywhere else", () => {
    expect(html).not.toMatch(/<(link|img|iframe|object|embed|audio|video|use)\b/i);
    expect(html).not.toMatch(/<script(?! type="application\/json")/);
    expect(html).not.toMatch(/\bon[a-z]+="/);
    expect(html).not.toMatch(/url\((?!#)/);
    expect(html).not.toMatch(/@import/);
    expect(html).not.toMatch(/(src|href)="(?!#)/);
    // The only addresses are names of XML.
    expect(html.replaceAll("http://www.w3.org/2000/svg", "")).not.toMatch(/https?:\/\//);
  });

  it("keeps names with marks of HTML as they are, in words and in the data", () => {
    expect(html).toContain("&lt;A1&gt; &amp; &quot;co&quot;");
    expect(html).not.toContain("<A1>");
  });

  it("is the same text for the same input", () => {
    expect(reportToHtml(input(2, true))).toBe(html);
    const later = reportToHtml({ ...input(2, true), run: { ...RUN, started: "2027-05-06T07:08:09.000Z" } });
    expect(later.replaceAll("2027-05-06T07:08:09.000Z", RUN.started)).toBe(html);
  });

  it("gives back its results bit for bit, and one protocol to repeat them", () => {
    const parsed = parseResults(html);
    expect(parsed.ok && parsed.value).toStrictEqual(input(2).results.map((one) => resultSchema.parse(one)));
    const source = parseProtocolSource(html);
    expect(source.ok && source.value.choices).toStrictEqual(input(2).results[0]!.protocol);
  });

  it("carries laws of temperature, the parts of quality, power series side by side, and how all were compared", () => {
    const power = samplePower().result.power!;
    const results = reportSamples(8).map((result, i) => ({
      ...result,
      power: i < 2 ? power : null,
      reading: {
        ...result.reading,
        facts: [
          { key: "sample", label: "Sample", text: i < 2 ? `S${i}` : "S9" },
          { key: "batch", label: "Batch", text: i === 0 ? "A" : "B" },
          { key: "temperature", label: "T", text: `${i < 2 ? 2 : 30 * i} K` },
        ],
      },
    }));
    const choices = { quality: { gap_eV: 2 } };
    const text = reportToHtml(input(8, false, choices, results));
    for (const words of [
      "Laws of temperature",
      "Figure of quality, from the weights that were given",
      "Figure of quality by the weights",
      "Power series by sample and batch",
      "Blockade volume, n = ",
      "temperature with the laws fitted to it; ",
    ])
      expect(text).toContain(words);
    expect(text).not.toMatch(/NaN|undefined/);
    expect(findComparisonChoices(text)).toMatchObject(choices);
    expect(parseResults(text).ok).toBe(true);
  });

  it("says where no curves were beside a result, and when a fit did not converge", () => {
    const [first] = reportSamples(1);
    const failed = { ...first!, status: "not-converged" as const };
    const text = reportToHtml({ results: [failed], curves: [null], comparison: null, run: RUN });
    expect(text).toContain("rungline fit --curves");
    expect(text).toContain("NOT CONVERGED");
    expect(text).not.toContain('id="comparison"');
  });

  it("of a file without a series has no figures and says so in its tables", () => {
    const [first] = reportSamples(1);
    const none = {
      ...first!,
      status: "no-series" as const,
      lines: [],
      series: null,
      systematic: null,
      width_law: null,
      strength_law: null,
      tail: null,
      derived: null,
    };
    const text = reportToHtml({ results: [none], curves: [null], comparison: null, run: RUN });
    expect(text).toContain("NO SERIES SEEN");
    expect(text).not.toContain("<figure");
  });

  it("of 20 samples with spectra of 9,000 points is smaller than 5 MB", () => {
    const text = reportToHtml(input(20, true, { quality: { gap_eV: 1, rydberg_eV: -1 } }));
    // Derived: what goes as an attachment; its time is a matter of tests/bench/report-bench.ts
    expect(new TextEncoder().encode(text).length).toBeLessThan(5e6);
  });
});
