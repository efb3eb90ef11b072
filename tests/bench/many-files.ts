/**
 * Many files and one long file through the real program: `npx tsx tests/bench/many-files.ts [files] [rows]`.
 * Spectra a second on one and two threads, peak memory at a quarter and at all of the files (flat), a run that is killed
 * in the middle and started again (bit for bit the same), and a file of a million rows. Processor time stands beside
 * wall time, since only that is fair on a machine that does other work. Linux only: memory and times from /proc.
 */
import { spawn } from "node:child_process";
import {
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  symlinkSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";

/** What the generator of the demo lends: plain JavaScript without declarations. */
interface Generator {
  readonly BACKGROUND: object;
  readonly CUPROUS: object;
  makeAbsorption(crystal: object): (energy: number) => number;
  makeGrid(pieces: readonly (readonly number[])[], random: object): number[];
  makeNoise(seed: number): { normal(): number };
}
const generator = new URL("../../fixtures/generated/make-demo.mjs", import.meta.url);
const { BACKGROUND, CUPROUS, makeAbsorption, makeGrid, makeNoise } = (await import(
  generator.href
)) as Generator;

const PROGRAM = fileURLToPath(new URL("../../main/rungline.mjs", import.meta.url));
const MATERIAL = ["--material", "cuprous-oxide-yellow-p"];
const files = Number(process.argv[2] ?? 200);
const rows = Number(process.argv[3] ?? 1_000_000);
const folder = mkdtempSync(join(tmpdir(), "rungline-many-"));

interface Cost {
  readonly status: number | null;
  readonly wall: number;
  readonly processor: number;
  readonly peakMB: number;
  readonly finished: number;
}

/** One run in a process of its own; killed after `killAfter` files where that is given. */
function run(words: readonly string[], killAfter = Infinity): Promise<Cost> {
  return new Promise((resolve) => {
    const began = performance.now();
    const child = spawn(process.execPath, [PROGRAM, ...words], { stdio: ["ignore", "ignore", "pipe"] });
    let peakMB = 0;
    let processor = 0;
    let finished = 0;
    const look = (): void => {
      try {
        const status = readFileSync(`/proc/${child.pid}/status`, "utf8");
        peakMB = Math.max(peakMB, Number(/VmHWM:\s+(\d+)/.exec(status)?.[1] ?? 0) / 1024);
        const fields = readFileSync(`/proc/${child.pid}/stat`, "utf8").split(") ")[1]!.split(" ");
        processor = (Number(fields[11]) + Number(fields[12])) / 100;
      } catch {
        // It has ended, or this system has no /proc.
      }
    };
    const timer = setInterval(look, 100);
    child.stderr.setEncoding("utf8").on("data", (text: string) => {
      finished += text.match(/^\[\d+\/\d+\] .*(converged|no result|no series)/gm)?.length ?? 0;
      look();
      if (finished >= killAfter) child.kill("SIGKILL");
    });
    child.once("close", (status) => {
      clearInterval(timer);
      resolve({ status, wall: (performance.now() - began) / 1000, processor, peakMB, finished });
    });
  });
}

function tell(what: string, count: number, cost: Cost, unit = "spectra"): void {
  const rate = (time: number): string => (count / time).toPrecision(3);
  console.log(
    `${what}: status ${cost.status}, ${cost.wall.toFixed(1)} s wall (${rate(cost.wall)} ${unit}/s), ` +
      `${cost.processor.toFixed(1)} s processor (${rate(cost.processor)} ${unit}/s and core), peak ${cost.peakMB.toFixed(0)} MB`,
  );
}

/** Five crystals in turn, each file with noise of its own; 9,000 points of transmittance. */
function writeSpectra(): void {
  const crystals = [0, 1, 2, 3, 4].map((k) => ({
    ...CUPROUS,
    gap_eV: 2.17205 - 0.00004 * k,
    rydberg_eV: 0.0913 + 0.0001 * k,
    defect0: 0.21 - 0.005 * k,
    offsets_eV: { 2: 0.0042, 3: 0.0011, 4: 0.00035 },
    floor_eV: (45 + 20 * k) * 1e-6,
    width_coefficient_eV: 0.016,
    strength_coefficient: 12.5 - 0.4 * k,
    asymmetry: -0.2,
    background: { ...BACKGROUND, polynomial: [14, 2.5, 0.8], square_root: 190 },
  }));
  const grid = makeGrid(
    [
      [2.14, 2.16, 4000],
      [2.16, 2.168, 2500],
      [2.168, 2.17305, 2500],
    ],
    makeNoise(7),
  );
  const clean = crystals.map((crystal) => {
    const alpha = makeAbsorption(crystal);
    return grid.map((energy) => Math.exp(-alpha(energy) * 34e-4));
  });
  mkdirSync(join(folder, "all"));
  mkdirSync(join(folder, "quarter"));
  for (let i = 0; i < files; i++) {
    const noise = makeNoise(50_000 + i);
    const body = grid.map(
      (energy, j) => `${energy.toFixed(7)},${(clean[i % 5]![j]! + 0.0025 * noise.normal()).toFixed(6)}`,
    );
    const head = `# Sample: TH-${i}\n# Batch: TH-${i % 5}\n# Temperature: 1.4 K\n# Thickness: 34 um\nPhoton energy (eV),Transmission\n`;
    const name = `s${String(i).padStart(4, "0")}.csv`;
    writeFileSync(join(folder, "all", name), `${head}${body.join("\n")}\n`);
    if (i < files / 4) symlinkSync(join(folder, "all", name), join(folder, "quarter", name));
  }
}

/** Everything of a folder of results but the part that tells when a run was. */
function contents(out: string): string {
  return readdirSync(out)
    .sort()
    .map(
      (name) => `${name} ${readFileSync(join(out, name), "utf8").replace(/"run": \{[\s\S]*?\n {2}\}/, "")}`,
    )
    .join("\n");
}

function writeLongFile(): void {
  const noise = makeNoise(99);
  const alpha = makeAbsorption({
    ...CUPROUS,
    gap_eV: 2.17205,
    rydberg_eV: 0.0913,
    defect0: 0.21,
    floor_eV: 45e-6,
    width_coefficient_eV: 0.016,
    strength_coefficient: 12.5,
    asymmetry: -0.2,
    background: { ...BACKGROUND, polynomial: [14, 2.5, 0.8], square_root: 190 },
  });
  // The curve on 20,000 energies, straight lines between them: a million sums of four hundred lines would take minutes.
  const knots = 20_000;
  const at = (i: number): number => 2.14 + (0.03305 * i) / knots;
  const curve = Float64Array.from({ length: knots + 2 }, (_, i) => Math.exp(-alpha(at(i)) * 34e-4));
  const lines = ["Photon energy (eV),Transmission"];
  for (let i = 0; i < rows; i++) {
    const x = (i / rows) * knots;
    const k = Math.floor(x);
    const value = curve[k]! + (x - k) * (curve[k + 1]! - curve[k]!) + 0.0025 * noise.normal();
    lines.push(`${at(x).toFixed(9)},${value.toFixed(6)}`);
  }
  writeFileSync(join(folder, "long.csv"), `${lines.join("\n")}\n`);
}

try {
  await run(["--version"]);
  writeSpectra();
  const fit = (from: string, out: string, threads: number, killAfter?: number): Promise<Cost> =>
    run(
      ["fit", join(folder, from), ...MATERIAL, "--threads", String(threads), "--out", join(folder, out)],
      killAfter,
    );
  const quarter = Math.ceil(files / 4);
  tell(`one thread, ${quarter} files`, quarter, await fit("quarter", "one", 1));
  const few = await fit("quarter", "two", 2);
  tell(`two threads, ${quarter} files`, quarter, few);
  const many = await fit("all", "whole", 2);
  tell(`two threads, ${files} files`, files, many);
  console.log(`memory at ${files} over ${quarter} files: ${(many.peakMB / few.peakMB).toFixed(2)}`);
  const killed = await fit("all", "killed", 2, Math.ceil(files / 3));
  const kept = readdirSync(join(folder, "killed")).filter((name) => /^s\d+\.json$/.test(name)).length;
  const again = await fit("all", "killed", 2);
  const same = contents(join(folder, "killed")) === contents(join(folder, "whole"));
  console.log(
    `killed after ${killed.finished} of ${files} (${kept} whole results), started again: status ${again.status}, ` +
      `${again.wall.toFixed(1)} s, ${same ? "the same as the undisturbed run" : "DIFFERENT from the undisturbed run"}`,
  );
  writeLongFile();
  tell(`inspect ${rows} rows`, rows, await run(["inspect", join(folder, "long.csv")]), "rows");
  const long = ["fit", join(folder, "long.csv"), ...MATERIAL, "--set", "signal.thickness_um=34"];
  tell(`fit ${rows} rows`, rows, await run([...long, "--out", join(folder, "long.json")]), "rows");
} finally {
  rmSync(folder, { recursive: true, force: true });
}
