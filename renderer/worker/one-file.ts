import { strToU8, zipSync, type Zippable } from "fflate";
import type { NamedBytes, RecordFiles } from "../../app/tasks/index.ts";

/** An archive of the same files is the same to the bit: the date that the format wants says nothing. */
const NO_DATE = new Date("1980-01-01T00:00:00");

/** A page may offer one file at a time: several become an archive. */
export function oneFile({ archive, files }: RecordFiles): NamedBytes {
  if (files.length === 1) return { name: files[0]!.name, bytes: strToU8(files[0]!.text) };
  const entries: Zippable = {};
  for (const { name, text } of files) entries[name] = [strToU8(text), { mtime: NO_DATE }];
  return { name: archive, bytes: zipSync(entries) };
}
