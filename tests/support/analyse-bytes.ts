import { readFileSync } from "node:fs";
import type { Watch } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { analyseFile, type AnalysedFile } from "../../app/tasks/index.ts";

export const SILENT: Watch = { report: () => undefined, cancelled: () => false, seconds: () => 0 };
export const RUN = { version: "0.0.0", node: "v0", started: "2026-01-01T00:00:00Z" };

/** The main job on the bytes of a file; an input that cannot be read is a fault of the test. */
export function analyseBytes(bytes: Uint8Array, choices: unknown, watch = SILENT): AnalysedFile {
  const analysed = analyseFile({ file: "test.csv", bytes, choices }, RUN, watch);
  if (!analysed.ok) throw new Error(JSON.stringify(analysed.issues));
  return analysed.value;
}

export function resultOf(bytes: Uint8Array, choices: unknown): RunglineResult {
  return analyseBytes(bytes, choices).result;
}

const fixtures = new URL("../../fixtures/", import.meta.url);

export function fixtureBytes(path: string): Uint8Array {
  return readFileSync(new URL(path, fixtures));
}

export function fixtureJson<T>(path: string): T {
  return JSON.parse(readFileSync(new URL(path, fixtures), "utf8")) as T;
}

/** Codes of the doubts of a result. */
export function doubtsOf(result: RunglineResult): string[] {
  return result.notes.filter((note) => note.level === "doubt").map((note) => note.code);
}

/** (value - truth)/sigma. */
export function pullOf(
  quantity: { readonly value: number | null; readonly sigma: number | null },
  truth: number,
): number {
  if (quantity.value === null || quantity.sigma === null) throw new Error("not determined");
  return (quantity.value - truth) / quantity.sigma;
}
