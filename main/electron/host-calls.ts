import { basename } from "node:path";
import type { BrowserWindow, IpcMainInvokeEvent } from "electron";
import writeFileAtomic from "write-file-atomic";
import { z } from "zod";
import type { Host } from "../../app/tasks/index.ts";
import { readDemoSeries, readNamedFiles, SPECTRUM_ENDINGS, type Place } from "../page/index.ts";
import { channelOf, type Answer } from "./answer.ts";
import type { ElectronApi } from "./electron-api.ts";
import { isPageAddress } from "./page-address.ts";

type HostMethod = Exclude<keyof Host, "shell">;
type Call<M extends HostMethod> = {
  readonly payload: z.ZodType<Parameters<Host[M]>>;
  run(owner: BrowserWindow, ...payload: Parameters<Host[M]>): ReturnType<Host[M]>;
};
type Calls = { readonly [M in HostMethod]: Call<M> };

export interface HostContext {
  readonly place: Place;
  /** Paths named when the application was started. */
  readonly startPaths: readonly string[];
}

const nothing = z.tuple([]);

/** A bare name: what the page suggests must not choose a folder. */
const fileName = z
  .string()
  .min(1)
  .max(200)
  // eslint-disable-next-line no-control-regex
  .regex(/^[^/\\:*?"<>|\u0000-\u001f]+$/, "a file name without a folder")
  .refine((name) => !/^\.+$/.test(name), "a file name");

const MAX_SAVED_BYTES = 2 ** 28;
const savedBytes = z
  .instanceof(Uint8Array)
  .refine((bytes) => bytes.byteLength <= MAX_SAVED_BYTES, `at most ${MAX_SAVED_BYTES} bytes`);

function hostCalls(dialog: ElectronApi["dialog"], { place, startPaths }: HostContext): Calls {
  return {
    about: {
      payload: nothing,
      run: async () => ({ version: place.version, node: process.version }),
    },
    startFiles: {
      payload: nothing,
      run: async () => ({ files: await readNamedFiles(startPaths), choices: {} }),
    },
    demoFiles: {
      payload: nothing,
      run: () => readNamedFiles([place.demo]),
    },
    demoSeries: {
      payload: nothing,
      run: () => readDemoSeries(place),
    },
    openFiles: {
      payload: nothing,
      async run(owner) {
        const { canceled, filePaths } = await dialog.showOpenDialog(owner, {
          title: "Open spectra",
          properties: ["openFile", "multiSelections"],
          filters: [
            { name: "Spectra", extensions: [...SPECTRUM_ENDINGS] },
            { name: "All files", extensions: ["*"] },
          ],
        });
        return canceled ? [] : readNamedFiles(filePaths);
      },
    },
    saveFile: {
      payload: z.tuple([fileName, savedBytes]),
      async run(owner, suggestedName, bytes) {
        const { canceled, filePath } = await dialog.showSaveDialog(owner, {
          title: "Save",
          defaultPath: suggestedName,
          properties: ["createDirectory", "showOverwriteConfirmation"],
        });
        if (canceled || filePath === "") return null;
        await writeFileAtomic(filePath, bytes);
        return basename(filePath);
      },
    },
  };
}

/** One handler per host call: the sender and the payload are checked before anything is done. */
export function handleHostCalls(
  electron: Pick<ElectronApi, "ipcMain" | "dialog" | "BrowserWindow">,
  context: HostContext,
): void {
  const calls = hostCalls(electron.dialog, context);
  const handle = <M extends HostMethod>(method: M, call: Call<M>): void => {
    electron.ipcMain.handle(
      channelOf(method),
      async (event, ...sent: unknown[]): Promise<Answer<unknown>> => {
        const owner = ownerOf(event, electron.BrowserWindow);
        if (owner === null) return refuse(`${method}: asked for by something that is not the page`);
        const payload = call.payload.safeParse(sent);
        if (!payload.success) {
          return refuse(`${method}: ${payload.error.issues.map((issue) => issue.message).join("; ")}`);
        }
        try {
          return { ok: true, value: await call.run(owner, ...payload.data) };
        } catch (error) {
          return refuse(error instanceof Error ? error.message : String(error));
        }
      },
    );
  };
  for (const method of Object.keys(calls) as HostMethod[]) handle(method, calls[method] as Call<HostMethod>);
}

function refuse(message: string): Answer<never> {
  return { ok: false, message };
}

/** The window whose top frame shows our page and sent the message; null for anything else. */
function ownerOf(event: IpcMainInvokeEvent, windows: ElectronApi["BrowserWindow"]): BrowserWindow | null {
  const frame = event.senderFrame;
  if (frame === null || frame.parent !== null || !isPageAddress(frame.url)) return null;
  return windows.fromWebContents(event.sender);
}
