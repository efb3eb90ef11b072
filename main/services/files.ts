import { mkdir, open, stat } from "node:fs/promises";
import { dirname } from "node:path";
import writeFileAtomic from "write-file-atomic";
import { OutputError } from "./output-error.ts";

export type PathKind = "file" | "folder" | "other" | "none";

export async function pathKind(path: string): Promise<PathKind> {
  try {
    const found = await stat(path);
    return found.isFile() ? "file" : found.isDirectory() ? "folder" : "other";
  } catch {
    return "none";
  }
}

/** Whole or not at all: written beside, flushed, renamed. A device or pipe is written to as it is. */
export async function writeWhole(file: string, content: string | Uint8Array): Promise<void> {
  try {
    if ((await pathKind(file)) === "other") {
      const handle = await open(file, "w");
      try {
        await handle.writeFile(content);
      } finally {
        await handle.close();
      }
    } else await writeFileAtomic(file, content);
  } catch (cause) {
    throw outputError(file, cause);
  }
}

/** What the operating system refuses is about the output; anything else is a fault and stays one. */
function outputError(file: string, cause: unknown): unknown {
  const fromSystem = cause instanceof Error && "code" in cause && typeof cause.code === "string";
  return fromSystem ? new OutputError(file, cause) : cause;
}

export async function makeFolder(folder: string): Promise<void> {
  try {
    await mkdir(folder, { recursive: true });
  } catch (cause) {
    throw outputError(folder, cause);
  }
}

/** Whether a file can be put here, found out before a long fit and not after it. */
export async function requireFolderOf(file: string): Promise<void> {
  const folder = dirname(file);
  if ((await pathKind(folder)) !== "folder") throw new OutputError(file, { code: "ENOENT" });
}
