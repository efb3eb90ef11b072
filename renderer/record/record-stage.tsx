import { useEffect, useRef, useState } from "react";
import { Button } from "react-aria-components";
import { CRYOGEN_CAUTION, LASER_CAUTION, gravestFirst } from "../../app/report/index.ts";
import type { RecordPart } from "../../app/tasks/index.ts";
import { FitAllButton } from "../controls/fit-all-button.tsx";
import { gather } from "../store/gather.ts";
import { Clause, Pick, Sentence } from "../controls/choices.tsx";
import { EmptyPlace } from "../frame/empty-place.tsx";
import { currentComparison, useController, useWindow } from "../store/context.ts";
import { FiguresAlone } from "./figures-alone.tsx";
import { recordInput, sameRecord, type RecordInput } from "./record-input.ts";
import { ReportPreview } from "./report-preview.tsx";

const ALL = "";

const PARTS: readonly { readonly part: RecordPart; readonly text: string; readonly kind: string }[] = [
  { part: "csv", text: "Tables", kind: "CSV" },
  { part: "latex", text: "Tables", kind: "LaTeX" },
  { part: "results", text: "Results", kind: "JSON" },
  { part: "protocol", text: "Protocol", kind: "JSON" },
];

type Preview =
  | { readonly state: "writing"; readonly html: string | null }
  | { readonly state: "written"; readonly html: string }
  | { readonly state: "failed"; readonly message: string };

/** What will be kept: the report as it will stand in its file, and everything that can be had apart from it. */
export function RecordStage() {
  const controller = useController();
  const session = useWindow((state) => state.session);
  const comparison = useWindow(currentComparison);
  const of = useWindow((state) => state.recordOf);
  const gathered = gather(session);
  const about = of !== null && gathered.some(({ id }) => id === of) ? of : null;
  const input = useSteady(recordInput(session, comparison, about));
  const preview = usePreview(input);
  if (session.files.length === 0 && session.results.length === 0) return <EmptyPlace />;
  if (input.results.length === 0)
    return (
      <div className="stage-unfitted" data-state="not-yet">
        <div className="stage-message">
          <h2>Nothing to keep yet</h2>
          <p>
            {gathered.length > 0
              ? "The filters in Batches leave no sample: widen them, or choose one sample here."
              : "The record is written from fits: fit the files of the drawer."}
          </p>
          {gathered.length > 0 ? (
            <Button className="button" onPress={() => controller.show("batches")}>
              To Batches
            </Button>
          ) : (
            <FitAllButton />
          )}
        </div>
      </div>
    );
  const { results } = input;
  const doubts = results.flatMap(({ notes }) => notes.filter(({ level }) => level === "doubt")).length;
  return (
    <div className="record" data-state={preview.state}>
      <div className="record-middle">
        <div className="choices">
          <Sentence label="What the record is about">
            <Clause>
              Record of{" "}
              <Pick
                label="Samples of the record"
                value={about ?? ALL}
                options={[
                  { value: ALL, text: "all samples shown in Batches" },
                  ...gathered.map(({ id, named, result }) => ({
                    value: id,
                    text: named.sample === id ? id : `${named.sample}, ${result.source.file}`,
                  })),
                ]}
                onPick={(id) => controller.recordOf(id === ALL ? null : id)}
              />
              :
            </Clause>
            <Clause>
              {results.length === 1 ? "one result" : `${results.length} results`}
              {input.comparison === null ? "" : " and their comparison"},
            </Clause>
            <Clause>{doubts === 0 ? "no doubt" : doubts === 1 ? "one doubt" : `${doubts} doubts`}.</Clause>
          </Sentence>
        </div>
        <div className="record-place" tabIndex={0} role="region" aria-label="Report">
          {preview.state === "failed" ? (
            <div className="refusal" role="alert">
              <strong>The report could not be written: {preview.message}</strong>
            </div>
          ) : preview.html === null ? (
            <div className="stage-message">
              <p>Writing the report</p>
            </div>
          ) : (
            <ReportPreview html={preview.html} />
          )}
        </div>
      </div>
      <Keep input={input} ready={preview.state === "written"} />
    </div>
  );
}

function Keep({ input, ready }: { readonly input: RecordInput; readonly ready: boolean }) {
  const controller = useController();
  const [saving, setSaving] = useState<RecordPart | null>(null);
  const save = (part: RecordPart): void => {
    setSaving(part);
    void controller.saveRecord(input, part).then(() => setSaving(null));
  };
  const { results, comparison } = input;
  const first = gravestFirst(results.flatMap(({ notes }) => notes)).filter(({ level }) => level === "doubt");
  return (
    <aside className="record-keep" aria-label="What is kept" tabIndex={0}>
      <section>
        <h3>The whole</h3>
        <p className="small">
          One file that stands alone: reading, protocol, figures, tables, notes, methods, versions and hashes.
          It opens without a network, prints, and can be dropped here again.
        </p>
        <div className="record-pair">
          <Button
            className="button button-main"
            isDisabled={!ready || saving !== null}
            onPress={() => save("report")}
          >
            Save the report
          </Button>
          <Button className="button" isDisabled={!ready} onPress={() => window.print()}>
            Print
          </Button>
        </div>
      </section>
      <FiguresAlone input={input} />
      <section>
        <h3>Its parts</h3>
        <div className="record-parts">
          {PARTS.map(({ part, text, kind }) => (
            <Button
              key={part}
              className="button record-part"
              aria-label={`Save ${text.toLowerCase()}, ${kind}`}
              isDisabled={saving !== null}
              onPress={() => save(part)}
            >
              {text} <span className="small">{kind}</span>
            </Button>
          ))}
        </div>
      </section>
      <section>
        <h3>From</h3>
        <ul className="small">
          {results.map(({ source, status, power }, i) => (
            <li key={i}>
              {source.file}
              {(power ?? null) === null ? "" : ", power series"}
              {status === "converged" ? "" : `, ${status.replace("-", " ")}`}
            </li>
          ))}
          {comparison !== null && <li>comparison of {comparison.samples.length} samples</li>}
        </ul>
      </section>
      {first.length > 0 && (
        <section>
          <h3>Said with it</h3>
          <p className="small">
            <span className="mark-doubt">▲</span> {first[0]!.text}
          </p>
        </section>
      )}
      <section>
        <p className="small" role="note">
          {LASER_CAUTION} {CRYOGEN_CAUTION}
        </p>
      </section>
    </aside>
  );
}

/** The same object as long as the record would say the same. */
function useSteady(input: RecordInput): RecordInput {
  const [steady, setSteady] = useState(input);
  if (steady === input || sameRecord(steady, input)) return steady;
  setSteady(input);
  return input;
}

/** The report, written in the worker; the one before stays until the new one is there. */
function usePreview(input: RecordInput): Preview {
  const controller = useController();
  const [preview, setPreview] = useState<Preview>({ state: "writing", html: null });
  const asked = useRef(0);
  useEffect(() => {
    if (input.results.length === 0) return;
    const turn = ++asked.current;
    void controller.makeRecord(input, "report").then((outcome) => {
      if (turn !== asked.current) return;
      setPreview(
        outcome.kind === "done"
          ? { state: "written", html: new TextDecoder().decode(outcome.value.bytes) }
          : { state: "failed", message: outcome.kind === "fault" ? outcome.message : outcome.kind },
      );
    });
    return () => {
      setPreview((before) => ({
        state: "writing",
        html: before.state === "failed" ? null : before.html,
      }));
    };
  }, [controller, input]);
  return preview;
}
