import { strToU8, zipSync, type Zippable } from "fflate";
import type { NamedBytes, RecordFiles } from "../../app/tasks/index.ts";

/** An archive of the same files is the same to the bit: the date that the format wants says nothing. */
const NO_DATE = new Date("1980-01-01T00:00:00");

/** A page may offer one file at a time: several become an archive. */
export function oneFile({ archive, files }: RecordFiles): NamedBytes {
  const bytesOf = (content: string | Uint8Array): Uint8Array =>
    typeof content === "string" ? strToU8(content) : content;
  if (files.length === 1) return { name: files[0]!.name, bytes: bytesOf(files[0]!.content) };
  const entries: Zippable = {};
  for (const { name, content } of files) entries[name] = [bytesOf(content), { mtime: NO_DATE }];
  return { name: archive, bytes: zipSync(entries) };
}
