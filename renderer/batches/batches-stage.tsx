import { useMemo, useState, type ReactNode, type Ref } from "react";
import { Button } from "react-aria-components";
import { Group, Panel, Separator } from "react-resizable-panels";
import { TEMPERATURE_LAW_NAMES } from "../../app/report/index.ts";
import type {
  ComparedParameter,
  ComparedPower,
  Comparison,
  TemperatureSeries,
} from "../../app/protocol/index.ts";
import { Pick, Segments } from "../controls/choices.tsx";
import { EmptyPlace } from "../frame/empty-place.tsx";
import { StageFrame } from "../frame/stage-frame.tsx";
import { useMode, usePalette } from "../frame/theme.ts";
import { Ledger } from "../ledger/ledger.tsx";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import type { FigureDescription } from "../plot/figure-description.ts";
import { currentComparison, useController, useWindow } from "../store/context.ts";
import { batchLook } from "./batch-look.ts";
import { BatchMarkSign } from "./batch-mark.tsx";
import { BatchesChoices } from "./batches-choices.tsx";
import { batchesFigure, type BatchesPanel } from "./batches-figure.ts";
import { batchesLedger, parameterWords } from "./batches-ledger.ts";
import { BatchesTable, useOpenSample } from "./batches-table.tsx";
import { powerComparisonFigure, type PowerView } from "./power-comparison-figure.ts";
import { powerComparisonLedger } from "./power-comparison-ledger.ts";
import { qualityFigure } from "./quality-figure.ts";
import { qualityLedger } from "./quality-ledger.ts";
import { QualityWeights, useWeights } from "./quality-weights.tsx";
import { lawsInOrder, temperatureFigure, temperatureSamples } from "./temperature-figure.ts";
import { temperatureLedger } from "./temperature-ledger.ts";
import { TypedTable } from "./typed-table.tsx";
import { batchesOf, gather, unfittedFiles } from "../store/gather.ts";

type BatchesView = BatchesPanel | "temperature" | "power" | "quality";

const FLOOR = "width_floor_eV";

/** All samples side by side: what differs between crystals, and whether it does. */
export function BatchesStage({ figureRef }: { readonly figureRef: Ref<FigureHandle> }) {
  const session = useWindow((state) => state.session);
  const comparison = useWindow(currentComparison);
  const palette = usePalette();
  const mode = useMode();
  const [asked, setPanel] = useState<BatchesView>("main");
  const [one, setOne] = useState<ComparedParameter>("gap_eV");
  const [runOf, setRunOf] = useState<string | null>(null);
  const [widthOf, setWidthOf] = useState(FLOOR);
  const [powerView, setPowerView] = useState<PowerView>("one");
  const [below, setBelow] = useState<"samples" | "typed">("samples");
  const [pointed, setPointed] = useState<number | null>(null);
  const [chosenKey, setChosenKey] = useState<string | null>(null);
  const open = useOpenSample(comparison);
  const openFile = useOpenFile();
  const batches = useMemo(() => batchesOf(gather(session)), [session]);
  const [weights] = useWeights();
  const temperature = useMemo(
    () => (comparison === null ? null : shownSeries(comparison, runOf, widthOf)),
    [comparison, runOf, widthOf],
  );
  // What a filter took away is not asked for any more.
  const panel =
    (asked === "temperature" && temperature === null) || (asked === "power" && comparison?.power === null)
      ? "main"
      : asked;
  const files = useMemo(() => filesOf(comparison), [comparison]);
  const figure = useMemo((): FigureDescription | null => {
    if (comparison === null) return null;
    const placeOf = (file: string): number | null => files.indexOf(file);
    if (panel === "temperature" && temperature !== null) {
      const b = Math.max(0, batches.indexOf(temperature.batch ?? ""));
      return temperatureFigure(temperature.gap, temperature.width, palette, batchLook(b, mode), placeOf);
    }
    if (panel === "power" && comparison.power !== null)
      return powerComparisonFigure(comparison.power, batches, palette, powerView, placeOf);
    if (panel === "quality")
      return comparison.quality === null
        ? null
        : qualityFigure(comparison, comparison.quality, batches, palette);
    return batchesFigure(comparison, batches, palette, panel as BatchesPanel, one);
  }, [comparison, batches, palette, mode, panel, one, temperature, powerView, files]);
  const sections = useMemo(() => {
    if (comparison === null) return [];
    if (panel === "temperature" && temperature !== null)
      return temperatureLedger(comparison, [temperature.gap, temperature.width]);
    if (panel === "power" && comparison.power !== null) return powerComparisonLedger(comparison.power);
    if (panel === "quality") return qualityLedger(comparison, weights);
    return batchesLedger(comparison, panel === "one" ? one : null);
  }, [comparison, panel, one, temperature, weights]);
  if (session.files.length === 0 && session.results.length === 0) return <EmptyPlace />;
  if (comparison === null) return <TooFew />;
  // By its first file: the place of a sample changes with the filters, its file does not.
  const at = comparison.samples.findIndex(({ results }) => results[0]?.file === chosenKey);
  const chosen = at < 0 ? null : at;
  const choose = (i: number | null): void =>
    setChosenKey(i === null ? null : (comparison.samples[i]?.results[0]?.file ?? null));
  // Panels of files count places among files, the others among samples.
  const byFile = panel === "temperature" || panel === "power";
  const sampleOfFile = (i: number | null): number | null => {
    const file = i === null ? undefined : files[i];
    const found = comparison.samples.findIndex(({ results }) => results.some((each) => each.file === file));
    return found < 0 ? null : found;
  };
  return (
    <StageFrame
      choices={<BatchesChoices chosen={chosen === null ? null : comparison.samples[chosen]!} />}
      tools={
        <>
          <Segments<BatchesView>
            label="Plots"
            value={panel}
            options={[
              { value: "main", text: "Parameters" },
              { value: "lines", text: "Widths and strengths" },
              { value: "one", text: "One parameter" },
              ...(temperature === null ? [] : [{ value: "temperature" as const, text: "Temperature" }]),
              ...(comparison.power === null ? [] : [{ value: "power" as const, text: "Power" }]),
              { value: "quality", text: "Quality" },
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
          {panel === "temperature" && temperature !== null && (
            <TemperatureTools
              comparison={comparison}
              shown={temperature}
              onRun={setRunOf}
              onWidth={setWidthOf}
            />
          )}
          {panel === "power" && comparison.power !== null && (
            <PowerTools power={comparison.power} view={powerView} onView={setPowerView} />
          )}
          {panel === "quality" && <QualityWeights comparison={comparison} />}
          {panel !== "temperature" && <BatchKey batches={batches} />}
        </>
      }
      figure={
        <Group orientation="vertical" id="batches-split">
          <Panel id="batches-figure" defaultSize="56%" minSize="25%">
            {figure === null ? (
              <div className="stage-message">
                <h2>A figure of quality is what you weigh</h2>
                <p>
                  Choose above which parameters count and how much, below zero where less is better. Each
                  sample then stands with the sum and with what every part gives to it.
                </p>
              </div>
            ) : (
              <Figure
                ref={figureRef}
                figure={figure}
                lit={byFile ? null : (pointed ?? chosen)}
                onPoint={(_, i) => setPointed(byFile ? sampleOfFile(i) : i)}
                onChoose={(_, i) => {
                  if (i === null) return;
                  if (byFile) openFile(files[i]!, panel === "power");
                  else open(i);
                }}
              />
            )}
          </Panel>
          <Separator className="split split-flat" aria-label="Height of the table" />
          <Panel id="batches-table" defaultSize="44%" minSize="15%">
            <div className="below">
              <Segments<"samples" | "typed">
                label="Below the figure"
                value={below}
                options={[
                  { value: "samples", text: "Samples" },
                  { value: "typed", text: "Typed columns" },
                ]}
                onPick={setBelow}
              />
              {below === "typed" ? (
                <TypedTable />
              ) : (
                <BatchesTable
                  comparison={comparison}
                  batches={batches}
                  lit={pointed}
                  chosen={chosen}
                  onPoint={setPointed}
                  onChoose={choose}
                  onOpen={open}
                />
              )}
            </div>
          </Panel>
        </Group>
      }
      ledger={<Ledger sections={sections} />}
    />
  );
}

interface ShownSeries {
  readonly sample: string | null;
  readonly batch: string | null;
  readonly gap: TemperatureSeries | null;
  readonly width: TemperatureSeries | null;
  readonly widths: readonly TemperatureSeries[];
}

/** Gap and one width of one sample's runs; null where there is no series of temperatures. */
function shownSeries({ temperature }: Comparison, of: string | null, width: string): ShownSeries | null {
  const all = temperature?.series ?? [];
  const first = all.find(({ sample }) => sample === of) ?? all[0];
  if (first === undefined) return null;
  const own = all.filter(({ sample, batch }) => sample === first.sample && batch === first.batch);
  const widths = own.filter(({ quantity }) => quantity !== "gap_eV");
  return {
    sample: first.sample,
    batch: first.batch,
    gap: own.find(({ quantity }) => quantity === "gap_eV") ?? null,
    width: widths.find(({ quantity }) => quantity === width) ?? widths[0] ?? null,
    widths,
  };
}

/** Files that the panels of temperature and power point to. */
function filesOf(comparison: Comparison | null): readonly string[] {
  return [
    ...new Set([
      ...(comparison?.temperature?.series ?? []).flatMap(({ points }) => points.map(({ file }) => file)),
      ...(comparison?.power?.series ?? []).map(({ file }) => file),
    ]),
  ];
}

function useOpenFile(): (file: string, power: boolean) => void {
  const controller = useController();
  const session = useWindow((state) => state.session);
  return (file, power) => {
    const found = gather(session).filter(({ result }) => result.source.file === file);
    const fits = found.find(({ result }) => ((result.power ?? null) !== null) === power) ?? found[0];
    if (fits !== undefined) controller.openSample(fits.id);
  };
}

interface TemperatureToolsProps {
  readonly comparison: Comparison;
  readonly shown: ShownSeries;
  readonly onRun: (sample: string) => void;
  readonly onWidth: (quantity: string) => void;
}

/** Which sample and which width, and the key of the laws. */
function TemperatureTools({ comparison, shown, onRun, onWidth }: TemperatureToolsProps) {
  const samples = temperatureSamples(comparison);
  const keys = [shown.gap, shown.width].filter((one) => one !== null);
  return (
    <>
      {samples.length > 1 && (
        <Pick<string>
          label="Sample"
          value={shown.sample ?? ""}
          options={samples.map((sample) => ({ value: sample ?? "", text: sample ?? "all samples" }))}
          onPick={onRun}
        />
      )}
      {shown.width !== null && (
        <Pick<string>
          label="Width"
          value={shown.width.quantity}
          options={shown.widths.map(({ quantity, n }) => ({
            value: quantity,
            text: n === null ? "floor of the widths" : `width of n = ${n}`,
          }))}
          onPick={onWidth}
        />
      )}
      <ul className="law-key" aria-label="Laws">
        {keys.flatMap((series) =>
          lawsInOrder(series).map(({ law }, k) => (
            <li key={`${series.quantity} ${law}`}>
              {k === 0 && <strong>{series.quantity === "gap_eV" ? "Gap" : "Width"} </strong>}
              <svg width="22" height="8" aria-hidden="true">
                <line
                  x1="0"
                  x2="22"
                  y1="4"
                  y2="4"
                  className={k === 0 ? "law-best" : "law-other"}
                  strokeDasharray={["none", "6 3", "2 3"][Math.min(k, 2)]}
                />
              </svg>{" "}
              {TEMPERATURE_LAW_NAMES[law]}
            </li>
          )),
        )}
      </ul>
    </>
  );
}

interface PowerToolsProps {
  readonly power: ComparedPower;
  readonly view: PowerView;
  readonly onView: (view: PowerView) => void;
}

function PowerTools({ power, view, onView }: PowerToolsProps) {
  const controller = useController();
  const { choices } = useWindow((state) => state.session.compare);
  return (
    <>
      <Segments<PowerView>
        label="Power series"
        value={view}
        options={[
          { value: "one", text: "At one n" },
          { value: "all", text: "Against n" },
        ]}
        onPick={onView}
      />
      <Pick<string>
        label="Line that is compared"
        value={String(choices.power_n ?? "")}
        options={[
          {
            value: "",
            text: (choices.power_n ?? null) === null ? `n = ${power.n ?? "none"}, chosen` : "n chosen",
          },
          ...power.numbers.map((n) => ({ value: String(n), text: `n = ${n}` })),
        ]}
        onPick={(text) =>
          controller.changeCompare(
            { choices: { ...choices, power_n: text === "" ? null : Number(text) } },
            "line that is compared",
          )
        }
      />
    </>
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
            ? `${left} ${left === 1 ? "file waits" : "files wait"} in the drawer.`
            : "Drop spectra of other crystals on the window and fit all, or drop results of earlier fits (JSON)."}
        </p>
        <div className="message-buttons">
          {left > 0 && session.files.length > 1 && (
            <Button className="button button-main" onPress={() => void controller.fitAll()}>
              {left === 1 ? "Fit it" : "Fit them"}
            </Button>
          )}
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
