import { readdirSync, readFileSync } from "node:fs";
import { dirname, join, posix, relative, sep } from "node:path";
import { fileURLToPath } from "node:url";
import { builtinModules } from "node:module";

export const ROOT = fileURLToPath(new URL("../..", import.meta.url)).replace(/[\\/]$/, "");

/** Every file below a folder of the repository, as `app/base/note.ts`. */
export function filesBelow(folder: string): string[] {
  return readdirSync(join(ROOT, folder), { withFileTypes: true, recursive: true })
    .filter((entry) => entry.isFile())
    .map((entry) => relative(ROOT, join(entry.parentPath, entry.name)).split(sep).join("/"))
    .sort();
}

export interface Import {
  readonly from: string;
  /** A file of the repository where the import is relative, else the package as written. */
  readonly to: string;
  readonly relative: boolean;
}

const IMPORT =
  /(?:\bfrom\s*|\bimport\s*\(\s*|\bimport\s+|\brequire\s*\(\s*|\bnew URL\(\s*(?=["'][^"']+\.tsx?["']))["']([^"'\n]+)["']/g;

/** All imports of the TypeScript and JavaScript below a folder: static, dynamic, of types, of workers. */
export function importsBelow(folder: string): Import[] {
  return filesBelow(folder)
    .filter((file) => /\.(tsx?|mjs|js|mts)$/.test(file))
    .flatMap((file) => {
      const text = withoutComments(readFileSync(join(ROOT, file), "utf8"));
      return Array.from(text.matchAll(IMPORT), (match): Import => {
        const written = match[1]!.replace(/\?.*$/, "");
        const isRelative = written.startsWith(".");
        return {
          from: file,
          to: isRelative ? posix.normalize(posix.join(dirname(file), written)) : written,
          relative: isRelative,
        };
      });
    });
}

function withoutComments(text: string): string {
  return text.replace(/\/\*[\s\S]*?\*\//g, "").replace(/^\s*\/\/.*$/gm, "");
}

/** `@scope/name/deep` to `@scope/name`. */
export function packageOf(written: string): string {
  return written.split("/", written.startsWith("@") ? 2 : 1).join("/");
}

export function isNodeModule(written: string): boolean {
  return written.startsWith("node:") || builtinModules.includes(written);
}
