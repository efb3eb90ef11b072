import { useEffect, useState } from "react";
import { Button } from "react-aria-components";
import {
  FIGURE_DPI,
  FULL_WIDTH_MM,
  ONE_COLUMN_MM,
  OWN_SIZE,
  type FigureKind,
} from "../../app/report/index.ts";
import type { MadeFigures } from "../../app/tasks/index.ts";
import { Pick, Segments } from "../controls/choices.tsx";
import type { RunningJob } from "../jobs/job-client.ts";
import { useController } from "../store/context.ts";
import type { RecordInput } from "./record-input.ts";

const ALL = "";

const KINDS: readonly { readonly value: FigureKind; readonly text: string }[] = [
  { value: "pdf", text: "PDF" },
  { value: "svg", text: "SVG" },
  { value: "png", text: "PNG" },
];

/** Between one column and the page: common with journals that set wide columns. */
const MIDDLE_MM = 120;
const OWN = "own";
const WIDTHS: readonly { readonly value: string; readonly text: string }[] = [
  { value: OWN, text: "own width" },
  { value: String(ONE_COLUMN_MM), text: `column, ${ONE_COLUMN_MM} mm` },
  { value: String(MIDDLE_MM), text: `between, ${MIDDLE_MM} mm` },
  { value: String(FULL_WIDTH_MM), text: `page, ${FULL_WIDTH_MM} mm` },
];

/** One figure or all, as files for a paper: kind, width in print, dots an inch. */
export function FiguresAlone({ input }: { readonly input: RecordInput }) {
  const controller = useController();
  const names = useNames(input);
  const [chosen, setChosen] = useState(ALL);
  const [kind, setKind] = useState<FigureKind>("pdf");
  const [width, setWidth] = useState(OWN);
  const [dpi, setDpi] = useState(String(OWN_SIZE.dpi));
  const [making, setMaking] = useState<{
    readonly job: RunningJob<MadeFigures>;
    readonly share: number;
  } | null>(null);
  const name = names.includes(chosen) ? chosen : ALL;
  const save = (): void => {
    const job = controller.makeFigures(
      input,
      {
        name: name === ALL ? null : name,
        kind,
        choices: { width_mm: width === OWN ? null : Number(width), dpi: Number(dpi) },
      },
      (share) => setMaking((now) => (now === null ? null : { ...now, share })),
    );
    setMaking({ job, share: 0 });
    void job.outcome.then(async (outcome) => {
      setMaking(null);
      if (outcome.kind === "done") await controller.saveFigures(outcome.value);
      else if (outcome.kind === "fault")
        controller.say(true, `a fault of Rungline: ${outcome.message}`, "keep the results and report it");
    });
  };
  return (
    <section className="figures-alone" aria-label="Figures alone">
      <h3>Figures alone</h3>
      <Pick
        label="Figure"
        value={name}
        options={[
          { value: ALL, text: names.length === 0 ? "all figures" : `all ${names.length} figures` },
          ...names.map((one) => ({ value: one, text: one })),
        ]}
        onPick={setChosen}
      />
      <Segments label="Kind of file" value={kind} options={KINDS} onPick={setKind} />
      <div className="figures-size">
        <Pick label="Width in print" value={width} options={WIDTHS} onPick={setWidth} />
        {kind === "png" && (
          <Pick
            label="Dots an inch"
            value={dpi}
            options={FIGURE_DPI.map((one) => ({ value: String(one), text: `${one} dpi` }))}
            onPick={setDpi}
          />
        )}
      </div>
      {making === null ? (
        <Button className="button" isDisabled={names.length === 0} onPress={save}>
          {name === ALL ? "Save the figures" : "Save the figure"}
        </Button>
      ) : (
        <div className="figures-making">
          <progress max={1} value={making.share} aria-label="Figures written" />
          <Button className="button" onPress={() => making.job.cancel()}>
            Stop
          </Button>
        </div>
      )}
    </section>
  );
}

/** Names of all figures of the record, found in the worker; none until they are. */
function useNames(input: RecordInput): readonly string[] {
  const controller = useController();
  const [names, setNames] = useState<readonly string[]>([]);
  useEffect(() => {
    let left = false;
    void controller.figureNames(input).then((outcome) => {
      if (!left) setNames(outcome.kind === "done" ? outcome.value : []);
    });
    return () => {
      left = true;
    };
  }, [controller, input]);
  return names;
}
