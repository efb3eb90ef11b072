import { useEffect, useMemo, useRef, useState } from "react";
import type { Note } from "../../app/base/index.ts";
import { comparisonNotes, gravestFirst } from "../../app/report/index.ts";
import {
  currentComparison,
  currentFit,
  currentPower,
  currentReading,
  useController,
  useWindow,
} from "../store/context.ts";
import type { Message } from "../store/store.ts";

interface Line {
  readonly key: string;
  readonly mark: "refused" | "doubt" | "assumption" | "said";
  readonly about: string;
  readonly text: string;
  readonly remedy: string;
  readonly dismiss?: number;
}

const MARKS = { refused: "✕", doubt: "▲", assumption: "◇", said: "·" } as const;
const MARK_WORDS = { refused: "fault", doubt: "doubt", assumption: "assumed", said: "said" } as const;

/** One line, the gravest note first; it opens to all. */
export function NotesLine() {
  const controller = useController();
  const fit = useWindow((state) => (state.stage === "power" ? currentPower(state) : currentFit(state)));
  const reading = useWindow(currentReading);
  const messages = useWindow((state) => state.messages);
  const comparison = useWindow((state) => (state.stage === "batches" ? currentComparison(state) : null));
  const [open, setOpen] = useState(false);
  const panel = useRef<HTMLDivElement>(null);
  const lines = useMemo((): readonly Line[] => {
    if (comparison !== null)
      return [...messages.map(ofMessage), ...gravestFirst(comparisonNotes(comparison)).map(ofNote)];
    const read = reading?.state === "read" ? reading.inspection.spectrum.notes : [];
    const fitted = fit?.analysed.result.notes ?? [];
    const known = new Set(fitted.map((note) => note.code));
    const notes = gravestFirst([...fitted, ...read.filter((note) => !known.has(note.code))]);
    const said = messages.map(ofMessage);
    const refusals: Line[] =
      reading?.state === "refused"
        ? reading.wordings.map(({ message, remedy }, i) => ({
            key: `refused ${i}`,
            mark: "refused",
            about: "source",
            text: message,
            remedy,
          }))
        : [];
    return [
      ...said.filter(({ mark }) => mark === "refused"),
      ...refusals,
      ...said.filter(({ mark }) => mark === "said"),
      ...notes.map(ofNote),
    ];
  }, [fit, reading, messages, comparison]);
  useEffect(() => {
    if (open) panel.current?.focus();
  }, [open]);
  const first = lines[0];
  const doubts = lines.filter(({ mark }) => mark === "doubt").length;
  const refused = lines.filter(({ mark }) => mark === "refused").length;
  return (
    <footer className="notes" data-state={open ? "open" : "closed"} data-count={lines.length}>
      {open && (
        <div
          className="notes-all"
          ref={panel}
          tabIndex={0}
          role="region"
          aria-label="All notes"
          id="notes-all"
          onKeyDown={(event) => {
            if (event.key === "Escape") setOpen(false);
          }}
        >
          {lines.length === 0 ? <p className="small">Nothing to say.</p> : null}
          <ul>
            {lines.map((line) => (
              <li key={line.key} data-mark={line.mark}>
                <NoteMark mark={line.mark} />
                <div>
                  <p>
                    {line.about !== "" && <span className="note-about">{aboutWords(line.about)}</span>}{" "}
                    {line.text}
                  </p>
                  {line.remedy !== "" && <p className="small">{line.remedy}</p>}
                </div>
                {line.dismiss !== undefined && (
                  <button
                    type="button"
                    className="quiet"
                    aria-label="Dismiss"
                    onClick={() => controller.dismiss(line.dismiss!)}
                  >
                    ✕
                  </button>
                )}
              </li>
            ))}
          </ul>
        </div>
      )}
      <button
        type="button"
        className="notes-line"
        aria-expanded={open}
        aria-controls="notes-all"
        onClick={() => setOpen(!open)}
      >
        {first === undefined ? (
          <span className="notes-first">No notes</span>
        ) : (
          <>
            <NoteMark mark={first.mark} />
            <span className="notes-first">
              {first.about !== "" && <span className="note-about">{aboutWords(first.about)}</span>}{" "}
              {first.text}
            </span>
          </>
        )}
        <span className="notes-count">
          {lines.length} {lines.length === 1 ? "note" : "notes"}
          {refused > 0 && `, ${refused} in the way`}
          {doubts > 0 && `, ${doubts} in doubt`} {open ? "▾" : "▴"}
        </span>
      </button>
      <div className="hidden" role="status" aria-live="polite">
        {messages[0]?.text ?? ""}
      </div>
    </footer>
  );
}

function NoteMark({ mark }: { readonly mark: Line["mark"] }) {
  return (
    <span className="note-mark" data-mark={mark} role="img" aria-label={MARK_WORDS[mark]}>
      {MARKS[mark]}
    </span>
  );
}

function ofMessage({ id, grave, text, remedy }: Message): Line {
  return {
    key: `message ${id}`,
    mark: grave ? "refused" : "said",
    about: "",
    text,
    remedy,
    dismiss: id,
  };
}

function ofNote(note: Note): Line {
  return {
    key: `${note.code} ${note.about}`,
    mark: note.level === "doubt" ? "doubt" : "assumption",
    about: note.about,
    text: note.text,
    remedy: note.remedy,
  };
}

const ABOUT: readonly (readonly [RegExp, string])[] = [
  [/^series\.gap_eV/, "Gap"],
  [/^series\.rydberg_eV/, "Rydberg energy"],
  [/^series\.defect/, "Quantum defect"],
  [/^series/, "Series"],
  [/^lines/, "Lines"],
  [/^width_law/, "Width law"],
  [/^strength_law/, "Strength law"],
  [/^tail/, "Tail"],
  [/^derived/, "Derived"],
  [/^background/, "Background"],
  [/^parameters\.gap/, "Gap"],
  [/^parameters\.rydberg/, "Rydberg energy"],
  [/^parameters\.defect/, "Quantum defect"],
  [/^parameters\.width/, "Width law"],
  [/^parameters/, "Comparison"],
  [/^samples/, "Samples"],
  [/^temperature/, "Temperature"],
  [/^power\.lines/, "Bleaching"],
  [/^power/, "Power"],
  [/^fit/, "Fit"],
  [/^systematic/, "Systematic"],
  [/^(source|axis|reading)/, "Reading"],
  [/^(signal)/, "Signal"],
  [/^(protocol\.)?material/, "Material"],
  [/^protocol/, "Protocol"],
];

/** The dotted path of a note in words. */
export function aboutWords(about: string): string {
  return `${ABOUT.find(([pattern]) => pattern.test(about))?.[1] ?? about}:`;
}
