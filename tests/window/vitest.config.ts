import { defineConfig } from "vitest/config";

/** The window in a real browser: one file and one test at a time, no second tries. */
export default defineConfig({
  test: {
    root: new URL("../..", import.meta.url).pathname,
    include: ["tests/window/**/*.test.ts"],
    testTimeout: 120_000,
    hookTimeout: 120_000,
    pool: "forks",
    fileParallelism: false,
    maxWorkers: 1,
    retry: 0,
  },
});
