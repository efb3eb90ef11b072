import { fileURLToPath } from "node:url";
import react from "@vitejs/plugin-react";
import { defineConfig } from "vite";

const here = (path: string): string => fileURLToPath(new URL(path, import.meta.url));

/** The page is served from any address and under a strict content policy: relative paths, nothing inlined. */
export default defineConfig({
  root: here("."),
  base: "./",
  publicDir: here("./public"),
  plugins: [react()],
  // plotly.js expects the name `global`; the style sheet of a map library that it names is never used here.
  define: { global: "globalThis" },
  resolve: { alias: { "maplibre-gl/dist/maplibre-gl.css": here("./styles/empty.css") } },
  worker: { format: "es" },
  build: {
    outDir: here("../dist/renderer"),
    emptyOutDir: true,
    target: "es2023",
    assetsInlineLimit: 0,
    modulePreload: { polyfill: false },
    chunkSizeWarningLimit: 4000,
    reportCompressedSize: false,
  },
});
