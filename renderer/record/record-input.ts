import type { Comparison } from "../../app/protocol/index.ts";
import type { FittedCurves, ReportInput } from "../../app/report/index.ts";
import { gather, type Gathered } from "../store/gather.ts";
import type { Session } from "../store/session.ts";

export type RecordInput = Omit<ReportInput, "run">;

/** The part of a fit's curves that a record draws. */
function drawn({ energy_eV, signal, model, background, residual }: FittedCurves): FittedCurves {
  return { energy_eV, signal, model, background, residual };
}

/** What Batches shows; the same file fitted alike is there once. */
export function recorded(session: Session): readonly Gathered[] {
  const seen = new Set<string>();
  return gather(session).filter(({ shown, of, result: { source, protocol } }) => {
    if (of === "series") return false;
    const key = `${source.sha256} ${source.file} ${JSON.stringify(protocol)}`;
    return shown && !seen.has(key) && seen.add(key);
  });
}

/**
 * What the record is about: one file with its power series, one result that came alone, or all samples that Batches
 * shows, with their comparison.
 */
export function recordInput(session: Session, comparison: Comparison | null, of: string | null): RecordInput {
  const found =
    of === null ? recorded(session) : gather(session).filter((one) => one.id === of && one.of !== "series");
  const items = found.map(({ id, of: kind, result }) => ({
    result,
    curves: kind === "file" ? drawn(session.fits[id]!.analysed.curves) : null,
    spectra: null,
  }));
  const series = Object.entries(session.powerFits)
    .filter(([id, { fileIds }]) => of === null || id === of || fileIds.includes(of))
    .map(([, { analysed }]) => ({
      result: analysed.result,
      // The spectrum of a power series is that of its lowest power.
      curves: analysed.spectra[0] === undefined ? null : drawn(analysed.spectra[0].curves),
      spectra: analysed.spectra.map(({ power_uW, curves }) => ({ power_uW, curves: drawn(curves) })),
    }));
  const all = [...items, ...series];
  return {
    results: all.map(({ result }) => result),
    curves: all.map(({ curves }) => curves),
    spectra: all.map(({ spectra }) => spectra),
    comparison: of === null && found.length > 1 ? comparison : null,
  };
}

/** Whether two records would say the same, so that a preview is not written twice. */
export function sameRecord(one: RecordInput, other: RecordInput): boolean {
  return (
    one.comparison === other.comparison &&
    one.results.length === other.results.length &&
    one.results.every((result, i) => result === other.results[i])
  );
}
