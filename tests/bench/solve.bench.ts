/**
 * Time of one iteration of the least-squares engine, model evaluation apart: `npx tsx tests/bench/solve.bench.ts`.
 * Lines of a Lorentzian pair on a polynomial, every derivative analytic; the model's own time is measured and
 * subtracted.
 */
import { solveSeparable } from "../../app/solve/index.ts";
import type { SeparableProblem } from "../../app/solve/index.ts";
import { makeRandom } from "../../app/base/index.ts";

function problemOf(
  m: number,
  lines: number,
  background: number,
): { problem: SeparableProblem; start: Float64Array; model: () => number } {
  const p = 2 * lines;
  const k = lines + background;
  const x = Float64Array.from({ length: m }, (_, i) => (2 * i) / (m - 1) - 1);
  const truth = new Float64Array(p);
  for (let l = 0; l < lines; l++) {
    truth[2 * l] = -0.9 + (1.8 * l) / Math.max(1, lines - 1);
    truth[2 * l + 1] = 0.2 / (l + 3);
  }
  let time = 0;
  const columns = (theta: Float64Array, phi: Float64Array): void => {
    const began = performance.now();
    for (let l = 0; l < lines; l++) {
      const centre = theta[2 * l]!;
      const width = theta[2 * l + 1]!;
      for (let i = 0; i < m; i++) {
        const u = (x[i]! - centre) / width;
        phi[l * m + i] = 1 / (1 + u * u);
      }
    }
    for (let b = 0; b < background; b++) {
      for (let i = 0; i < m; i++) phi[(lines + b) * m + i] = b === 0 ? 1 : Math.cos(b * Math.acos(x[i]!));
    }
    time += performance.now() - began;
  };
  const derivatives = (theta: Float64Array, c: Float64Array, out: Float64Array): void => {
    const began = performance.now();
    for (let l = 0; l < lines; l++) {
      const centre = theta[2 * l]!;
      const width = theta[2 * l + 1]!;
      for (let i = 0; i < m; i++) {
        const u = (x[i]! - centre) / width;
        const f = 1 / (1 + u * u);
        out[2 * l * m + i] = (c[l]! * 2 * u * f * f) / width;
        out[(2 * l + 1) * m + i] = (c[l]! * 2 * u * u * f * f) / width;
      }
    }
    time += performance.now() - began;
  };
  const random = makeRandom(7);
  const phi = new Float64Array(m * k);
  columns(truth, phi);
  const data = new Float64Array(m);
  for (let i = 0; i < m; i++) {
    let sum = 0.01 * random.normal();
    for (let j = 0; j < k; j++) sum += phi[j * m + i]! * (j < lines ? 1 : 0.3 / (1 + j - lines));
    data[i] = sum;
  }
  const start = truth.map((v, j) => v + 0.2 * truth[j | 1]! * (j % 4 === 0 ? 1 : -0.5));
  return {
    problem: {
      rows: m,
      nonlinear: p,
      linear: k,
      data,
      weights: new Float64Array(m).fill(100),
      columns,
      derivatives,
    },
    start,
    model: () => {
      const spent = time;
      time = 0;
      return spent;
    },
  };
}

for (const [m, lines, background] of [
  [9000, 12, 3],
  [9000, 20, 5],
  [20000, 25, 5],
] as const) {
  for (const [steering, stride] of [
    ["auto", 1],
    ["auto", 4],
    ["orthogonal", 1],
  ] as const) {
    const { problem, start, model } = problemOf(m, lines, background);
    solveSeparable(problem, start, { steering, stride });
    model();
    const began = performance.now();
    const solution = solveSeparable(problem, start, { steering, stride });
    const total = performance.now() - began;
    const own = total - model();
    const beforeFinish = performance.now();
    const one = solveSeparable(problem, solution.theta, { steering, stride, maxIterations: 0 });
    const single = performance.now() - beforeFinish - model();
    console.log(
      `m ${m} p ${problem.nonlinear} k ${problem.linear} ${steering} stride ${stride}: ` +
        `${(own / solution.evaluations).toFixed(1)} ms per evaluation over all, set-up with covariance ${single.toFixed(1)} ms, ` +
        `${((own - single) / (solution.iterations || 1)).toFixed(1)} ms per iteration ` +
        `(${solution.termination}, ${solution.iterations} iterations, ${solution.evaluations} evaluations, chi2/dof ` +
        `${(solution.chi2 / solution.degreesOfFreedom).toFixed(3)}, remaining ${one.remaining.toExponential(1)})`,
    );
  }
}
