import { readFile } from "node:fs/promises";
import { basename } from "node:path";
import { fileURLToPath } from "node:url";
import { initWasm, Resvg } from "@resvg/resvg-wasm";
import type { DrawingTools } from "../../app/report/index.ts";
import { DRAWING_FILES } from "./drawing-files.mjs";

/** Typefaces and rasteriser from disk; the rasteriser is read when the first picture is asked for. */
export async function drawingTools(): Promise<DrawingTools> {
  const all = (files: readonly string[]): Promise<Uint8Array[]> => Promise.all(files.map(read));
  return {
    fonts: { upright: await all(DRAWING_FILES.upright), italic: await all(DRAWING_FILES.italic) },
    async rasterise(svg, width) {
      await startRasteriser();
      const drawing = new Resvg(svg, {
        fitTo: { mode: "width", value: width },
        font: { fontBuffers: [] },
      });
      const picture = drawing.render();
      try {
        return picture.asPng();
      } finally {
        // Its memory is not the runtime's to collect.
        picture.free();
        drawing.free();
      }
    },
  };
}

let started: Promise<void> | null = null;

/** Once a process: the package refuses to be started twice. */
function startRasteriser(): Promise<void> {
  started ??= read(DRAWING_FILES.rasteriser).then((bytes) => initWasm(new Uint8Array(bytes)));
  return started;
}

/** In a bundle beside it (main/build.mjs), in the source among the packages. */
function read(file: string): Promise<Uint8Array> {
  const bundled = /[\\/]dist[\\/]main[\\/]/.exec(fileURLToPath(import.meta.url));
  return readFile(
    bundled === null
      ? new URL(`../../node_modules/${file}`, import.meta.url)
      : new URL(`../drawing/${basename(file)}`, import.meta.url),
  );
}
