import { useMemo, useState, type ReactNode, type Ref } from "react";
import { Button } from "react-aria-components";
import { Group, Panel, Separator } from "react-resizable-panels";
import type { ComparedParameter } from "../../app/protocol/index.ts";
import { Pick, Segments } from "../controls/choices.tsx";
import { EmptyPlace } from "../frame/empty-place.tsx";
import { StageFrame } from "../frame/stage-frame.tsx";
import { useMode, usePalette } from "../frame/theme.ts";
import { Ledger } from "../ledger/ledger.tsx";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import { currentComparison, useController, useWindow } from "../store/context.ts";
import { batchLook } from "./batch-look.ts";
import { BatchMarkSign } from "./batch-mark.tsx";
import { BatchesChoices } from "./batches-choices.tsx";
import { batchesFigure, type BatchesPanel } from "./batches-figure.ts";
import { batchesLedger, parameterWords } from "./batches-ledger.ts";
import { BatchesTable, useOpenSample } from "./batches-table.tsx";
import { batchesOf, gather, unfittedFiles } from "../store/gather.ts";

/** All samples side by side: what differs between crystals, and whether it does. */
export function BatchesStage({ figureRef }: { readonly figureRef: Ref<FigureHandle> }) {
  const session = useWindow((state) => state.session);
  const comparison = useWindow(currentComparison);
  const palette = usePalette();
  const [panel, setPanel] = useState<BatchesPanel>("main");
  const [one, setOne] = useState<ComparedParameter>("gap_eV");
  const [pointed, setPointed] = useState<number | null>(null);
  const [chosenKey, setChosenKey] = useState<string | null>(null);
  const open = useOpenSample(comparison);
  const batches = useMemo(() => batchesOf(gather(session)), [session]);
  const figure = useMemo(
    () => (comparison === null ? null : batchesFigure(comparison, batches, palette, panel, one)),
    [comparison, batches, palette, panel, one],
  );
  const sections = useMemo(
    () => (comparison === null ? [] : batchesLedger(comparison, panel === "one" ? one : null)),
    [comparison, panel, one],
  );
  if (session.files.length === 0 && session.results.length === 0) return <EmptyPlace />;
  if (comparison === null || figure === null) return <TooFew />;
  // By its first file: the place of a sample changes with the filters, its file does not.
  const at = comparison.samples.findIndex(({ results }) => results[0]?.file === chosenKey);
  const chosen = at < 0 ? null : at;
  const choose = (i: number | null): void =>
    setChosenKey(i === null ? null : (comparison.samples[i]?.results[0]?.file ?? null));
  return (
    <StageFrame
      choices={<BatchesChoices chosen={chosen === null ? null : comparison.samples[chosen]!} />}
      tools={
        <>
          <Segments<BatchesPanel>
            label="Plots"
            value={panel}
            options={[
              { value: "main", text: "Parameters" },
              { value: "lines", text: "Widths and strengths" },
              { value: "one", text: "One parameter" },
            ]}
            onPick={setPanel}
          />
          {panel === "one" && (
            <Pick<ComparedParameter>
              label="Parameter"
              value={one}
              options={comparison.parameters
                .filter(({ samples }) => samples > 0)
                .map(({ name }) => ({ value: name, text: parameterWords(name) }))}
              onPick={setOne}
            />
          )}
          <BatchKey batches={batches} />
        </>
      }
      figure={
        <Group orientation="vertical" id="batches-split">
          <Panel id="batches-figure" defaultSize="56%" minSize="25%">
            <Figure
              ref={figureRef}
              figure={figure}
              lit={pointed ?? chosen}
              onPoint={(_, i) => setPointed(i)}
              onChoose={(_, i) => {
                if (i !== null) open(i);
              }}
            />
          </Panel>
          <Separator className="split split-flat" aria-label="Height of the table" />
          <Panel id="batches-table" defaultSize="44%" minSize="15%">
            <BatchesTable
              comparison={comparison}
              batches={batches}
              lit={pointed}
              chosen={chosen}
              onPoint={setPointed}
              onChoose={choose}
              onOpen={open}
            />
          </Panel>
        </Group>
      }
      ledger={<Ledger sections={sections} />}
    />
  );
}

/** The key of the batches is their filter too. */
function BatchKey({ batches }: { readonly batches: readonly string[] }) {
  const controller = useController();
  const hidden = useWindow((state) => state.session.compare.hidden);
  const mode = useMode();
  return (
    <div className="batch-key" role="group" aria-label="Batches shown">
      {batches.map((batch, i) => {
        const shown = !hidden.includes(batch);
        return (
          <button
            key={batch}
            type="button"
            aria-pressed={shown}
            title={shown ? `Leave out ${batch}` : `Show ${batch}`}
            onClick={() =>
              controller.changeCompare(
                { hidden: shown ? [...hidden, batch] : hidden.filter((other) => other !== batch) },
                shown ? `leave out ${batch}` : `show ${batch}`,
              )
            }
          >
            <BatchMarkSign look={batchLook(i, mode)} /> {batch}
          </button>
        );
      })}
    </div>
  );
}

/** Fewer than two samples: what to do next. */
function TooFew() {
  const controller = useController();
  const session = useWindow((state) => state.session);
  const compared = useWindow((state) => state.compared);
  const fitting = useWindow((state) => state.job?.what === "all");
  const gathered = gather(session);
  const shown = gathered.filter((one) => one.shown).length;
  const left = unfittedFiles(session).length;
  let said: ReactNode;
  if (fitting) said = <p>Fitting the files of the drawer</p>;
  else if (compared?.state === "working") said = <p>Comparing</p>;
  else if (compared?.state === "refused")
    said = (
      <div className="refusal" role="alert">
        <h2>The samples could not be compared</h2>
        <ul>
          {compared.wordings.map(({ message, remedy }, i) => (
            <li key={i}>
              <strong>{message}</strong>
              {remedy !== "" && <p>{remedy}</p>}
            </li>
          ))}
        </ul>
      </div>
    );
  else if (gathered.length > 1)
    said = (
      <>
        <h2>The filters leave {shown === 0 ? "no sample" : "one sample"}</h2>
        <p>Two are needed. Widen the bounds above or show a batch again.</p>
        <BatchKey batches={batchesOf(gathered)} />
      </>
    );
  else
    said = (
      <>
        <h2>Two samples or more stand here side by side</h2>
        <p>
          {left > 0 && session.files.length > 1
            ? `${left} ${left === 1 ? "file waits" : "files wait"} in the drawer: fit all.`
            : "Drop spectra of other crystals on the window and fit all, or drop results of earlier fits (JSON)."}
        </p>
        <div className="message-buttons">
          <Button className="button" onPress={() => void controller.open()}>
            Open spectra or results
          </Button>
        </div>
      </>
    );
  return (
    <div className="stage-unfitted" data-state={fitting ? "fitting" : "not-yet"}>
      <BatchesChoices chosen={null} />
      <div className="stage-message">{said}</div>
    </div>
  );
}
