import { z } from "zod";
import type { Host, NamedBytes } from "../../app/tasks/index.ts";
import { askForFiles, offerDownload } from "./page-files.ts";

// The content policy forbids code made from strings.
z.config({ jitless: true });

const aboutSchema = z.object({ version: z.string(), node: z.string() });
const filesSchema = z.object({
  files: z.array(z.object({ name: z.string(), base64: z.string() })),
  choices: z.unknown().optional(),
});

type Fetch = (address: string) => Promise<Response>;

/** The loopback shell: facts and files over HTTP, file input and download in the page itself. */
export function loopbackHost(page: Document, fetchAddress: Fetch = (address) => fetch(address)): Host {
  async function get<T>(path: string, schema: z.ZodType<T>): Promise<T> {
    const response = await fetchAddress(new URL(path, page.baseURI).href);
    if (!response.ok) throw new Error(`${path}: the shell answered ${response.status}`);
    return schema.parse(await response.json());
  }
  return {
    shell: "loopback",
    about: () => get("host/about", aboutSchema),
    async startFiles() {
      const { files, choices } = await get("host/start", filesSchema);
      return { files: files.map(decode), choices: choices ?? {} };
    },
    demoFiles: async () => (await get("host/demo", filesSchema)).files.map(decode),
    demoSeries: async () => (await get("host/demo-series", filesSchema)).files.map(decode),
    openFiles: () => askForFiles(page),
    saveFile(suggestedName, bytes) {
      offerDownload(page, suggestedName, bytes);
      return Promise.resolve(suggestedName);
    },
  };
}

function decode({ name, base64 }: { name: string; base64: string }): NamedBytes {
  const text = atob(base64);
  const bytes = new Uint8Array(text.length);
  for (let i = 0; i < text.length; i++) bytes[i] = text.charCodeAt(i);
  return { name, bytes };
}
