import type { FitRunner } from "./fit-outcome.ts";

/** A runner whose code is loaded at once but not waited for: the command line reads its words meanwhile. */
export function makeLaterRunner(threads: number, load: () => Promise<FitRunner>): FitRunner {
  const loaded = load();
  // Told by the first fit that waits for it.
  loaded.catch(() => undefined);
  return {
    threads,
    fit: async (...words) => (await loaded).fit(...words),
    close: async () => {
      const runner = await loaded.catch(() => null);
      await runner?.close();
    },
  };
}
