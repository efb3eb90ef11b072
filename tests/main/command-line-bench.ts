import { mkdtemp, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { runCommandLine, type CommandLineIo } from "../../main/command-line/index.ts";
import { resolveProtocol, type RunglineResult } from "../../app/protocol/index.ts";
import { sha256 } from "../../app/base/index.ts";
import { programVersion, type FitOutcome, type FitRunner } from "../../main/services/index.ts";
import { makeResult } from "./make-result.ts";

/** One run of the command line in this process, with what it wrote. */
export interface Run {
  readonly status: number;
  readonly out: string;
  readonly error: string;
}

export interface Bench {
  readonly folder: string;
  /** Names of the files that were fitted, in order. */
  readonly fitted: string[];
  run(...argv: readonly string[]): Promise<Run>;
  remove(): Promise<void>;
}

export interface BenchOptions {
  /** Replaces the fitting; the default gives a hand-made result for any file. */
  readonly fit?: FitRunner["fit"];
  readonly signal?: AbortSignal;
  readonly io?: Partial<CommandLineIo>;
}

/** A temporary working folder and a command line whose fits are hand-made, so that only the command line is tested. */
export async function makeBench(options: BenchOptions = {}): Promise<Bench> {
  const folder = await mkdtemp(join(tmpdir(), "rungline-bench-"));
  const fitted: string[] = [];
  const fit = options.fit ?? ((request) => Promise.resolve(analysed(resultFor(request))));
  return {
    folder,
    fitted,
    run: async (...argv) => {
      let out = "";
      let error = "";
      const io: CommandLineIo = {
        stdout: (text) => {
          out += text;
        },
        stderr: (text) => {
          error += text;
        },
        terminal: null,
        interactive: false,
        environment: {},
        workingFolder: folder,
        makeRunner: () => ({
          fit: (request, ...rest) => {
            fitted.push(request.file);
            return fit(request, ...rest);
          },
          close: () => Promise.resolve(),
        }),
        now: () => "2026-01-02T03:04:05.000Z",
        ...options.io,
      };
      const status = await runCommandLine(argv, io, options.signal ?? new AbortController().signal);
      return { status, out, error };
    },
    remove: () => rm(folder, { recursive: true, force: true }),
  };
}

/** The hand-made result as the analysis of this request would carry it. */
export function resultFor(
  request: Parameters<FitRunner["fit"]>[0],
  changes: Partial<RunglineResult> = {},
): RunglineResult {
  const protocol = resolveProtocol(request.choices);
  if (!protocol.ok) throw new Error("the command line must have refused these choices");
  const result = makeResult({ protocol: protocol.value, ...changes });
  return {
    ...result,
    source: { ...result.source, file: request.file, sha256: sha256(request.bytes) },
    run: { ...result.run, version: programVersion() },
  };
}

export function analysed(result: RunglineResult): FitOutcome {
  const none = new Float64Array(0);
  return {
    type: "analysed",
    analysed: {
      result,
      curves: {
        unit: "1/cm",
        energy_eV: none,
        signal: none,
        sigma: none,
        used: new Uint8Array(0),
        model: none,
        background: none,
        tail: null,
        residual: none,
        lines: [],
      },
    },
  };
}
