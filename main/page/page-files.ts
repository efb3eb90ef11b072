import { randomBytes } from "node:crypto";
import { readdir, readFile } from "node:fs/promises";
import { join } from "node:path";
import { mediaType } from "./media-type.ts";
import { pageHeaders } from "./policy.ts";

/** Address path to file. What is not in the list is not served, so no spelling of a path can lead out of the folder. */
export type PageFiles = ReadonlyMap<string, string>;

export interface PageAnswer {
  readonly status: number;
  readonly headers: Readonly<Record<string, string>>;
  readonly body: Uint8Array;
}

/** Every regular file below the built page's folder; links are left out, since they may lead elsewhere. */
export async function listPageFiles(folder: string): Promise<PageFiles> {
  const files = new Map<string, string>();
  // A walk of our own: a recursive readdir is not to be relied on inside a packed archive.
  const walk = async (below: string): Promise<void> => {
    for (const entry of await readdir(join(folder, below), { withFileTypes: true })) {
      const path = `${below}/${entry.name}`;
      if (entry.isDirectory()) await walk(path);
      else if (entry.isFile()) files.set(path, join(folder, path));
    }
  };
  await walk("");
  const index = files.get("/index.html");
  if (index !== undefined) files.set("/", index);
  return files;
}

const NONCE_MARK = /(<meta property="csp-nonce" nonce)(?:="[^"]*")?/;

/** The file at an address path (still percent-encoded), with the headers of the content policy and a fresh nonce. */
export async function answerPage(files: PageFiles, path: string): Promise<PageAnswer> {
  const file = files.get(decodePath(path));
  if (file === undefined) return plainAnswer(404, "There is nothing at this address.");
  const nonce = randomBytes(16).toString("base64");
  let body: Uint8Array = await readFile(file);
  if (file.endsWith(".html")) {
    const text = new TextDecoder().decode(body);
    body = new TextEncoder().encode(text.replace(NONCE_MARK, `$1="${nonce}"`));
  }
  return { status: 200, headers: { ...pageHeaders(nonce), "Content-Type": mediaType(file) }, body };
}

export function plainAnswer(status: number, text: string): PageAnswer {
  return {
    status,
    headers: { ...pageHeaders(null), "Content-Type": "text/plain; charset=utf-8" },
    body: new TextEncoder().encode(`${text}\n`),
  };
}

function decodePath(path: string): string {
  try {
    return decodeURIComponent(path);
  } catch {
    return "";
  }
}
