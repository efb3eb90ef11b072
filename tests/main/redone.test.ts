import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { DEFAULT_PROTOCOL, type Protocol } from "../../app/protocol/index.ts";
import { protocolToJson } from "../../app/report/index.ts";
import { redoneInWords } from "../../main/command-line/redone.ts";

describe("a folder of results that another protocol fills again", () => {
  let folder: string;
  const place = (): { protocol: string; results: string[] } => ({
    protocol: join(folder, "protocol.json"),
    results: [join(folder, "a.json"), join(folder, "b.json")],
  });
  const other: Protocol = { ...DEFAULT_PROTOCOL, lines: { ...DEFAULT_PROTOCOL.lines, max_n: 9 } };

  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), "rungline-redone-"));
    await writeFile(join(folder, "protocol.json"), protocolToJson(DEFAULT_PROTOCOL));
    await writeFile(join(folder, "a.json"), "{}");
  });
  afterAll(() => rm(folder, { recursive: true }));

  it("says how many results are replaced and which choice changed", async () => {
    const words = await redoneInWords(place(), other);
    expect(words).toContain("1 result is replaced");
    expect(words).toContain(`lines.max_n was ${DEFAULT_PROTOCOL.lines.max_n}, is 9`);
  });

  it("says nothing for the same protocol, or where nothing stands yet", async () => {
    expect(await redoneInWords(place(), DEFAULT_PROTOCOL)).toBe("");
    expect(await redoneInWords({ ...place(), results: [join(folder, "b.json")] }, other)).toBe("");
  });
});
