import { useMemo, type ReactNode, type Ref } from "react";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import { readFigure } from "../read/read-figure.ts";
import { StageFrame } from "./stage-frame.tsx";
import { usePalette } from "./theme.ts";
import { currentFile, currentReading, useController, useWindow } from "../store/context.ts";
import { EmptyPlace } from "./empty-place.tsx";
import { Button } from "react-aria-components";

/** A stage that waits for a fit: it says what to do next, or why the last try was refused. */
export function Unfitted({
  choices,
  figureRef,
}: {
  readonly choices: ReactNode;
  readonly figureRef: Ref<FigureHandle>;
}) {
  const palette = usePalette();
  const controller = useController();
  const file = useWindow(currentFile);
  const reading = useWindow(currentReading);
  const refusals = useWindow((state) => (file === null ? undefined : state.refusals[file.id]));
  const fitting = useWindow((state) => state.job !== null && state.job.fileId === file?.id);
  const inspection =
    reading?.state === "read" ? reading.inspection : reading?.state === "reading" ? reading.before : null;
  const figure = useMemo(
    () => (inspection === null ? null : readFigure(inspection.spectrum, palette)),
    [inspection, palette],
  );
  if (file === null) return <EmptyPlace />;
  if (figure !== null && refusals === undefined)
    return (
      <StageFrame
        choices={choices}
        tools={null}
        figure={<Figure ref={figureRef} figure={figure} lit={null} />}
        ledger={
          <p className="hint ledger-hint" data-state={fitting ? "fitting" : "not-yet"}>
            {fitting
              ? "The numbers stand here once the fit is done."
              : "Not fitted yet. Choose the material above and press Fit."}
          </p>
        }
      />
    );
  const unread = reading?.state === "refused";
  return (
    <div
      className="stage-unfitted"
      data-state={fitting ? "fitting" : refusals === undefined ? "not-yet" : "refused"}
    >
      {choices}
      <div className="stage-message">
        {refusals !== undefined ? (
          <div className="refusal" role="alert">
            <h2>{file.name} could not be fitted</h2>
            <ul>
              {refusals.map(({ message, remedy }, i) => (
                <li key={i}>
                  <strong>{message}</strong>
                  {remedy !== "" && <p>{remedy}</p>}
                </li>
              ))}
            </ul>
          </div>
        ) : fitting ? (
          <p>Fitting {file.name}</p>
        ) : unread ? (
          <>
            <p>{file.name} was not read: see what stands in its way in Read.</p>
            <Button className="button" onPress={() => controller.show("read")}>
              Go to Read
            </Button>
          </>
        ) : (
          <p>{file.name} is not fitted yet. Choose the material above and press Fit.</p>
        )}
      </div>
    </div>
  );
}
