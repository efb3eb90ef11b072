/**
 * Time of one spectrum fit, from start values to covariance, with energies, widths, areas and asymmetries free line by
 * line; beside it scipy's MINPACK from the same start where python3 with scipy is present, and how the time grows:
 *
 *   npx tsx tests/bench/engine-bench.ts [--quick]
 *
 * Beside the wall time stands the processor time of the thread that fits (Linux only), which a busy machine changes less.
 */
import { execFileSync } from "node:child_process";
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { cpus, loadavg, tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { solveSeparable, type SeparableSolution } from "../../app/solve/index.ts";
import { makeEngineProblem, type EngineProblem } from "./engine-problem.ts";

const RUNS = 9;
/** Fits before those that count; the first of all is printed. */
const WARM_UP = 12;
const quick = process.argv.includes("--quick");
const GAUSS_STD_eV = 20e-6;

interface Timing {
  readonly median: number;
  /** Median of the thread's processor time, NaN where the system does not tell. */
  readonly cpu: number;
  readonly least: number;
  readonly first: number;
  readonly solution: SeparableSolution;
}

interface PeerRun {
  readonly ms: number;
  readonly cpu_ms: number;
  readonly evaluations: number;
  readonly chi2: number;
}

interface Peer {
  readonly scipy: string;
  readonly numpy: string;
  readonly python: string;
  readonly numerical: PeerRun;
  readonly analytic: PeerRun | null;
}

const SCHEDULE = "/proc/thread-self/schedstat";

/** Milliseconds that this thread has run. */
function threadTime(): number {
  return existsSync(SCHEDULE) ? Number(readFileSync(SCHEDULE, "utf8").split(" ")[0]) / 1e6 : NaN;
}

function timeEngine({ problem, theta }: EngineProblem, withRows = true): Timing {
  const times: number[] = [];
  const ran: number[] = [];
  let solution: SeparableSolution | null = null;
  // Without `condense` every row is used all the way.
  const plain = {
    rows: problem.rows,
    nonlinear: problem.nonlinear,
    linear: problem.linear,
    data: problem.data,
    weights: problem.weights,
    columns: problem.columns.bind(problem),
    derivatives: problem.derivatives.bind(problem),
  };
  for (let run = -WARM_UP; run < RUNS; run++) {
    const ranBefore = threadTime();
    const began = performance.now();
    solution = solveSeparable(withRows ? problem : plain, theta, {
      gradientTolerance: 1e-7,
      costTolerance: 1e-11,
    });
    times.push(performance.now() - began);
    ran.push(threadTime() - ranBefore);
  }
  const first = times[0]!;
  times.splice(0, WARM_UP);
  ran.splice(0, WARM_UP);
  times.sort((a, b) => a - b);
  ran.sort((a, b) => a - b);
  return { median: times[RUNS >> 1]!, cpu: ran[RUNS >> 1]!, least: times[0]!, first, solution: solution! };
}

function timePeer(problem: EngineProblem): Peer | null {
  const folder = mkdtempSync(join(tmpdir(), "engine-bench-"));
  try {
    const file = join(folder, "problem.json");
    const { points, spec, theta, coefficients, lines } = problem;
    writeFileSync(
      file,
      JSON.stringify({
        energy: [...points.energy],
        signal: [...points.signal],
        noise: points.sigma[0],
        lines,
        gauss_std: spec.gaussStd,
        energies: [...theta.subarray(0, lines)],
        widths: [...theta.subarray(lines)],
        coefficients: [...coefficients],
        background: spec.background.map((column) => [...column.values]),
        repeats: quick ? 1 : 3,
      }),
    );
    const script = fileURLToPath(new URL("scipy_engine.py", import.meta.url));
    return JSON.parse(execFileSync("python3", [script, file], { encoding: "utf8" })) as Peer;
  } catch (thrown) {
    const text = thrown instanceof Error ? thrown.message.split("\n")[0]! : String(thrown);
    console.log(`  scipy could not be run (${text}): no ratios`);
    return null;
  } finally {
    rmSync(folder, { recursive: true });
  }
}

const ms = (value: number): string => `${value < 100 ? value.toFixed(1) : value.toFixed(0)} ms`;
const load = (): string => `load ${loadavg()[0]!.toFixed(2)} on ${cpus().length} cores`;

console.log(`engine bench: node ${process.version}, ${cpus()[0]?.model.trim() ?? "?"}, ${load()}`);
console.log(
  "engine: median of nine warm fits, covariance included, on one thread; scipy: least time of its repeats",
);
for (const [lines, points, gauss, layout] of [
  [12, 8000, 0, "crowded"],
  [24, 20000, 0, "crowded"],
  [12, 8000, 0, "ladder"],
  [12, 8000, GAUSS_STD_eV, "crowded"],
  [24, 20000, GAUSS_STD_eV, "crowded"],
] as const) {
  const problem = makeEngineProblem(lines, points, gauss, layout);
  const engine = timeEngine(problem);
  const everyRow = timeEngine(problem, false);
  const { solution } = engine;
  const rows = problem.problem.condense(solution.theta)?.problem.rows ?? points;
  console.log(
    `\n${problem.name} (${problem.theta.length + problem.coefficients.length} parameters, ${rows} condensed rows)`,
  );
  console.log(
    `  engine           ${ms(engine.median)} (thread ${ms(engine.cpu)}, least ${ms(engine.least)}, first ${ms(engine.first)}); ` +
      `${solution.termination}, ${solution.iterations} iterations, chi2 ${solution.chi2.toPrecision(13)}, condition ${solution.condition.toPrecision(2)}`,
  );
  console.log(`  same, every row  ${ms(everyRow.median)} (thread ${ms(everyRow.cpu)})`);
  if (quick && points > 10_000) continue;
  const peer = timePeer(problem);
  if (peer === null) continue;
  for (const [name, run] of [
    ["numerical", peer.numerical],
    ["analytic", peer.analytic],
  ] as const) {
    if (run === null) continue;
    const apart = Math.abs(run.chi2 / solution.chi2 - 1);
    console.log(
      `  scipy ${name.padEnd(10)} ${ms(run.ms)} (thread ${ms(run.cpu_ms)}), ratio ${(run.ms / engine.median).toFixed(1)} ` +
        `(thread ${(run.cpu_ms / engine.cpu).toFixed(1)}); ${run.evaluations} evaluations, ` +
        `chi2 apart ${apart.toExponential(1)}${apart > 1e-9 ? " (MORE THAN 1e-9)" : ""}`,
    );
  }
  console.log(`  scipy ${peer.scipy}, numpy ${peer.numpy}, python ${peer.python}; ${load()}`);
}

console.log("\ngrowth, plain lines, crowded:");
for (const [lines, points] of [
  [6, 8000],
  [12, 8000],
  [24, 8000],
  [48, 8000],
  [12, 2000],
  [12, 32000],
  [12, 128000],
] as const) {
  const { median, cpu, solution } = timeEngine(makeEngineProblem(lines, points, 0, "crowded"));
  console.log(
    `  ${String(lines).padStart(3)} lines x ${String(points).padStart(6)} points  ${ms(median)}, thread ${ms(cpu)} (${solution.termination})`,
  );
}
console.log(load());
