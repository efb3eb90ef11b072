import { defineConfig } from "vitest/config";

export default defineConfig({
  test: {
    root: new URL("..", import.meta.url).pathname,
    include: ["tests/**/*.test.ts", "tests/**/*.test.tsx"],
    exclude: ["tests/window/**", "tests/bench/**", "node_modules/**"],
    testTimeout: 60_000,
    hookTimeout: 60_000,
    pool: "threads",
    maxWorkers: 2,
  },
});
