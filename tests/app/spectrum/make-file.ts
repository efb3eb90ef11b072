import { makeRandom } from "../../../app/base/index.ts";
import { DEFAULT_PROTOCOL, resolveProtocol, type ProtocolInput } from "../../../app/protocol/index.ts";
import {
  readSpectrum,
  wordSpectrumIssue,
  type Spectrum,
  type SpectrumIssue,
} from "../../../app/spectrum/index.ts";
import { readTable } from "../../../app/table/index.ts";

/** A spectrum of two lines on 2.10-2.18 eV: natural optical depth 0.5 to 1.4. */
export function depthAt(E: number): number {
  const line = (centre: number, half: number): number => half ** 2 / ((E - centre) ** 2 + half ** 2);
  return 0.5 + 0.9 * line(2.14, 0.004) + 0.4 * line(2.16, 0.002);
}

export const ENERGIES: readonly number[] = Array.from({ length: 161 }, (_, i) => 2.1 + i * 5e-4);

/** Rows made of functions of the energy, with a little seeded noise where asked. */
export function rowsOf(cells: readonly ((E: number, noise: () => number) => number | string)[]): string[][] {
  const random = makeRandom(7);
  return ENERGIES.map((E) =>
    cells.map((cell) => {
      const value = cell(E, () => random.normal());
      return typeof value === "string" ? value : String(Number(value.toPrecision(10)));
    }),
  );
}

export function fileText(
  header: readonly string[] | null,
  rows: readonly (readonly string[])[],
  before: readonly string[] = [],
  delimiter = ",",
): string {
  const quoted = (cell: string): string => (cell.includes(delimiter) ? `"${cell}"` : cell);
  const lines = rows.map((row) => row.join(delimiter));
  return (
    [...before, ...(header === null ? [] : [header.map(quoted).join(delimiter)]), ...lines].join("\n") + "\n"
  );
}

export function read(text: string, choices: ProtocolInput = {}): ReturnType<typeof readSpectrum> {
  const protocol = resolveProtocol(choices);
  if (!protocol.ok) throw new Error(JSON.stringify(protocol.issues));
  const { encoding, delimiter, decimal, header_line } = protocol.value.table;
  const table = readTable("file.csv", new TextEncoder().encode(text), {
    ...(encoding !== null && { encoding }),
    ...(delimiter !== null && { delimiter }),
    ...(decimal !== null && { decimal }),
    ...(header_line !== null && { headerLine: header_line }),
  });
  if (!table.ok) throw new Error(JSON.stringify(table.issues));
  return readSpectrum(table.value, "0".repeat(64), protocol.value);
}

export function spectrumOf(text: string, choices: ProtocolInput = {}): Spectrum {
  const result = read(text, choices);
  if (!result.ok) throw new Error(result.issues.map((issue) => wordSpectrumIssue(issue).message).join("; "));
  return result.value;
}

export function issueOf(text: string, choices: ProtocolInput = {}): SpectrumIssue {
  const result = read(text, choices);
  if (result.ok) throw new Error("was read");
  return result.issues[0]!;
}

export function codes(spectrum: Spectrum): string[] {
  return spectrum.notes.map((note) => note.code);
}

export function roleColumn(spectrum: Spectrum, role: string): number | undefined {
  return spectrum.columns.find((column) => column.role === role)?.column;
}

export { DEFAULT_PROTOCOL };
