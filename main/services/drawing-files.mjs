/**
 * What drawing figures as PDF and PNG needs on disk, as places below node_modules; the build copies them beside the
 * bundles, so that these need no package at run time. The first typeface that has a character draws it.
 */
const FONTS = "@fontsource/ibm-plex-sans/files/ibm-plex-sans-";
const SCRIPTS = ["latin", "latin-ext", "greek", "cyrillic", "cyrillic-ext", "vietnamese"];

export const DRAWING_FILES = {
  upright: SCRIPTS.map((script) => `${FONTS}${script}-400-normal.woff`),
  italic: ["latin", "greek"].map((script) => `${FONTS}${script}-400-italic.woff`),
  rasteriser: "@resvg/resvg-wasm/index_bg.wasm",
};
