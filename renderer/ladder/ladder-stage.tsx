import { useMemo, useState, type Ref } from "react";
import { Pick, Segments } from "../controls/choices.tsx";
import { StageFrame } from "../frame/stage-frame.tsx";
import { usePalette } from "../frame/theme.ts";
import { Unfitted } from "../frame/unfitted.tsx";
import { Ledger } from "../ledger/ledger.tsx";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import { currentAnalysed, useController, useWindow } from "../store/context.ts";
import { LadderChoices } from "./ladder-choices.tsx";
import { ladderFigure, type LadderPanel, type RangeQuantity } from "./ladder-figure.ts";
import { ladderLedger } from "./ladder-ledger.ts";

/** The series: its plots and its numbers. */
export function LadderStage({ figureRef }: { readonly figureRef: Ref<FigureHandle> }) {
  const controller = useController();
  const analysed = useWindow(currentAnalysed);
  const palette = usePalette();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const [panel, setPanel] = useState<LadderPanel>("all");
  const [ranged, setRanged] = useState<RangeQuantity>("gap");
  const figure = useMemo(
    () => (analysed === null ? null : ladderFigure(analysed.result, palette, panel, ranged)),
    [analysed, palette, panel, ranged],
  );
  const sections = useMemo(() => (analysed === null ? [] : ladderLedger(analysed.result)), [analysed]);
  if (analysed === null || figure === null)
    return <Unfitted choices={<LadderChoices />} figureRef={figureRef} />;
  return (
    <StageFrame
      choices={<LadderChoices />}
      tools={
        <>
          <Segments<LadderPanel>
            label="Plots"
            value={panel}
            options={[
              { value: "all", text: "All" },
              { value: "levels", text: "Levels" },
              { value: "widths", text: "Widths" },
              { value: "strengths", text: "Strengths" },
              ...(analysed.result.protocol.lines.asymmetry === "free"
                ? [{ value: "asymmetries" as const, text: "Asymmetries" }]
                : []),
              { value: "ranges", text: "Ranges of n" },
            ]}
            onPick={setPanel}
          />
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
        </>
      }
      figure={
        <Figure
          ref={figureRef}
          figure={figure}
          lit={pointed ?? selected}
          onPoint={(_, n) => controller.point(n)}
          onChoose={(_, n) => {
            if (n !== null) controller.select(n);
          }}
        />
      }
      ledger={<Ledger sections={sections} />}
    />
  );
}
