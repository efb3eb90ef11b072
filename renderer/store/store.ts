import { temporal } from "zundo";
import { create } from "zustand";
import type { Wording } from "../../app/base/index.ts";
import type { Comparison, ProtocolInput } from "../../app/protocol/index.ts";
import type { HostFacts, Inspection } from "../../app/tasks/index.ts";
import { EMPTY_SESSION, type Session } from "./session.ts";

export type Stage = "read" | "lines" | "ladder" | "power" | "batches" | "record";
export type ThemeChoice = "system" | "light" | "dark";

/** How the current choices read a file. */
export type Reading =
  | { readonly state: "reading"; readonly choices: ProtocolInput; readonly before: Inspection | null }
  | { readonly state: "read"; readonly choices: ProtocolInput; readonly inspection: Inspection }
  | { readonly state: "refused"; readonly choices: ProtocolInput; readonly wordings: readonly Wording[] };

/** How the samples that are shown compare. */
export type Compared =
  | { readonly state: "working"; readonly before: Comparison | null }
  | { readonly state: "done"; readonly comparison: Comparison }
  | { readonly state: "refused"; readonly wordings: readonly Wording[] };

export interface FitJob {
  /** The file at work. */
  readonly fileId: string;
  readonly what: "fit" | "power" | "all";
  readonly fraction: number;
  readonly step: string;
  readonly cancelling: boolean;
}

/** Something that the window itself has to say, beside the notes of a result. */
export interface Message {
  readonly id: number;
  readonly grave: boolean;
  readonly text: string;
  readonly remedy: string;
}

/** The whole state of the window; only `session` is undone. */
export interface WindowState {
  readonly session: Session;
  readonly start: "starting" | "ready" | "failed";
  readonly facts: HostFacts | null;
  readonly stage: Stage;
  /** Whether the drawer of files stands open. */
  readonly drawer: boolean;
  /** Lit everywhere while the pointer is on it. */
  readonly pointedN: number | null;
  /** Chosen line; not undone, since climbing the ladder changes nothing. */
  readonly selectedN: number | null;
  readonly readings: Readonly<Record<string, Reading>>;
  /** Why a fit of a file was refused, kept until the next try. */
  readonly refusals: Readonly<Record<string, readonly Wording[]>>;
  /** Why a power series was refused, by the id of its first file. */
  readonly powerRefusals: Readonly<Record<string, readonly Wording[]>>;
  /** What the record is about: one fit or result by its id; null: all that Batches shows. */
  readonly recordOf: string | null;
  /** Null with fewer than two samples. */
  readonly compared: Compared | null;
  readonly job: FitJob | null;
  readonly messages: readonly Message[];
  readonly theme: ThemeChoice;
}

const UNDO_LIMIT = 200;

export function makeStore() {
  return create<WindowState>()(
    temporal(
      (): WindowState => ({
        session: EMPTY_SESSION,
        start: "starting",
        facts: null,
        stage: "read",
        drawer: false,
        pointedN: null,
        selectedN: null,
        readings: {},
        refusals: {},
        powerRefusals: {},
        recordOf: null,
        compared: null,
        job: null,
        messages: [],
        theme: "system",
      }),
      {
        partialize: ({ session }) => ({ session }),
        equality: (past, present) => past.session === present.session,
        limit: UNDO_LIMIT,
      },
    ),
  );
}

export type WindowStore = ReturnType<typeof makeStore>;
