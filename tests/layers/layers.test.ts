import { existsSync } from "node:fs";
import { dirname, join } from "node:path";
import { describe, expect, it } from "vitest";
import { importsBelow, isNodeModule, packageOf, ROOT, type Import } from "./source-files.ts";

/** Rooms of app/, lowest row first; a room imports only from lower rows. Rooms to come have their row already. */
const ROWS: readonly (readonly string[])[] = [
  ["base"],
  ["units", "solve"],
  ["table", "lines", "laws"],
  ["spectrum", "protocol"],
  ["fit"],
  ["series"],
  ["analysis"],
  ["power", "temperature"],
  ["batch"],
  ["project", "report"],
  ["tasks"],
];

/** What a room of app/ may take from outside: pure packages without DOM or Node. */
const APP_PACKAGES: Readonly<Record<string, readonly string[]>> = {
  protocol: ["zod"],
  project: ["zod", "fflate"],
  table: ["papaparse"],
  series: ["ml-levenberg-marquardt"],
  power: ["ml-levenberg-marquardt"],
  report: ["@cantoo/pdf-lib", "fontkit"],
  temperature: ["ml-levenberg-marquardt"],
  solve: ["ml-levenberg-marquardt"],
};

const room = (file: string): string => file.split("/")[1]!;
const rowOf = (name: string): number => ROWS.findIndex((row) => row.includes(name));
const told = (broken: readonly Import[], why: string): string =>
  broken.map(({ from, to }) => `${from} imports ${to}: ${why}`).join("\n");

const app = importsBelow("app");
const main = importsBelow("main");
const renderer = importsBelow("renderer");

interface Rule {
  readonly name: string;
  readonly why: string;
  readonly among: readonly Import[];
  broken(one: Import): boolean;
}

const RULES: readonly Rule[] = [
  {
    name: "app imports nothing outside app",
    why: "the science must run in a worker, a window and a command line alike",
    among: app,
    broken: ({ to, relative }) => relative && !to.startsWith("app/"),
  },
  {
    name: "app does not use Node",
    why: "a page has no Node",
    among: app,
    broken: ({ to }) => isNodeModule(to),
  },
  {
    name: "a room of app imports only the packages it is given",
    why: "a package may bring DOM or Node with it, and every shell would carry it",
    among: app,
    broken: ({ from, to, relative }) =>
      !relative && !isNodeModule(to) && !(APP_PACKAGES[room(from)] ?? []).includes(packageOf(to)),
  },
  {
    name: "every room of app has a row",
    why: "a room without a row escapes the order of rooms",
    among: app,
    broken: ({ from, to, relative }) =>
      rowOf(room(from)) < 0 || (relative && to.startsWith("app/") && rowOf(room(to)) < 0),
  },
  {
    name: "a room imports only from rows below its own",
    why: "rooms on one row do not know each other, and no lower room knows a higher one",
    among: app,
    broken: ({ from, to, relative }) =>
      relative && room(from) !== room(to) && rowOf(room(to)) >= rowOf(room(from)),
  },
  {
    name: "outsiders reach a room of app only through its index",
    why: "what is behind the index may change without asking",
    among: [...app, ...main, ...renderer],
    broken: ({ from, to, relative }) =>
      relative &&
      to.startsWith("app/") &&
      !(from.startsWith("app/") && room(from) === room(to)) &&
      to !== `app/${room(to)}/index.ts`,
  },
  {
    name: "a room's own files do not import its index",
    why: "the index would import itself through them",
    among: app,
    broken: ({ from, to }) => room(from) === room(to) && to === `app/${room(from)}/index.ts`,
  },
  {
    name: "main does not import renderer",
    why: "the shells serve the page as built files, they do not run it",
    among: main,
    broken: ({ to, relative }) => relative && to.startsWith("renderer/"),
  },
  {
    name: "renderer does not import main",
    why: "the page has no Node; it speaks to its shell through the host interface",
    among: renderer,
    broken: ({ to, relative }) => relative && to.startsWith("main/"),
  },
  {
    name: "renderer does not use Node, vite.config.ts apart",
    why: "a page has no Node",
    among: renderer,
    broken: ({ from, to }) => isNodeModule(to) && from !== "renderer/vite.config.ts",
  },
  {
    name: "renderer does not import electron",
    why: "the page is sandboxed; the preload script is its bridge",
    among: renderer,
    broken: ({ to }) => packageOf(to) === "electron",
  },
  {
    name: "only main/electron imports electron",
    why: "everything else must run where Electron's binary cannot be had",
    among: main,
    broken: ({ from, to }) => packageOf(to) === "electron" && !from.startsWith("main/electron/"),
  },
  {
    name: "main, renderer and app do not import tests or fixtures",
    why: "what ships must not depend on what does not",
    among: [...app, ...main, ...renderer],
    broken: ({ to, relative }) => relative && /^(tests|fixtures)\//.test(to),
  },
];

describe("who may import whom", () => {
  it.each(RULES.map((rule) => [rule.name, rule] as const))("%s", (_name, { among, broken, why }) => {
    expect(told(among.filter(broken), why)).toBe("");
  });

  it("the rules see the imports: there are many, and each relative one names a file that exists", () => {
    expect(app.length).toBeGreaterThan(50);
    expect(main.length).toBeGreaterThan(20);
    const missing = [...app, ...main, ...renderer].filter(
      ({ to, relative }) =>
        relative &&
        !to.startsWith("dist/") &&
        !existsSync(join(ROOT, to)) &&
        !existsSync(`${join(ROOT, to)}.ts`),
    );
    expect(told(missing, "no such file")).toBe("");
  });

  it("a breach of each rule would be seen", () => {
    const breach: Readonly<Record<string, Import>> = {
      "app imports nothing outside app": rel("app/base/x.ts", "main/page/index.ts"),
      "app does not use Node": pack("app/base/x.ts", "node:fs"),
      "a room of app imports only the packages it is given": pack("app/base/x.ts", "zod"),
      "every room of app has a row": rel("app/base/x.ts", "app/nowhere/index.ts"),
      "a room imports only from rows below its own": rel("app/lines/x.ts", "app/laws/index.ts"),
      "outsiders reach a room of app only through its index": rel("main/page/x.ts", "app/base/note.ts"),
      "a room's own files do not import its index": rel("app/base/x.ts", "app/base/index.ts"),
      "main does not import renderer": rel("main/page/x.ts", "renderer/frame/theme.ts"),
      "renderer does not import main": rel("renderer/x.ts", "main/page/index.ts"),
      "renderer does not use Node, vite.config.ts apart": pack("renderer/x.ts", "fs"),
      "renderer does not import electron": pack("renderer/x.ts", "electron"),
      "only main/electron imports electron": pack("main/page/x.ts", "electron"),
      "main, renderer and app do not import tests or fixtures": rel("app/base/x.ts", "tests/run.mjs"),
    };
    for (const rule of RULES) expect(rule.broken(breach[rule.name]!), rule.name).toBe(true);
  });

  it("a room has an index and nothing but whole rooms stands in app", () => {
    const rooms = new Set(app.map(({ from }) => dirname(from)));
    for (const one of rooms)
      expect(existsSync(join(ROOT, one.split("/").slice(0, 2).join("/"), "index.ts")), one).toBe(true);
  });
});

function rel(from: string, to: string): Import {
  return { from, to, relative: true };
}

function pack(from: string, to: string): Import {
  return { from, to, relative: false };
}
