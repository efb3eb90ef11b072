import { basename, dirname, extname, join, resolve } from "node:path";
import {
  makeFolder,
  mayReplace,
  pathKind,
  requireFolderOf,
  resultNames,
  type InputList,
  type OutputKind,
} from "../services/index.ts";
import { UsageError } from "./exit-status.ts";
import type { Format } from "./format.ts";

export type { Format };

/** Where results go. `print`: standard output; `file`: one result; `folder`: one a file and a summary. */
export type OutputPlace =
  | { readonly kind: "print"; readonly format: Format }
  | {
      readonly kind: "file";
      readonly format: Format;
      readonly result: string;
      readonly protocol: string;
      /** Where the fitted curves go; null where they are not asked for. */
      readonly curves: string | null;
    }
  | {
      readonly kind: "folder";
      readonly format: Format;
      readonly folder: string;
      readonly protocol: string;
      readonly summary: string;
      readonly summaryJson: string;
      readonly failures: string;
      /** NAME.json for each input, in order. */
      readonly results: readonly string[];
      /** NAME.csv or NAME.txt beside it, where that format was asked for. */
      readonly others: readonly (string | null)[];
      /** NAME.curves.csv, where curves were asked for. */
      readonly curves: readonly (string | null)[];
    };

/** Found out and, where something is in the way, refused before any work is done. */
export async function placeOutput(
  out: string | undefined,
  format: Format | undefined,
  inputs: InputList,
  workingFolder: string,
  withCurves = false,
): Promise<OutputPlace> {
  if (out === undefined && withCurves)
    throw new UsageError("--curves writes files beside the results: name their place with --out");
  if (out === undefined) return { kind: "print", format: format ?? "text" };
  const path = resolve(workingFolder, out);
  const toFolder = inputs.hasFolder || inputs.files.length > 1;
  return toFolder
    ? placeInFolder(path, out, format ?? "json", inputs, workingFolder, withCurves)
    : placeInFile(path, out, format ?? formatOf(path), withCurves);
}

const ENDINGS: Readonly<Record<string, Format>> = {
  "": "json",
  ".json": "json",
  ".csv": "csv",
  ".tex": "latex",
  ".txt": "text",
  ".text": "text",
};

/** What the name says, JSON where it has no ending; an ending that means nothing here is refused, not guessed. */
export function formatOf(path: string): Format {
  const ending = extname(path).toLowerCase();
  const format = ENDINGS[ending];
  if (format === undefined)
    throw new UsageError(
      `--out ${basename(path)}: the ending ${ending} does not say how to write; end it .json, .csv, .txt or .tex, or name a --format`,
    );
  return format;
}

async function placeInFile(
  path: string,
  shown: string,
  format: Format,
  withCurves: boolean,
): Promise<OutputPlace> {
  if (shown.endsWith("/") || (await pathKind(path)) === "folder")
    throw new UsageError(`--out ${shown}: is a folder, but for one input it names a file`);
  const beside = join(dirname(path), basename(path, extname(path)));
  const protocol = `${beside}.protocol.json`;
  const curves = withCurves ? `${beside}.curves.csv` : null;
  await refuseOthers([
    [path, "result"],
    [protocol, "protocol"],
    ...(curves === null ? [] : [[curves, "curves"] as const]),
  ]);
  await requireFolderOf(path);
  return { kind: "file", format, result: path, protocol, curves };
}

async function placeInFolder(
  folder: string,
  shown: string,
  format: Format,
  inputs: InputList,
  workingFolder: string,
  withCurves: boolean,
): Promise<OutputPlace> {
  const kind = await pathKind(folder);
  if (kind !== "none" && kind !== "folder")
    throw new UsageError(`--out ${shown}: is a file, but for several inputs or a folder it names a folder`);
  const names = resultNames(inputs.files, workingFolder);
  const ending = { json: null, csv: ".csv", text: ".txt", latex: ".tex" }[format];
  const place: OutputPlace = {
    kind: "folder",
    format,
    folder,
    protocol: join(folder, "protocol.json"),
    summary: join(folder, "summary.csv"),
    summaryJson: join(folder, "summary.json"),
    failures: join(folder, "failures.json"),
    results: names.map((name) => join(folder, `${name}.json`)),
    others: names.map((name) => (ending === null ? null : join(folder, name + ending))),
    curves: names.map((name) => (withCurves ? join(folder, `${name}.curves.csv`) : null)),
  };
  await refuseOthers([
    [place.protocol, "protocol"],
    [place.summary, "summary"],
    [place.summaryJson, "summary"],
    [place.failures, "failures"],
    ...place.results.map((file): [string, OutputKind] => [file, "result"]),
    ...place.curves.flatMap((file): [string, OutputKind][] => (file === null ? [] : [[file, "curves"]])),
    ...place.others.flatMap((file): [string, OutputKind][] => (file === null ? [] : [[file, "result"]])),
  ]);
  await makeFolder(folder);
  return place;
}

/** A result may be replaced by a result; nothing else that exists is touched. */
async function refuseOthers(files: readonly (readonly [string, OutputKind])[]): Promise<void> {
  for (const [file, kind] of files) {
    if (!(await mayReplace(file, kind)))
      throw new UsageError(
        `${file}: exists and is not a ${kind} of Rungline; it is not replaced, choose another --out`,
      );
  }
}
