import { join } from "node:path";

/**
 * esbuild options of the two Electron programs: the main process as a module, the preload script as CommonJS, which
 * is all that the sandbox takes. Electron itself is never bundled.
 */
export function electronBuildOptions(root) {
  const shared = {
    bundle: true,
    platform: "node",
    target: "node22",
    external: ["electron"],
    logLevel: "warning",
  };
  return [
    {
      ...shared,
      entryPoints: [join(root, "main/electron/index.ts")],
      outfile: join(root, "dist/main/electron.js"),
      format: "esm",
      // What is bundled may be CommonJS that asks for Node's own modules.
      banner: {
        js: 'import { createRequire as makeRequire } from "node:module"; const require = makeRequire(import.meta.url);',
      },
    },
    {
      ...shared,
      entryPoints: [join(root, "main/electron/preload/index.ts")],
      outfile: join(root, "dist/main/preload.cjs"),
      format: "cjs",
    },
  ];
}
