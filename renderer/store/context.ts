import { createContext, use } from "react";
import { useStore } from "zustand";
import type { AnalysedFile } from "../../app/tasks/index.ts";
import type { Comparison, ProtocolInput, RunglineResult } from "../../app/protocol/index.ts";
import type { Controller } from "./controller.ts";
import { NO_CHOICES, seriesOf, type Fitted, type LoadedFile, type PowerFitted } from "./session.ts";
import type { Reading, WindowState } from "./store.ts";

export const ControllerContext = createContext<Controller | null>(null);

export function useController(): Controller {
  const controller = use(ControllerContext);
  if (controller === null) throw new Error("no controller around this part of the window");
  return controller;
}

export function useWindow<T>(select: (state: WindowState) => T): T {
  return useStore(useController().store, select);
}

export function useUndo(): { readonly undo: string | null; readonly redo: string | null } {
  const { store } = useController();
  const present = useWindow((state) => state.session.step);
  const canUndo = useStore(store.temporal, (state) => state.pastStates.length > 0);
  const next = useStore(store.temporal, (state) => state.futureStates.at(-1)?.session?.step ?? null);
  return { undo: canUndo ? present : null, redo: next };
}

export const currentFile = ({ session }: WindowState): LoadedFile | null =>
  session.files.find((file) => file.id === session.currentId) ?? null;

export const currentChoices = ({ session }: WindowState): ProtocolInput =>
  (session.currentId === null ? undefined : session.choices[session.currentId]) ?? NO_CHOICES;

export const currentReading = ({ session, readings }: WindowState): Reading | null =>
  (session.currentId === null ? undefined : readings[session.currentId]) ?? null;

export const currentFit = ({ session }: WindowState): Fitted | null =>
  (session.currentId === null ? undefined : session.fits[session.currentId]) ?? null;

/** The ladder that the stage is about: of the power series in Power, else of the file's own fit. */
export const currentLadder = (state: WindowState): RunglineResult | null => {
  const own = currentFit(state)?.analysed.result ?? null;
  const power = currentPower(state)?.analysed.result ?? null;
  return state.stage === "power" ? (power ?? own) : (own ?? power);
};

export const currentAnalysed = (state: WindowState): AnalysedFile | null =>
  currentFit(state)?.analysed ?? null;

/** Whether the fit that stands was made with other choices than the present ones. */
export const fitIsOld = (state: WindowState): boolean => {
  const fit = currentFit(state);
  return fit !== null && fit.choices !== currentChoices(state);
};

const ALONE: readonly string[] = [];

/** The files of the power series that the current file stands in, itself where it is marked with none. */
export const currentSeries = ({ session }: WindowState): readonly string[] => {
  const id = session.currentId;
  // A list of its own would differ at every look and redraw without end.
  return id === null ? ALONE : (session.series.find((members) => members.includes(id)) ?? ALONE);
};

/** Under what the fit of the current power series is kept: its first file. */
export const currentSeriesId = ({ session }: WindowState): string | null =>
  session.currentId === null ? null : seriesOf(session, session.currentId)[0]!;

export const currentPower = (state: WindowState): PowerFitted | null => {
  const id = currentSeriesId(state);
  return (id === null ? undefined : state.session.powerFits[id]) ?? null;
};

/** The comparison of the samples that are shown; the one before while a new one is on its way. */
export const currentComparison = ({ compared }: WindowState): Comparison | null =>
  compared?.state === "done" ? compared.comparison : compared?.state === "working" ? compared.before : null;

export const powerIsOld = (state: WindowState): boolean => {
  const fit = currentPower(state);
  if (fit === null) return false;
  const members = state.session.currentId === null ? [] : seriesOf(state.session, state.session.currentId);
  return fit.choices !== currentChoices(state) || fit.fileIds.join("\n") !== members.join("\n");
};
