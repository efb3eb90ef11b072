import { mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from "node:fs";
import { request as httpRequest, type IncomingHttpHeaders } from "node:http";
import { connect } from "node:net";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { serveLoopback, type LoopbackServer } from "../../main/loopback/index.ts";
import { listPageFiles } from "../../main/page/index.ts";

let folder: string;
let server: LoopbackServer;

beforeEach(async () => {
  folder = mkdtempSync(join(tmpdir(), "rungline-test-"));
  const page = join(folder, "page");
  mkdirSync(join(page, "assets"), { recursive: true });
  writeFileSync(
    join(page, "index.html"),
    '<!doctype html><meta property="csp-nonce" nonce="__CSP_NONCE__" /><div id="root"></div>',
  );
  writeFileSync(join(page, "assets", "main.js"), "export {};");
  writeFileSync(join(page, "assets", "style.css"), "");
  writeFileSync(join(page, "assets", "figures.woff2"), "w");
  writeFileSync(join(page, "mark.svg"), "<svg/>");
  writeFileSync(join(folder, "secret.txt"), "outside");
  symlinkSync(join(folder, "secret.txt"), join(page, "link.txt"));
  server = await serveLoopback(await listPageFiles(page), {
    facts: { version: "1.2.3", node: "v20" },
    startFiles: async () => ({
      files: [{ name: "run.csv", bytes: new Uint8Array([1, 2, 255]) }],
      choices: { axis: { unit: "nm" } },
    }),
    demoFiles: async () => [{ name: "demo.csv", bytes: new TextEncoder().encode("E,alpha") }],
    demoSeries: async () => [],
  });
});

afterEach(async () => {
  await server.close();
  rmSync(folder, { recursive: true });
});

interface Answer {
  readonly status: number;
  readonly headers: IncomingHttpHeaders;
  readonly text: string;
}

/** Plain HTTP with the path sent as written: fetch would tidy `..` away and forbid the headers under test. */
function ask(path: string, headers: Record<string, string> = {}, method = "GET"): Promise<Answer> {
  return new Promise((resolve, reject) => {
    const sent = httpRequest(
      { host: "127.0.0.1", port: server.port, path, method, headers, setHost: headers["Host"] === undefined },
      (response) => {
        let text = "";
        response.setEncoding("utf8").on("data", (part: string) => (text += part));
        response.on("end", () =>
          resolve({ status: response.statusCode ?? 0, headers: response.headers, text }),
        );
      },
    );
    sent.once("error", reject);
    sent.end();
  });
}

function pathOf(address: string): string {
  const url = new URL(address);
  return url.pathname + url.search;
}

async function enter(): Promise<string> {
  const answer = await ask(pathOf(server.issueAddress()));
  return (answer.headers["set-cookie"] ?? [])[0]!.split(";")[0]!;
}

describe("the one-time token", () => {
  it("is exchanged for an HttpOnly, SameSite=Strict cookie and leads to the page without the token", async () => {
    const address = server.issueAddress();
    expect(address).toMatch(/^http:\/\/127\.0\.0\.1:\d+\/\?token=[\w-]{43}$/);
    expect(server.entered()).toBe(false);
    const answer = await ask(pathOf(address));
    expect(answer.status).toBe(303);
    expect(answer.headers.location).toBe("/");
    const [cookie] = answer.headers["set-cookie"]!;
    expect(cookie).toMatch(/; HttpOnly/);
    expect(cookie).toMatch(/; SameSite=Strict/);
    expect(cookie).not.toContain(new URL(address).searchParams.get("token"));
    expect(server.entered()).toBe(true);
    const page = await ask("/", { Cookie: cookie!.split(";")[0]! });
    expect(page.status).toBe(200);
    expect(page.text).toContain('<div id="root">');
  });

  it("dies on its first use", async () => {
    const path = pathOf(server.issueAddress());
    expect((await ask(path)).status).toBe(303);
    const again = await ask(path);
    expect(again.status).toBe(403);
    expect(again.headers["set-cookie"]).toBeUndefined();
    expect(again.text).toContain("has been used");
  });

  it("lets a browser that is already in come back by its old address", async () => {
    const path = pathOf(server.issueAddress());
    const cookie = (await ask(path)).headers["set-cookie"]![0]!.split(";")[0]!;
    expect((await ask(path, { Cookie: cookie })).status).toBe(303);
  });

  it("does not die by a request that is refused for another reason", async () => {
    const path = pathOf(server.issueAddress());
    expect((await ask(path, { Origin: "http://elsewhere.example" })).status).toBe(403);
    expect((await ask(path, {}, "HEAD")).status).toBe(403);
    expect((await ask(path)).status).toBe(303);
  });

  it("is not guessed: a wrong, a shortened and an empty one are refused", async () => {
    const path = pathOf(server.issueAddress());
    for (const wrong of ["/?token=", "/?token=abc", path.slice(0, -1), `${path}x`]) {
      expect((await ask(wrong)).status, wrong).toBe(403);
    }
    expect(server.entered()).toBe(false);
  });
});

describe("what every request must show", () => {
  it("refuses everything without the cookie, the page as well as the host", async () => {
    for (const path of [
      "/",
      "/index.html",
      "/assets/main.js",
      "/host/about",
      "/host/start",
      "/host/demo",
      "/host/demo-series",
      "/x",
    ]) {
      expect((await ask(path)).status, path).toBe(403);
      expect((await ask(path, { Cookie: `rungline-${server.port}=guess` })).status, path).toBe(403);
    }
  });

  it("answers to its own address only", async () => {
    const cookie = await enter();
    const { port } = server;
    for (const own of [`127.0.0.1:${port}`, `localhost:${port}`]) {
      expect((await ask("/", { Host: own, Cookie: cookie })).status, own).toBe(200);
    }
    for (const foreign of [
      "rungline.example",
      `rungline.example:${port}`,
      "127.0.0.1",
      `127.0.0.1:${port + 1}`,
      `127.0.0.1:${port}.rungline.example`,
      `[::1]:${port}`,
      `0.0.0.0:${port}`,
      `localhost.:${port}`,
    ]) {
      expect((await ask("/", { Host: foreign, Cookie: cookie })).status, foreign).toBe(421);
    }
  });

  it("refuses a request that names two hosts or none", async () => {
    const cookie = await enter();
    const own = `Host: 127.0.0.1:${server.port}\r\n`;
    for (const hosts of [own + "Host: rungline.example\r\n", own + own, ""]) {
      const text = await new Promise<string>((resolve) => {
        const socket = connect(server.port, "127.0.0.1", () => {
          socket.end(`GET / HTTP/1.1\r\n${hosts}Cookie: ${cookie}\r\nConnection: close\r\n\r\n`);
        });
        let all = "";
        socket.setEncoding("utf8").on("data", (part: string) => (all += part));
        socket.on("close", () => resolve(all));
      });
      expect(text.split("\r\n")[0], JSON.stringify(hosts)).toMatch(/^HTTP\/1\.1 4(00|21) /);
    }
  });

  it("refuses another page in the same browser by its Origin", async () => {
    const cookie = await enter();
    const { port } = server;
    expect((await ask("/host/about", { Cookie: cookie, Origin: `http://127.0.0.1:${port}` })).status).toBe(
      200,
    );
    for (const origin of [
      "null",
      "http://elsewhere.example",
      `https://127.0.0.1:${port}`,
      "http://127.0.0.1:1",
    ]) {
      expect((await ask("/host/about", { Cookie: cookie, Origin: origin })).status, origin).toBe(403);
    }
    const mixed = { Cookie: cookie, Host: `127.0.0.1:${port}`, Origin: `http://localhost:${port}` };
    expect((await ask("/host/about", mixed)).status).toBe(403);
  });

  it("refuses another page in the same browser by Sec-Fetch-Site", async () => {
    const cookie = await enter();
    for (const site of ["none", "same-origin"]) {
      expect((await ask("/host/about", { Cookie: cookie, "Sec-Fetch-Site": site })).status, site).toBe(200);
    }
    for (const site of ["cross-site", "same-site", "surprise"]) {
      expect((await ask("/host/about", { Cookie: cookie, "Sec-Fetch-Site": site })).status, site).toBe(403);
    }
  });

  it("offers reading only", async () => {
    const cookie = await enter();
    for (const method of ["POST", "PUT", "DELETE", "OPTIONS", "PATCH"]) {
      expect((await ask("/", { Cookie: cookie }, method)).status, method).toBe(405);
    }
  });
});

describe("what is served", () => {
  it("no path leads out of the page's folder", async () => {
    const cookie = await enter();
    for (const path of [
      "/../secret.txt",
      "/assets/../../secret.txt",
      "/%2e%2e/secret.txt",
      "/..%2fsecret.txt",
      "/..%5csecret.txt",
      "/assets/%2e%2e%2f%2e%2e%2fsecret.txt",
      "//secret.txt",
      "/link.txt",
      "/index.html%00.js",
      "/%",
      `/${encodeURIComponent(join(folder, "secret.txt"))}`,
      `http://127.0.0.1:${server.port}/../secret.txt`,
    ]) {
      const answer = await ask(path, { Cookie: cookie });
      expect(answer.status, path).toBe(404);
      expect(answer.text, path).not.toContain("outside");
    }
  });

  it("the page comes with the content policy, isolation and a nonce that is new each time", async () => {
    const cookie = await enter();
    const nonces = new Set<string>();
    for (let i = 0; i < 3; i++) {
      const { headers, text } = await ask("/", { Cookie: cookie });
      const nonce = /<meta property="csp-nonce" nonce="([^"]+)"/.exec(text)![1]!;
      nonces.add(nonce);
      expect(headers["content-security-policy"]).toBe(
        `default-src 'none'; script-src 'self' 'wasm-unsafe-eval'; style-src 'self' 'nonce-${nonce}'; img-src 'self' data: blob:; ` +
          "font-src 'self'; connect-src 'self'; worker-src 'self'; base-uri 'none'; form-action 'none'; " +
          "frame-ancestors 'none'; object-src 'none'",
      );
    }
    expect(nonces.size).toBe(3);
  });

  it("every answer, refusals included, carries the isolating headers", async () => {
    const cookie = await enter();
    const answers = [
      await ask("/", { Cookie: cookie }),
      await ask("/assets/main.js", { Cookie: cookie }),
      await ask("/host/about", { Cookie: cookie }),
      await ask("/nothing", { Cookie: cookie }),
      await ask("/"),
      await ask("/", { Host: "rungline.example" }),
    ];
    for (const { headers } of answers) {
      expect(headers["content-security-policy"]).toContain("default-src 'none'");
      expect(headers["cross-origin-opener-policy"]).toBe("same-origin");
      expect(headers["cross-origin-embedder-policy"]).toBe("require-corp");
      expect(headers["cross-origin-resource-policy"]).toBe("same-origin");
      expect(headers["x-content-type-options"]).toBe("nosniff");
      expect(headers["referrer-policy"]).toBe("no-referrer");
      expect(headers["cache-control"]).toBe("no-store");
      expect(headers["access-control-allow-origin"]).toBeUndefined();
    }
  });

  it("files carry their media types", async () => {
    const cookie = await enter();
    for (const [path, type] of [
      ["/", "text/html; charset=utf-8"],
      ["/assets/main.js", "text/javascript; charset=utf-8"],
      ["/assets/style.css", "text/css; charset=utf-8"],
      ["/assets/figures.woff2", "font/woff2"],
      ["/mark.svg", "image/svg+xml"],
    ] as const) {
      expect((await ask(path, { Cookie: cookie })).headers["content-type"], path).toBe(type);
    }
  });

  it("the host's answers hold facts, choices and the files' bytes", async () => {
    const cookie = await enter();
    const get = async (path: string): Promise<unknown> =>
      JSON.parse((await ask(path, { Cookie: cookie })).text);
    expect(await get("/host/about")).toEqual({ version: "1.2.3", node: "v20" });
    expect(await get("/host/start")).toEqual({
      files: [{ name: "run.csv", base64: "AQL/" }],
      choices: { axis: { unit: "nm" } },
    });
    expect(await get("/host/demo")).toEqual({ files: [{ name: "demo.csv", base64: "RSxhbHBoYQ==" }] });
    expect(await get("/host/demo-series")).toEqual({ files: [] });
    expect((await ask("/host/other", { Cookie: cookie })).status).toBe(404);
    expect((await ask("/host/about/", { Cookie: cookie })).status).toBe(404);
  });

  it("listens on the loopback address alone", async () => {
    const { networkInterfaces } = await import("node:os");
    const outside = Object.values(networkInterfaces())
      .flatMap((all) => all ?? [])
      .find((one) => one.family === "IPv4" && !one.internal);
    if (outside === undefined) return;
    const reached = await new Promise<boolean>((resolve) => {
      const socket = connect({ host: outside.address, port: server.port, timeout: 2000 });
      socket.once("connect", () => resolve(true));
      socket.once("error", () => resolve(false));
      socket.once("timeout", () => resolve(false));
      socket.once("close", () => socket.destroy());
    });
    expect(reached).toBe(false);
  });
});
