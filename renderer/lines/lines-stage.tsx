import { useMemo, useState, type Ref } from "react";
import { resolveProtocol } from "../../app/protocol/index.ts";
import { Segments } from "../controls/choices.tsx";
import { usePalette } from "../frame/theme.ts";
import { StageFrame } from "../frame/stage-frame.tsx";
import { Ledger } from "../ledger/ledger.tsx";
import type { Edge } from "../plot/edge-handle.tsx";
import { Figure, type FigureHandle } from "../plot/figure.tsx";
import { currentAnalysed, currentChoices, useController, useWindow } from "../store/context.ts";
import { backgroundSection, extraSections, fitSection, lineSection } from "./lines-ledger.ts";
import { energyEdges } from "./energy-edges.ts";
import { LineChoices } from "./line-choices.tsx";
import { LinesChoices } from "./lines-choices.tsx";
import { fittedWindow, linesFigure, type LinesView } from "./lines-figure.ts";
import { LinesTable } from "./lines-table.tsx";
import { takeRule } from "./take-rule.ts";
import { Unfitted } from "../frame/unfitted.tsx";

/** A window cannot be made narrower than this share of itself at once. */
const NARROWEST = 0.05;

/** Spectrum, model, components and residuals; the lines and how good the fit is. */
export function LinesStage({ figureRef }: { readonly figureRef: Ref<FigureHandle> }) {
  const controller = useController();
  const analysed = useWindow(currentAnalysed);
  const palette = usePalette();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const [view, setView] = useState<LinesView>("window");
  const choices = useWindow(currentChoices);
  const chosenWindow = choices.window_eV ?? null;
  const shownN = view === "line" ? selected : null;
  const figure = useMemo(
    () => (analysed === null ? null : linesFigure(analysed.curves, analysed.result, palette, view, shownN)),
    [analysed, palette, view, shownN],
  );
  const sections = useMemo(() => {
    if (analysed === null) return [];
    const { result } = analysed;
    const line = selected === null ? null : lineSection(result, selected);
    return (
      line === null ? [fitSection(result), ...extraSections(result), backgroundSection(result)] : [line]
    ).filter((section) => section !== null);
  }, [analysed, selected]);
  if (analysed === null || figure === null)
    return <Unfitted choices={<LinesChoices />} figureRef={figureRef} />;
  const { result, curves } = analysed;
  const protocol = resolveProtocol(choices);
  // A chosen window stands before it is fitted; else the one that was.
  const window = chosenWindow ?? fittedWindow(curves, result);
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
  const [low, high] = window;
  const energy = curves.energy_eV;
  const moveTo = (from: number, to: number): void => {
    const moved: [number, number] = [Number(from.toFixed(6)), Number(to.toFixed(6))];
    controller.change({ window_eV: moved }, `window ${moved[0]} to ${moved[1]} eV`);
  };
  const edges: readonly Edge[] = [
    {
      label: "Low end of the fitted window",
      x: low,
      lowest: energy[0]!,
      highest: high - NARROWEST * (high - low),
      onMoved: (x) => moveTo(x, high),
    },
    {
      label: "High end of the fitted window",
      x: high,
      lowest: low + NARROWEST * (high - low),
      highest: energy[energy.length - 1]!,
      onMoved: (x) => moveTo(low, x),
    },
    ...(protocol.ok
      ? energyEdges(result, protocol.value, selected, (n, rule) => {
          takeRule(controller, result, protocol.value, n, "energy", rule);
        })
      : []),
  ];
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
          edges={edges}
        />
      }
      ledger={
        <>
          <LinesTable result={result} />
          <LineChoices result={result} n={selected} />
          {selected === null && (
            <p className="small ledger-hint">Choose a line here or on the ladder to see its numbers.</p>
          )}
          <Ledger sections={sections} />
        </>
      }
    />
  );
}
