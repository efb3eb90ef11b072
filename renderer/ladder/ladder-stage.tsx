import { useMemo, useState, type Ref } from "react";
import { Pick, Segments } from "../controls/choices.tsx";
import { StageFrame } from "../frame/stage-frame.tsx";
import { usePalette } from "../frame/theme.ts";
import { Unfitted } from "../frame/unfitted.tsx";
import { Ledger } from "../ledger/ledger.tsx";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import { currentAnalysed, useController, useWindow } from "../store/context.ts";
import { errorFigure, type ErrorView } from "./error-figure.ts";
import { ErrorKey } from "./error-key.tsx";
import { ErrorLedger } from "./error-ledger.tsx";
import { LadderChoices } from "./ladder-choices.tsx";
import { ladderFigure, type LadderPanel, type RangeQuantity } from "./ladder-figure.ts";
import { ladderLedger } from "./ladder-ledger.ts";

/** The series: its plots and its numbers, and what stands behind their errors. */
export function LadderStage({ figureRef }: { readonly figureRef: Ref<FigureHandle> }) {
  const controller = useController();
  const analysed = useWindow(currentAnalysed);
  const palette = usePalette();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const [panel, setPanel] = useState<LadderPanel | "errors">("all");
  const [ranged, setRanged] = useState<RangeQuantity>("gap");
  const [view, setView] = useState<ErrorView>("regions");
  const figure = useMemo(
    () =>
      analysed === null
        ? null
        : panel === "errors"
          ? errorFigure(analysed.result, palette, view)
          : ladderFigure(analysed.result, palette, panel, ranged),
    [analysed, palette, panel, ranged, view],
  );
  const working = useWindow((state) => state.job !== null);
  const sections = useMemo(() => (analysed === null ? [] : ladderLedger(analysed.result)), [analysed]);
  if (analysed === null || figure === null)
    return <Unfitted choices={<LadderChoices />} figureRef={figureRef} />;
  const { result } = analysed;
  return (
    <StageFrame
      choices={<LadderChoices />}
      tools={
        <>
          <span className="tool-group">
            <Segments<LadderPanel | "errors">
              label="Plots"
              value={panel}
              options={[
                { value: "all", text: "All" },
                { value: "levels", text: "Levels" },
                { value: "widths", text: "Widths" },
                { value: "strengths", text: "Strengths" },
                ...(result.protocol.lines.asymmetry === "free"
                  ? [{ value: "asymmetries" as const, text: "Asymmetries" }]
                  : []),
                { value: "ranges", text: "Ranges of n" },
                { value: "errors", text: "Errors" },
              ]}
              onPick={setPanel}
            />
            {panel === "errors" && (
              <span className="tool-words">
                <Pick<ErrorView>
                  label="What the errors rest on"
                  value={view}
                  options={[
                    { value: "regions", text: "joint regions" },
                    { value: "profiles", text: "profiles" },
                    { value: "influence", text: "influence of each line" },
                    { value: "correlations", text: "correlations" },
                    { value: "residuals", text: "residuals" },
                    { value: "draws", text: "spectra drawn anew" },
                  ]}
                  onPick={setView}
                />
              </span>
            )}
          </span>
          {(panel === "all" || panel === "ranges") && (
            <span className="tool-words">
              ranges of n:{" "}
              <Pick<RangeQuantity>
                label="Quantity against the lowest n"
                value={ranged}
                options={[
                  { value: "gap", text: "gap" },
                  { value: "rydberg", text: "Rydberg energy" },
                  { value: "defect", text: "quantum defect" },
                ]}
                onPick={setRanged}
              />
            </span>
          )}
          {panel === "errors" && <ErrorKey result={result} view={view} />}
        </>
      }
      figure={
        figure.data.length === 0 ? (
          <div className="figure-empty" data-state="empty">
            {view === "draws" && working ? (
              <p>The scatter of the spectra stands here once they are drawn and fitted.</p>
            ) : (
              <>
                <p>{figure.summary}.</p>
                {view === "draws" && <p>Choose their number and seed beside this, and draw them.</p>}
              </>
            )}
          </div>
        ) : (
          <Figure
            ref={figureRef}
            figure={figure}
            lit={pointed ?? selected}
            onPoint={(_, n) => controller.point(n)}
            onChoose={(_, n) => {
              if (n !== null) controller.select(n);
            }}
          />
        )
      }
      ledger={
        panel === "errors" ? <ErrorLedger result={result} view={view} /> : <Ledger sections={sections} />
      }
    />
  );
}
