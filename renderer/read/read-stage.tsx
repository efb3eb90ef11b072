import { useMemo, type Ref } from "react";
import { Button } from "react-aria-components";
import { Group, Panel, Separator } from "react-resizable-panels";
import { cautionsFor, formatNumber } from "../../app/report/index.ts";
import type { Inspection } from "../../app/tasks/index.ts";
import { FitButton } from "../controls/fit-button.tsx";
import { EmptyPlace } from "../frame/empty-place.tsx";
import { StageFrame } from "../frame/stage-frame.tsx";
import { usePalette } from "../frame/theme.ts";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import { currentFile, currentReading, useController, useWindow } from "../store/context.ts";
import { columnName, ReadChoices } from "./read-choices.tsx";
import { readFigure } from "./read-figure.ts";

/** What was read from the file, what it was taken for, and what was left out. */
export function ReadStage({ figureRef }: { readonly figureRef: Ref<FigureHandle> }) {
  const file = useWindow(currentFile);
  const reading = useWindow(currentReading);
  const palette = usePalette();
  const inspection =
    reading?.state === "read" ? reading.inspection : reading?.state === "reading" ? reading.before : null;
  const figure = useMemo(
    () => (inspection === null ? null : readFigure(inspection.spectrum, palette)),
    [inspection, palette],
  );
  if (file === null) return <EmptyPlace />;
  if (reading?.state === "refused") return <Refused name={file.name} wordings={reading.wordings} />;
  if (inspection === null || figure === null)
    return (
      <div className="stage-message" data-state="reading">
        <p>Reading {file.name}</p>
      </div>
    );
  return (
    <StageFrame
      choices={<ReadChoices inspection={inspection} after={<FitButton />} />}
      tools={null}
      figure={
        <Group orientation="vertical" id="read-split">
          <Panel id="read-figure" defaultSize="68%" minSize="30%">
            <Figure ref={figureRef} figure={figure} lit={null} />
          </Panel>
          <Separator className="split split-flat" aria-label="Height of the table" />
          <Panel id="read-table" defaultSize="32%" minSize="10%">
            <Preview inspection={inspection} />
          </Panel>
        </Group>
      }
      ledger={<Facts inspection={inspection} />}
    />
  );
}

function Refused({
  name,
  wordings,
}: {
  readonly name: string;
  readonly wordings: readonly { readonly message: string; readonly remedy: string }[];
}) {
  const controller = useController();
  return (
    <div className="stage-refused" data-state="refused">
      <ReadChoices inspection={null} />
      <div className="refusal" role="alert">
        <h2>
          <span className="mark-refused" aria-hidden="true">
            ✕
          </span>{" "}
          {name} could not be read as a spectrum
        </h2>
        <ul>
          {wordings.map(({ message, remedy }, i) => (
            <li key={i}>
              <strong>{message}</strong>
              {remedy !== "" && <p>{remedy}</p>}
            </li>
          ))}
        </ul>
        <Button className="button" onPress={() => void controller.open()}>
          Open another file
        </Button>
      </div>
    </div>
  );
}

function Preview({ inspection }: { readonly inspection: Inspection }) {
  const roles = new Map(inspection.spectrum.columns.map((column) => [column.column, column]));
  return (
    <div className="preview" tabIndex={0} role="group" aria-label="First rows of the table">
      <table>
        <caption className="hidden">First rows as read</caption>
        <thead>
          <tr>
            {inspection.headers.map((header, i) => {
              const role = roles.get(i + 1);
              return (
                <th key={i} scope="col" data-role={role?.role ?? "other"}>
                  <span>{columnName(i + 1, header)}</span>
                  <span className="small role">
                    {role === undefined ? "not used" : ROLE_WORDS[role.role]}
                  </span>
                </th>
              );
            })}
          </tr>
        </thead>
        <tbody>
          {inspection.preview.map((row, i) => (
            <tr key={i}>
              {row.map((value, k) => (
                <td key={k} data-role={roles.get(k + 1)?.role ?? "other"}>
                  {Number.isFinite(value) ? String(value) : "blank"}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
      <p className="small">
        first {inspection.preview.length} of {inspection.rows} rows
      </p>
    </div>
  );
}

const ROLE_WORDS = {
  axis: "axis",
  signal: "signal",
  sigma: "standard deviation",
  reference: "reference",
  dark: "dark",
  other: "not used",
} as const;

/** More columns without use than this are named in one line. */
const MANY = 2;

const NOISE_WORDS = {
  column: "from its column",
  protocol: "as chosen",
  estimated: "estimated from the data",
} as const;

function Facts({ inspection }: { readonly inspection: Inspection }) {
  const { spectrum, skipped } = inspection;
  const { energy_eV: energy } = spectrum;
  const count = energy.length;
  const first = energy[0] ?? Number.NaN;
  const last = energy[count - 1] ?? Number.NaN;
  let used = 0;
  for (let i = 0; i < count; i++) used += spectrum.used[i]!;
  const unit = spectrum.unit === "1/cm" ? " cm⁻¹" : "";
  // A table of many columns would fill the ledger with what was not needed.
  const others = spectrum.columns.filter(({ role }) => role === "other");
  const idle = others.length > MANY ? others : [];
  const needed =
    others.length > MANY ? spectrum.columns.filter(({ role }) => role !== "other") : spectrum.columns;
  const cautions = cautionsFor({ notes: [...spectrum.notes], reading: { facts: [...spectrum.facts] } });
  return (
    <div className="facts">
      <section aria-label="Spectrum">
        <h3>Spectrum</h3>
        <dl className="pairs">
          <Pair name="Points" value={used === count ? String(count) : `${count}, ${used} used`} />
          <Pair name="Range" value={`${first.toFixed(5)} to ${last.toFixed(5)} eV`} />
          <Pair
            name="Mean step"
            value={`${formatNumber(((last - first) / Math.max(1, count - 1)) * 1e6, 3)} µeV`}
          />
          <Pair
            name="Noise"
            value={`${formatNumber(spectrum.noise.medianSigma, 3)}${unit}, ${NOISE_WORDS[spectrum.noise.source]}`}
          />
        </dl>
      </section>
      <section aria-label="Columns">
        <h3>What the columns were taken for</h3>
        <ul className="roles">
          {needed.map((column) => (
            <li key={`${column.role}${column.column}`}>
              <strong>{ROLE_WORDS[column.role]}</strong>: {columnName(column.column, column.header)}
              <p className="small">{column.reason}</p>
            </li>
          ))}
          {idle.length > 0 && (
            <li>
              <strong>{ROLE_WORDS.other}</strong>:{" "}
              {idle.map((column) => columnName(column.column, column.header)).join(", ")}
            </li>
          )}
        </ul>
      </section>
      <section aria-label="Header">
        <h3>Said in the header</h3>
        {spectrum.facts.length === 0 ? (
          <p className="small">nothing</p>
        ) : (
          <dl className="pairs">
            {spectrum.facts.map((fact, i) => (
              <Pair key={i} name={fact.label} value={fact.text} />
            ))}
          </dl>
        )}
        {cautions.map((caution) => (
          <p key={caution} className="small cautions" role="note">
            {caution}
          </p>
        ))}
      </section>
      <section aria-label="Left out">
        <h3>Left out</h3>
        {skipped.length === 0 ? (
          <p className="small">no row</p>
        ) : (
          <ul className="skipped">
            {skipped.slice(0, 50).map((row, i) => (
              <li key={i}>
                line {row.line}
                {row.column !== null && `, column ${row.column}`}: {row.reason}
                {row.found !== "" && <code>{row.found}</code>}
              </li>
            ))}
            {skipped.length > 50 && <li>and {skipped.length - 50} more</li>}
          </ul>
        )}
      </section>
    </div>
  );
}

function Pair({ name, value }: { readonly name: string; readonly value: string }) {
  return (
    <div>
      <dt>{name}</dt>
      <dd>{value}</dd>
    </div>
  );
}
