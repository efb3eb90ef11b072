import { mkdir, open, stat } from "node:fs/promises";
import { dirname } from "node:path";
import writeFileAtomic from "write-file-atomic";

/** A file could not be written; `message` names it and says why. */
export class OutputError extends Error {
  readonly file: string;

  constructor(file: string, cause: unknown) {
    super(`${file}: ${reasonInWords(cause)}`);
    this.name = "OutputError";
    this.file = file;
  }
}

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
export async function writeWhole(file: string, text: string): Promise<void> {
  try {
    if ((await pathKind(file)) === "other") {
      const handle = await open(file, "w");
      try {
        await handle.writeFile(text);
      } finally {
        await handle.close();
      }
    } else await writeFileAtomic(file, text);
  } catch (cause) {
    throw new OutputError(file, cause);
  }
}

export async function makeFolder(folder: string): Promise<void> {
  try {
    await mkdir(folder, { recursive: true });
  } catch (cause) {
    throw new OutputError(folder, cause);
  }
}

/** Whether a file can be put here, found out before a long fit and not after it. */
export async function requireFolderOf(file: string): Promise<void> {
  const folder = dirname(file);
  if ((await pathKind(folder)) !== "folder") throw new OutputError(file, { code: "ENOENT" });
}

/** What the operating system said, in plain words. */
export function reasonInWords(cause: unknown): string {
  const code = typeof cause === "object" && cause !== null && "code" in cause ? String(cause.code) : "";
  switch (code) {
    case "ENOENT":
      return "no such file or folder";
    case "EACCES":
    case "EPERM":
      return "no permission";
    case "EISDIR":
      return "is a folder";
    case "ENOTDIR":
      return "a part of the path is not a folder";
    case "ENOSPC":
      return "no space left on the disk";
    case "EROFS":
      return "the disk is read-only";
    case "EPIPE":
      return "the reader has gone away";
    case "ENAMETOOLONG":
      return "the name is too long";
    default:
      return cause instanceof Error ? cause.message : String(cause);
  }
}
