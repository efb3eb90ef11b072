export * from "./types.ts";
export { solveSeparable } from "./solveSeparable.ts";
export { solveGeneral } from "./solveGeneral.ts";
export { linearLeastSquares } from "./linearLeastSquares.ts";
export type { LinearSolution } from "./linearLeastSquares.ts";
export { choleskyFactor, choleskyInverse, choleskySolve, invertPositiveDefinite } from "./cholesky.ts";
export { backSubstitute, forwardSubstitute } from "./cholesky.ts";
export { singularValues } from "./singularValues.ts";
