import { quotedLevels } from "../../app/protocol/index.ts";
import { formatQuantity } from "../../app/report/index.ts";
import { batchesOf, gather } from "../store/gather.ts";
import { recorded } from "../record/record-input.ts";
import {
  currentComparison,
  currentFile,
  currentFit,
  currentPower,
  currentSeriesId,
  currentReading,
  fitIsOld,
  powerIsOld,
  useController,
  useWindow,
} from "../store/context.ts";
import type { Stage, WindowState } from "../store/store.ts";

export type Mark = "done" | "doubt" | "not-yet" | "busy" | "refused";

interface StageState {
  readonly stage: Stage;
  readonly title: string;
  readonly mark: Mark;
  readonly words: string;
}

const MARKS: Readonly<Record<Mark, string>> = {
  done: "●",
  doubt: "▲",
  "not-yet": "○",
  busy: "◐",
  refused: "✕",
};
const MARK_WORDS: Readonly<Record<Mark, string>> = {
  done: "done",
  doubt: "in doubt",
  "not-yet": "not yet",
  busy: "at work",
  refused: "refused",
};

/** The way from file to ladder and on to power, batches and record, each stage with its state in words and mark. */
export function StagePath() {
  const controller = useController();
  const shown = useWindow((state) => state.stage);
  const reading = useWindow(readState);
  const lines = useWindow(linesState);
  const ladder = useWindow(ladderState);
  const readingMark = useWindow(readMark);
  const linesMark = useWindow(linesMarkOf);
  const ladderMark = useWindow(ladderMarkOf);
  const power = useWindow(powerState);
  const powerMark = useWindow(powerMarkOf);
  const batches = useWindow(batchesState);
  const batchesMark = useWindow(batchesMarkOf);
  const record = useWindow(recordState);
  const recordMark = useWindow(recordMarkOf);
  const stages: readonly StageState[] = [
    { stage: "read", title: "Read", mark: readingMark, words: reading },
    { stage: "lines", title: "Lines", mark: linesMark, words: lines },
    { stage: "ladder", title: "Ladder", mark: ladderMark, words: ladder },
    { stage: "power", title: "Power", mark: powerMark, words: power },
    { stage: "batches", title: "Batches", mark: batchesMark, words: batches },
    { stage: "record", title: "Record", mark: recordMark, words: record },
  ];
  return (
    <nav className="path" aria-label="Stages">
      <ol>
        {stages.map(({ stage, title, mark, words }) => (
          <li key={stage}>
            <button
              type="button"
              className="path-stage"
              aria-current={shown === stage ? "step" : undefined}
              data-stage={stage}
              data-state={mark}
              onClick={() => controller.show(stage)}
            >
              <span className="path-mark" data-mark={mark} role="img" aria-label={MARK_WORDS[mark]}>
                {MARKS[mark]}
              </span>
              <span className="path-title">{title}</span>
              <span className="path-words">{words}</span>
            </button>
          </li>
        ))}
      </ol>
    </nav>
  );
}

function readMark(state: WindowState): Mark {
  const reading = currentReading(state);
  if (currentFile(state) === null || reading === null) return "not-yet";
  if (reading.state === "reading") return "busy";
  if (reading.state === "refused") return "refused";
  return reading.inspection.spectrum.notes.some((note) => note.level === "doubt") ? "doubt" : "done";
}

function readState(state: WindowState): string {
  const reading = currentReading(state);
  if (currentFile(state) === null || reading === null) return "no file";
  if (reading.state === "reading") return "reading";
  if (reading.state === "refused") return "not a spectrum";
  return `${reading.inspection.spectrum.energy_eV.length} points`;
}

function linesMarkOf(state: WindowState): Mark {
  const fit = currentFit(state);
  if (isFitting(state)) return "busy";
  if (refused(state)) return "refused";
  if (fit === null) return "not-yet";
  const { result } = fit.analysed;
  const doubt = result.notes.some(
    ({ level, about }) => level === "doubt" && /^(lines|fit|background|tail)/.test(about),
  );
  return fitIsOld(state) || result.status === "not-converged" || doubt ? "doubt" : "done";
}

function linesState(state: WindowState): string {
  const fit = currentFit(state);
  if (isFitting(state)) return `fitting ${Math.round(100 * (state.job?.fraction ?? 0))} %`;
  if (refused(state)) return "refused";
  if (fit === null) return "not fitted";
  if (fitIsOld(state)) return "choices changed";
  const { result } = fit.analysed;
  if (result.status === "not-converged") return "not converged";
  return `${result.lines.length} ${result.lines.length === 1 ? "line" : "lines"}`;
}

function ladderMarkOf(state: WindowState): Mark {
  const fit = currentFit(state);
  if (fit === null || fit.analysed.result.series === null) return "not-yet";
  const doubt = fit.analysed.result.notes.some(
    ({ level, about }) => level === "doubt" && /^(series|width_law|strength_law|derived)/.test(about),
  );
  return fitIsOld(state) || doubt ? "doubt" : "done";
}

function ladderState(state: WindowState): string {
  const fit = currentFit(state);
  if (fit === null) return "no series yet";
  const { series } = fit.analysed.result;
  if (series === null) return "no series seen";
  const gap = quotedLevels(series).gap_eV;
  return formatQuantity(gap.value, gap.sigma, "eV", { groupSpace: "\u2009" });
}

function powerMarkOf(state: WindowState): Mark {
  const id = currentSeriesId(state);
  if (isFittingPower(state)) return "busy";
  if (id !== null && state.powerRefusals[id] !== undefined) return "refused";
  const fit = currentPower(state);
  if (fit === null) return "not-yet";
  const doubt = fit.analysed.result.notes.some(
    ({ level, about }) => level === "doubt" && /^power/.test(about),
  );
  return powerIsOld(state) || fit.analysed.result.status !== "converged" || doubt ? "doubt" : "done";
}

function powerState(state: WindowState): string {
  const id = currentSeriesId(state);
  if (isFittingPower(state)) return `fitting ${Math.round(100 * (state.job?.fraction ?? 0))} %`;
  if (id !== null && state.powerRefusals[id] !== undefined) return "refused";
  const fit = currentPower(state);
  if (fit === null) return "no series yet";
  if (powerIsOld(state)) return "choices changed";
  const { power, status } = fit.analysed.result;
  if (power === null || power === undefined || status !== "converged") return status.replace("-", " ");
  const seen = power.lines.filter(({ reading }) => reading === "bleaches").length;
  return `${power.spectra.length} powers, ${seen} bleach`;
}

function batchesMarkOf(state: WindowState): Mark {
  const { compared, session } = state;
  if (state.job?.what === "all" || compared?.state === "working") return "busy";
  if (compared?.state === "refused") return "refused";
  const comparison = currentComparison(state);
  if (comparison === null) return "not-yet";
  const old = gather(session).some((one) => one.shown && one.old);
  return old || comparison.notes.some(({ level }) => level === "doubt") ? "doubt" : "done";
}

function batchesState(state: WindowState): string {
  if (state.job?.what === "all") return `fitting ${state.job.step}`;
  if (state.compared?.state === "refused") return "refused";
  const comparison = currentComparison(state);
  if (comparison === null) {
    const found = gather(state.session).length;
    return found === 0 ? "no sample yet" : found === 1 ? "one sample" : "filtered out";
  }
  if (comparison.samples.length === 1) return "one sample";
  const batches = batchesOf(gather(state.session).filter(({ shown }) => shown)).length;
  return `${comparison.samples.length} in ${batches} ${batches === 1 ? "batch" : "batches"}`;
}

function recordMarkOf({ session }: WindowState): Mark {
  const shown = recorded(session);
  if (shown.length === 0) return "not-yet";
  return shown.some(({ old, result }) => old || result.notes.some(({ level }) => level === "doubt"))
    ? "doubt"
    : "done";
}

function recordState({ session }: WindowState): string {
  const shown = recorded(session);
  if (shown.length === 0) return "nothing to keep";
  if (shown.some(({ old }) => old)) return "choices changed";
  return shown.length === 1 ? "one result" : `${shown.length} results`;
}

const isFittingPower = (state: WindowState): boolean =>
  state.job !== null && state.job.what === "power" && state.job.fileId === currentSeriesId(state);
const isFitting = (state: WindowState): boolean =>
  state.job !== null && state.job.what !== "power" && state.job.fileId === state.session.currentId;
const refused = (state: WindowState): boolean =>
  state.session.currentId !== null && state.refusals[state.session.currentId] !== undefined;
