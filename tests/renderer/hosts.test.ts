import { describe, expect, it } from "vitest";
import type { NamedBytes } from "../../app/tasks/index.ts";
import { electronHost } from "../../renderer/host/electron-host.ts";
import { loopbackHost } from "../../renderer/host/loopback-host.ts";
import { serveLoopback } from "../../main/loopback/index.ts";

const page = { baseURI: "http://127.0.0.1:1/" } as Document;

describe("the loopback host", () => {
  it("reads facts, files and choices as the real server sends them", async () => {
    const files: NamedBytes[] = [{ name: "a.csv", bytes: Uint8Array.from([0, 200, 255, 10]) }];
    const server = await serveLoopback(new Map(), {
      facts: { version: "1.2.3", node: "v20" },
      startFiles: async () => ({ files, choices: { window_eV: [2, 3] } }),
      demoFiles: async () => files,
      demoSeries: async () => [...files, ...files],
    });
    try {
      const entry = await fetch(server.issueAddress(), { redirect: "manual" });
      const cookie = entry.headers.get("set-cookie")!.split(";")[0]!;
      const host = loopbackHost({ baseURI: `http://127.0.0.1:${server.port}/` } as Document, (address) =>
        fetch(address, { headers: { cookie } }),
      );
      expect(await host.about()).toEqual({ version: "1.2.3", node: "v20" });
      expect(await host.startFiles()).toEqual({ files, choices: { window_eV: [2, 3] } });
      expect(await host.demoFiles()).toEqual(files);
      expect(await host.demoSeries()).toEqual([...files, ...files]);
    } finally {
      await server.close();
    }
  });

  it("fails in words when the shell refuses", async () => {
    const host = loopbackHost(page, async () => new Response("no", { status: 403 }));
    await expect(host.about()).rejects.toThrow("host/about: the shell answered 403");
  });

  it("refuses an answer of another shape", async () => {
    const host = loopbackHost(page, async () => Response.json({ version: 7 }));
    await expect(host.about()).rejects.toThrow();
  });
});

describe("the Electron host", () => {
  it("hands every question to the bridge and its answer back", async () => {
    const asked: string[] = [];
    const answer = <T>(name: string, value: T): Promise<T> => {
      asked.push(name);
      return Promise.resolve(value);
    };
    const host = electronHost({
      about: () => answer("about", { version: "1", node: "v20" }),
      startFiles: () => answer("startFiles", { files: [], choices: {} }),
      demoFiles: () => answer("demoFiles", []),
      demoSeries: () => answer("demoSeries", []),
      openFiles: () => answer("openFiles", []),
      saveFile: (name, bytes) => answer(`saveFile ${name} ${bytes.length}`, name),
    });
    expect(host.shell).toBe("electron");
    await host.about();
    await host.startFiles();
    await host.demoFiles();
    await host.demoSeries();
    await host.openFiles();
    expect(await host.saveFile("x.json", new Uint8Array(3))).toBe("x.json");
    expect(asked).toEqual([
      "about",
      "startFiles",
      "demoFiles",
      "demoSeries",
      "openFiles",
      "saveFile x.json 3",
    ]);
  });
});
