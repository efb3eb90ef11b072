import { describe, expect, it } from "vitest";
import { countReport } from "../count-report.mjs";

describe("the last line of npm test", () => {
  const file = (status: string, ...tests: string[]): object => ({
    status,
    assertionResults: tests.map((one) => ({ status: one })),
  });

  it("counts passed, failed and skipped tests over all files", () => {
    const testResults = [
      file("passed", "passed", "passed", "pending"),
      file("failed", "passed", "failed", "todo"),
    ];
    expect(countReport({ testResults })).toStrictEqual({ passed: 3, failed: 1, skipped: 2 });
  });

  it("counts a file that could not be loaded as one failure", () => {
    expect(countReport({ testResults: [file("failed"), file("failed", "passed")] })).toStrictEqual({
      passed: 1,
      failed: 2,
      skipped: 0,
    });
  });
});
