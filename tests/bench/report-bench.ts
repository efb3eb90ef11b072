/**
 * A report of many samples with their spectra: `npx tsx tests/bench/report-bench.ts [samples]`.
 * Wall time of the second of two runs and size. Bar: 20 samples with 9,000 points each in 5 s.
 */
import { reportToHtml } from "../../app/report/index.ts";
import { compareSamples } from "../../app/tasks/index.ts";
import { reportCurves, reportSamples } from "../support/report-samples.ts";

const samples = Number(process.argv[2] ?? 20);
const run = { version: "0.0.0", node: process.version, started: "2026-01-01T00:00:00.000Z" };
const results = reportSamples(samples);
const compared = compareSamples(results, { quality: { gap_eV: 1, rydberg_eV: -1 } }, run);
if (!compared.ok) throw new Error(JSON.stringify(compared.issues));
const input = { results, curves: results.map(reportCurves), comparison: compared.value, run };
reportToHtml(input);
const began = performance.now();
const html = reportToHtml(input);
const seconds = (performance.now() - began) / 1000;
process.stdout.write(
  `${samples} samples: ${seconds.toFixed(2)} s, ${(new TextEncoder().encode(html).length / 1e6).toFixed(2)} MB\n`,
);
