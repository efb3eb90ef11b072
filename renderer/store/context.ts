import { createContext, use } from "react";
import { useStore } from "zustand";
import type { AnalysedFile } from "../../app/tasks/index.ts";
import type { ProtocolInput } from "../../app/protocol/index.ts";
import type { Controller } from "./controller.ts";
import { NO_CHOICES, type Fitted, type LoadedFile } from "./session.ts";
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

export const currentAnalysed = (state: WindowState): AnalysedFile | null =>
  currentFit(state)?.analysed ?? null;

/** Whether the fit that stands was made with other choices than the present ones. */
export const fitIsOld = (state: WindowState): boolean => {
  const fit = currentFit(state);
  return fit !== null && fit.choices !== currentChoices(state);
};
