import type { Wording } from "../base/index.ts";
import type { AnalysedFile, FileRequest, RunFacts } from "./analyse-file.ts";
import type { Inspection } from "./inspect-file.ts";

/** What a shell asks of a worker (a page worker in the window, a pool thread in main), and what comes back. */
export type WorkerRequest =
  | {
      readonly type: "analyse";
      readonly id: number;
      readonly request: FileRequest;
      readonly run: RunFacts;
      readonly cancel: Int32Array | null;
    }
  | { readonly type: "inspect"; readonly id: number; readonly request: FileRequest };

export type WorkerReply =
  | { readonly type: "progress"; readonly id: number; readonly fraction: number; readonly step: string }
  | { readonly type: "analysed"; readonly id: number; readonly analysed: AnalysedFile }
  | { readonly type: "inspected"; readonly id: number; readonly inspection: Inspection }
  | { readonly type: "refused"; readonly id: number; readonly wordings: readonly Wording[] }
  | { readonly type: "cancelled"; readonly id: number }
  | { readonly type: "fault"; readonly id: number; readonly message: string; readonly stack: string };
