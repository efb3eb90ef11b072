import { useMemo, useState, type ReactNode, type Ref } from "react";
import { Button } from "react-aria-components";
import { Group, Panel, Separator } from "react-resizable-panels";
import { CRYOGEN_CAUTION, LASER_CAUTION } from "../../app/report/index.ts";
import { Segments } from "../controls/choices.tsx";
import { EmptyPlace } from "../frame/empty-place.tsx";
import { StageFrame } from "../frame/stage-frame.tsx";
import { usePalette } from "../frame/theme.ts";
import { Ledger } from "../ledger/ledger.tsx";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import {
  currentFile,
  currentPower,
  currentSeries,
  currentSeriesId,
  useController,
  useWindow,
} from "../store/context.ts";
import { DemoSeriesButton } from "./demo-series-button.tsx";
import { CrystalTable } from "./crystal-table.tsx";
import { PowerChoices } from "./power-choices.tsx";
import { powerFigure, type PowerPanel } from "./power-figure.ts";
import { Budget, Inputs } from "./power-inputs.tsx";
import { powerLedger } from "./power-ledger.ts";

/** Many spectra of one sample against power: bleaching, blockade, and what the crystal is good for. */
export function PowerStage({ figureRef }: { readonly figureRef: Ref<FigureHandle> }) {
  const controller = useController();
  const file = useWindow(currentFile);
  const fitted = useWindow(currentPower);
  const palette = usePalette();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const [panel, setPanel] = useState<PowerPanel>("all");
  const analysed = fitted?.analysed ?? null;
  const power = analysed?.result.power ?? null;
  const figure = useMemo(
    () => (analysed === null ? null : powerFigure(analysed, palette, panel)),
    [analysed, palette, panel],
  );
  const sections = useMemo(
    () => (analysed === null ? [] : powerLedger(analysed.result, selected)),
    [analysed, selected],
  );
  if (file === null) return <EmptyPlace />;
  if (analysed === null || figure === null || power === null) return <Unseen />;
  const drawing = (
    <Figure
      ref={figureRef}
      figure={figure}
      lit={pointed ?? selected}
      onPoint={(_, n) => controller.point(n)}
      onChoose={(_, n) => {
        if (n !== null) controller.select(n);
      }}
    />
  );
  return (
    <StageFrame
      choices={
        <>
          <PowerChoices />
          <Cautions />
        </>
      }
      tools={
        <>
          <Segments<PowerPanel>
            label="Plots"
            value={panel}
            options={[
              { value: "all", text: "All" },
              { value: "bleaching", text: "Bleaching" },
              { value: "scaling", text: "Scaling" },
              { value: "volumes", text: "Volumes" },
              { value: "spectra", text: "Spectra", disabled: analysed.spectra.length === 0 },
              { value: "other", text: "Shifts" },
              { value: "crystal", text: "What for" },
            ]}
            onPick={setPanel}
          />
          <Key panel={panel} />
        </>
      }
      figure={
        panel === "crystal" ? (
          <Group orientation="vertical" id="crystal-split">
            <Panel id="crystal-figure" defaultSize="50%" minSize="25%">
              {drawing}
            </Panel>
            <Separator className="split split-flat" aria-label="Height of the table" />
            <Panel id="crystal-table" defaultSize="50%" minSize="15%">
              <CrystalTable crystal={power.crystal} />
            </Panel>
          </Group>
        ) : (
          drawing
        )
      }
      ledger={
        panel === "crystal" || panel === "volumes" ? (
          <>
            <Budget power={power} />
            <Inputs power={power} />
          </>
        ) : (
          <>
            <Ledger sections={sections} />
            <Budget power={power} />
          </>
        )
      }
    />
  );
}

/** Beside the powers, always: what light and cold can do. */
function Cautions() {
  return (
    <p className="small cautions" role="note">
      {LASER_CAUTION} {CRYOGEN_CAUTION}
    </p>
  );
}

const KEYS: Readonly<Partial<Record<PowerPanel, readonly (readonly [string, string])[]>>> = {
  all: [
    ["fitted", "fitted"],
    ["expected", "expected"],
    ["ideal", "ideal"],
    ["limit", "limit"],
  ],
  bleaching: [["line", "data and law by n"]],
  scaling: [
    ["fitted", "fitted"],
    ["expected", "predicted from widths and areas"],
    ["ideal", "ideal"],
    ["limit", "upper limit"],
  ],
  volumes: [
    ["line", "measured"],
    ["expected", "expected"],
    ["ideal", "ideal"],
    ["limit", "upper limit"],
  ],
  spectra: [
    ["data", "data"],
    ["model", "model, highest power"],
  ],
  crystal: [
    ["ideal", "orbit"],
    ["limit-round", "hollow: expected"],
  ],
};

function Key({ panel }: { readonly panel: PowerPanel }) {
  const shown = KEYS[panel];
  return shown === undefined ? null : (
    <ul className="key" aria-label="Key">
      {shown.map(([key, words]) => (
        <li key={key} data-key={key}>
          {words}
        </li>
      ))}
    </ul>
  );
}

/** No fit of a series yet: what to do next, or why the last try was refused. */
function Unseen() {
  const controller = useController();
  const file = useWindow(currentFile)!;
  const series = useWindow(currentSeries);
  const id = useWindow(currentSeriesId);
  const refusals = useWindow((state) => (id === null ? undefined : state.powerRefusals[id]));
  const fitting = useWindow(
    (state) => state.job !== null && state.job.what === "power" && state.job.fileId === id,
  );
  const powers = useWindow((state) => state.session.files.length);
  const seriesless = useWindow((state) => currentPower(state)?.analysed.result.status === "no-series");
  let said: ReactNode;
  if (fitting)
    said = <p>Fitting the power series {series.length > 1 ? `of ${series.length} files` : file.name}</p>;
  else if (refusals !== undefined)
    said = (
      <div className="refusal" role="alert">
        <h2>
          {series.length > 1 ? `${series.length} files` : file.name} could not be fitted as a power series
        </h2>
        <ul>
          {refusals.map(({ message, remedy }, i) => (
            <li key={i}>
              <strong>{message}</strong>
              {remedy !== "" && <p>{remedy}</p>}
            </li>
          ))}
        </ul>
        <DemoSeriesButton />
      </div>
    );
  else if (seriesless)
    said = (
      <>
        <h2>No series was seen in the spectrum of the lowest power</h2>
        <p>The notes below say what to try: name the material in Lines, or add a spectrum at lower power.</p>
      </>
    );
  else
    said = (
      <>
        <h2>Spectra of one sample at several powers</h2>
        <p>
          {series.length > 1
            ? `${series.length} files are marked as one power series: press Fit.`
            : "Columns of one file, one a power, or several files that the drawer marks as one series."}
        </p>
        <div className="message-buttons">
          {series.length > 1 || (
            <Button className="button" isDisabled={powers < 2} onPress={() => controller.openDrawer()}>
              Mark files as one series
            </Button>
          )}
          <DemoSeriesButton />
        </div>
      </>
    );
  return (
    <div
      className="stage-unfitted"
      data-state={fitting ? "fitting" : refusals === undefined ? "not-yet" : "refused"}
    >
      <PowerChoices />
      <Cautions />
      <div className="stage-message">{said}</div>
    </div>
  );
}
