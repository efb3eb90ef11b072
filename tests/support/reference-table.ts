import { readFileSync } from "node:fs";
import { join } from "node:path";

/** A small table of fixtures/reference as records of text; lines that begin with # are its sources. */
export function referenceTable(name: string): Record<string, string>[] {
  const text = readFileSync(join(import.meta.dirname, "..", "..", "fixtures", "reference", name), "utf8");
  const [header = "", ...rows] = text.split("\n").filter((line) => line !== "" && !line.startsWith("#"));
  const names = header.split(",");
  return rows.map((row) => {
    const cells = row.split(",");
    return Object.fromEntries(names.map((one, j) => [one, cells[j] ?? ""]));
  });
}
