import { useMemo, useState, type Ref } from "react";
import { Segments } from "../controls/choices.tsx";
import { usePalette } from "../frame/theme.ts";
import { StageFrame } from "../frame/stage-frame.tsx";
import { Ledger } from "../ledger/ledger.tsx";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import { currentAnalysed, useController, useWindow } from "../store/context.ts";
import { backgroundSection, fitSection, lineSection } from "./lines-ledger.ts";
import { LinesChoices } from "./lines-choices.tsx";
import { fittedWindow, linesFigure, type LinesView } from "./lines-figure.ts";
import { LinesTable } from "./lines-table.tsx";
import { Unfitted } from "../frame/unfitted.tsx";

/** Spectrum, model, components and residuals; the lines and how good the fit is. */
export function LinesStage({ figureRef }: { readonly figureRef: Ref<FigureHandle> }) {
  const controller = useController();
  const analysed = useWindow(currentAnalysed);
  const palette = usePalette();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const [view, setView] = useState<LinesView>("window");
  const shownN = view === "line" ? selected : null;
  const figure = useMemo(
    () => (analysed === null ? null : linesFigure(analysed.curves, analysed.result, palette, view, shownN)),
    [analysed, palette, view, shownN],
  );
  const sections = useMemo(() => {
    if (analysed === null) return [];
    const { result } = analysed;
    const line = selected === null ? null : lineSection(result, selected);
    return (line === null ? [fitSection(result), backgroundSection(result)] : [line]).filter(
      (section) => section !== null,
    );
  }, [analysed, selected]);
  if (analysed === null || figure === null)
    return <Unfitted choices={<LinesChoices />} figureRef={figureRef} />;
  const { result, curves } = analysed;
  const near = (x: number): number | null => {
    let best: number | null = null;
    let distance = Infinity;
    for (const { n, energy_eV: energy, width_eV: width, spacing_eV: spacing } of result.lines) {
      if (energy.value === null) continue;
      const away = Math.abs(x - energy.value);
      const reach = Math.max(1.5 * (width.value ?? 0), 0.2 * (spacing ?? 0));
      if (away < distance && away <= reach) {
        best = n;
        distance = away;
      }
    }
    return best;
  };
  return (
    <StageFrame
      wide
      choices={<LinesChoices />}
      tools={
        <>
          <ul className="key" aria-label="Key">
            <li data-key="data">data</li>
            <li data-key="model">model</li>
            <li data-key="line">single lines</li>
            <li data-key="background">background</li>
            {curves.tail !== null && <li data-key="tail">tail and continuum</li>}
          </ul>
          <Segments<LinesView>
            label="Part of the window"
            value={view}
            options={[
              { value: "window", text: "Window" },
              { value: "high-n", text: "High n", disabled: result.lines.length < 4 },
              {
                value: "line",
                text: selected === null ? "Line" : `n = ${selected}`,
                disabled: selected === null,
              },
            ]}
            onPick={setView}
          />
        </>
      }
      figure={
        <Figure
          ref={figureRef}
          figure={figure}
          lit={pointed ?? selected}
          onPoint={(x) => controller.point(x === null ? null : near(x))}
          onChoose={(x) => controller.select(near(x))}
          onShapeMoved={(index, x) => {
            if (index > 1) return;
            const window = fittedWindow(curves, result);
            window[index as 0 | 1] = Number(x.toFixed(5));
            if (window[0] < window[1])
              controller.change({ window_eV: window }, `window ${window[0]} to ${window[1]} eV`);
          }}
        />
      }
      ledger={
        <>
          <LinesTable result={result} />
          {selected === null && (
            <p className="small ledger-hint">Choose a line here or on the ladder to see its numbers.</p>
          )}
          <Ledger sections={sections} />
        </>
      }
    />
  );
}
