import type { Watch } from "../base/index.ts";
import type { Protocol, RunglineResult } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import type { Curves } from "./curves.ts";

/** The result without what only a shell knows (version, clock). */
export type AnalysisResult = Omit<RunglineResult, "run"> & {
  readonly seconds: { guess: number; solve: number; uncertainty: number };
};

/**
 * The main job on one spectrum: find the lines, assign n, extend upward while significant, judge the background,
 * fit the laws, derive, and say every doubt. Pure: the same spectrum and protocol give the same bits.
 * Throws `Cancelled` when the watch says so.
 */
export function analyse(
  spectrum: Spectrum,
  protocol: Protocol,
  watch: Watch,
): { result: AnalysisResult; curves: Curves } {
  void spectrum;
  void protocol;
  void watch;
  throw new Error("not built yet");
}
