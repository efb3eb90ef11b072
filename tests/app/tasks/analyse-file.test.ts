import { describe, expect, test } from "vitest";
import { Cancelled } from "../../../app/base/index.ts";
import { resolveProtocol, resultSchema, type RunglineResult } from "../../../app/protocol/index.ts";
import { analyseFile, inspectFile, wordIssue } from "../../../app/tasks/index.ts";
import { analyseBytes, fixtureBytes, resultOf, RUN, SILENT } from "../../support/analyse-bytes.ts";
import { makeSpectrum, spectrumFile } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

const arsenide = PRESET_CASES[1]!;
const bytes = spectrumFile(
  makeSpectrum(arsenide.series, { ...arsenide.sampling, seed: 8 }),
  arsenide.sampling.sigma,
  arsenide.heading,
);
const choices = { material: { preset: arsenide.preset } };
/** As written to a file, without the one part that may differ. */
const written = ({ run: _, ...result }: RunglineResult): string => JSON.stringify(result);

interface Report {
  readonly fraction: number;
  readonly step: string;
}

describe("the main job", () => {
  test("gives the same bits twice", () => {
    const first = resultOf(bytes, choices);
    expect(written(resultOf(bytes, choices))).toBe(written(first));
    const other = analyseFile(
      { file: "test.csv", bytes, choices },
      { version: "9", node: "v99", started: "later" },
      { ...SILENT, seconds: () => 12 },
    );
    if (!other.ok) throw new Error("refused");
    expect(written(other.value.result)).toBe(written(first));
  });

  test("leaves the bytes and the choices as they were", () => {
    const before = [bytes.slice(), structuredClone(choices)] as const;
    resultOf(bytes, choices);
    expect(bytes).toEqual(before[0]);
    expect(choices).toEqual(before[1]);
  });

  test("gives a result that the schema accepts, also after a round through JSON", () => {
    const { result } = analyseBytes(bytes, choices);
    expect(resultSchema.parse(result)).toEqual(result);
    expect(resultSchema.parse(JSON.parse(JSON.stringify(result)))).toEqual(result);
  });

  test("gives a result that the schema accepts where no series is seen", () => {
    const flat = spectrumFile(
      makeSpectrum(
        { ...arsenide.series, strength: 0, continuumTop_eV: null },
        { ...arsenide.sampling, seed: 1 },
      ),
      arsenide.sampling.sigma,
      arsenide.heading,
    );
    const { result } = analyseBytes(flat, choices);
    expect(result.status).toBe("no-series");
    expect(resultSchema.parse(result)).toEqual(result);
  });

  test.each([
    ["a gallium arsenide file", bytes, choices],
    [
      "a transmission file with choices",
      fixtureBytes("demo/TH-B1_transmission.csv"),
      {
        material: { preset: "cuprous-oxide-yellow-p" },
        series: { fit_n: [5, 10] },
        background: [{ term: "polynomial", order: 1 }],
      },
    ],
  ])("repeats to the last bit from the protocol in its own result: %s", (_, file, chosen) => {
    const first = resultOf(file, chosen);
    const again = JSON.parse(JSON.stringify(first.protocol)) as unknown;
    const resolved = resolveProtocol(again);
    if (!resolved.ok) throw new Error("the protocol of a result was refused");
    expect(resolved.value).toEqual(first.protocol);
    expect(written(resultOf(file, again))).toBe(written(first));
  });

  test("tells where it is: from 0 to 1 and never back, in words", () => {
    const reports: Report[] = [];
    analyseBytes(bytes, choices, { ...SILENT, report: (fraction, step) => reports.push({ fraction, step }) });
    expect(reports[0]!.fraction).toBe(0);
    expect(reports[reports.length - 1]!.fraction).toBe(1);
    for (let i = 1; i < reports.length; i++)
      expect(reports[i]!.fraction, reports[i]!.step).toBeGreaterThanOrEqual(reports[i - 1]!.fraction);
    expect(reports.every(({ step }) => step.trim().length > 0)).toBe(true);
  });

  test("stops wherever it is told to, after any report and between them", () => {
    let reports = 0;
    let questions = 0;
    analyseBytes(bytes, choices, {
      ...SILENT,
      report: () => void reports++,
      cancelled: () => {
        questions++;
        return false;
      },
    });
    expect(questions).toBeGreaterThan(reports);
    // The last report says that all is done.
    for (let stopAt = 1; stopAt < reports; stopAt++) {
      let seen = 0;
      const watch = { ...SILENT, report: () => void seen++, cancelled: () => seen >= stopAt };
      expect(() => analyseBytes(bytes, choices, watch), `report ${stopAt} of ${reports}`).toThrow(Cancelled);
    }
    for (const part of [0, 0.2, 0.5, 0.8, 0.99]) {
      const stopAt = Math.floor(part * questions);
      let asked = 0;
      const watch = { ...SILENT, cancelled: () => asked++ >= stopAt };
      expect(() => analyseBytes(bytes, choices, watch), `question ${stopAt} of ${questions}`).toThrow(
        Cancelled,
      );
    }
  });

  test("gives curves on the points of the file, with the model where it was fitted", () => {
    const { result, curves } = analyseBytes(bytes, choices);
    const m = result.source.points;
    for (const one of [curves.energy_eV, curves.signal, curves.model, curves.background, curves.residual])
      expect(one).toHaveLength(m);
    let used = 0;
    let square = 0;
    for (let i = 0; i < m; i++) {
      if (curves.used[i] === 0) {
        expect(curves.model[i]).toBeNaN();
        continue;
      }
      used++;
      square += curves.residual[i]! ** 2;
      // Derived: definition of the residual.
      expect(curves.residual[i]! * curves.sigma[i]!).toBeCloseTo(curves.signal[i]! - curves.model[i]!, 6);
    }
    expect(used).toBe(result.reading.used_points);
    // Derived: chi square is the sum of squared residuals.
    expect(square / result.fit!.chi2).toBeCloseTo(1, 9);
    expect(curves.lines.map((line) => line.n)).toEqual(result.lines.map((line) => line.n));
  });
});

describe("what cannot be done is refused with words", () => {
  const refused = (file: Uint8Array, chosen: unknown): readonly string[] => {
    const answer = analyseFile({ file: "test.csv", bytes: file, choices: chosen }, RUN, SILENT);
    if (answer.ok) throw new Error("was taken");
    return answer.issues.map((issue) => {
      const { message, remedy } = wordIssue(issue);
      expect(message.length).toBeGreaterThan(5);
      expect(remedy.length).toBeGreaterThan(3);
      return issue.code;
    });
  };

  test("an unknown key, a bad value and an unknown preset", () => {
    expect(refused(bytes, { seires: {} })).toEqual(["protocol/unknown-key"]);
    expect(refused(bytes, { series: { mode: "loose" } })).toEqual(["protocol/bad-value"]);
    expect(refused(bytes, { material: { preset: "cuprous-oxyde" } })).toEqual(["protocol/unknown-preset"]);
  });

  test("no table at all", () => {
    expect(refused(new Uint8Array(0), {}).every((code) => code.startsWith("table/"))).toBe(true);
  });

  test("the same by inspection", () => {
    expect(inspectFile({ file: "test.csv", bytes: new Uint8Array(0), choices: {} }).ok).toBe(false);
    const inspection = inspectFile({ file: "test.csv", bytes, choices });
    if (!inspection.ok) throw new Error("refused");
    expect(inspection.value.spectrum.energy_eV).toHaveLength(inspection.value.rows);
  });
});
