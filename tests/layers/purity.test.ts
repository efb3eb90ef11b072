import { join } from "node:path";
import ts from "typescript";
import { describe, expect, it } from "vitest";
import { ROOT } from "./source-files.ts";

/** Compiles texts as if each were a file of that folder, under the folder's own compiler settings. */
function errorsOf(folder: string, ...texts: readonly string[]): string[][] {
  const settings = join(ROOT, folder, "tsconfig.json");
  const parsed = ts.parseJsonConfigFileContent(
    ts.readConfigFile(settings, ts.sys.readFile).config,
    ts.sys,
    join(ROOT, folder),
  );
  const options: ts.CompilerOptions = {
    ...parsed.options,
    composite: false,
    noEmit: true,
    incremental: false,
  };
  delete options.tsBuildInfoFile;
  const added = new Map(texts.map((text, i) => [join(ROOT, folder, `purity-check-${i}.ts`), text]));
  const host = ts.createCompilerHost(options);
  const { getSourceFile, fileExists, readFile } = host;
  host.getSourceFile = (name, ...rest) => {
    const text = added.get(name);
    return text === undefined
      ? getSourceFile(name, ...rest)
      : ts.createSourceFile(name, text, ts.ScriptTarget.ES2023);
  };
  host.fileExists = (name) => added.has(name) || fileExists(name);
  host.readFile = (name) => added.get(name) ?? readFile(name);
  // All files of the project take part: one of them could bring in the types that this test is about.
  const program = ts.createProgram([...parsed.fileNames, ...added.keys()], options, host);
  return Array.from(added.keys(), (file) =>
    program
      .getSemanticDiagnostics(program.getSourceFile(file))
      .map((one) => ts.flattenDiagnosticMessageText(one.messageText, "\n")),
  );
}

describe("the compiler keeps app pure", () => {
  it("process, Buffer, require, document, window, timers and Node's modules do not build there; plain code does", () => {
    const names = [
      "process",
      "Buffer",
      "require",
      "document",
      "window",
      "setTimeout",
      "localStorage",
      "fetch",
    ];
    const [globals, modules, plain] = errorsOf(
      "app",
      names.map((name) => `export const of_${name}: unknown = ${name};`).join("\n"),
      'import { readFileSync } from "node:fs";\nexport const x = readFileSync;',
      "export const x: number = Math.sqrt(2);",
    );
    for (const name of names) expect(globals!.join("\n"), name).toContain(`'${name}'`);
    expect(globals).toHaveLength(names.length);
    expect(modules!.join()).toContain("node:fs");
    expect(plain).toStrictEqual([]);
  });

  it("process does not build in the page, nor document in its worker", () => {
    expect(errorsOf("renderer", "export const x: unknown = process;").join()).toContain("'process'");
    expect(errorsOf("renderer/worker", "export const x: unknown = document;").join()).toContain("'document'");
  });
});
