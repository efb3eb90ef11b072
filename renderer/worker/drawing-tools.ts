import cyrillicExt from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-cyrillic-ext-400-normal.woff?url";
import cyrillic from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-cyrillic-400-normal.woff?url";
import greekItalic from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-greek-400-italic.woff?url";
import greek from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-greek-400-normal.woff?url";
import latinExt from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-ext-400-normal.woff?url";
import latinItalic from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-400-italic.woff?url";
import latin from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-400-normal.woff?url";
import vietnamese from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-vietnamese-400-normal.woff?url";
import { initWasm, Resvg } from "@resvg/resvg-wasm";
import rasteriser from "@resvg/resvg-wasm/index_bg.wasm?url";
import type { DrawingTools } from "../../app/report/index.ts";

/** Typefaces and rasteriser from the page's own files; the rasteriser is fetched when the first picture is asked for. */
export async function drawingTools(): Promise<DrawingTools> {
  const all = (addresses: readonly string[]): Promise<Uint8Array[]> => Promise.all(addresses.map(get));
  return {
    fonts: {
      // The first that has a character draws it: the order of main/services/drawing-files.mjs.
      upright: await all([latin, latinExt, greek, cyrillic, cyrillicExt, vietnamese]),
      italic: await all([latinItalic, greekItalic]),
    },
    async rasterise(svg, width) {
      await startRasteriser();
      const drawing = new Resvg(svg, { fitTo: { mode: "width", value: width }, font: { fontBuffers: [] } });
      const picture = drawing.render();
      try {
        return picture.asPng();
      } finally {
        // Its memory is not the page's to collect.
        picture.free();
        drawing.free();
      }
    },
  };
}

let started: Promise<void> | null = null;

/** Once a worker: the package refuses to be started twice. */
function startRasteriser(): Promise<void> {
  started ??= get(rasteriser).then((bytes) => initWasm(bytes));
  return started;
}

async function get(address: string): Promise<Uint8Array<ArrayBuffer>> {
  const answer = await fetch(address);
  if (!answer.ok) throw new Error(`${address}: the shell answered ${answer.status}`);
  return new Uint8Array(await answer.arrayBuffer());
}
