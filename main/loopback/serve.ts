import { createServer, type IncomingMessage, type Server } from "node:http";
import type { AddressInfo } from "node:net";
import type { HostFacts, NamedBytes, StartFiles } from "../../app/tasks/index.ts";
import { answerPage, pageHeaders, plainAnswer, type PageAnswer, type PageFiles } from "../page/index.ts";
import { makeGate } from "./one-time-token.ts";
import { checkRequest, cookieValue } from "./request-check.ts";

/** What the loopback shell answers with; read when asked, so that a start costs nothing. */
export interface LoopbackHost {
  readonly facts: HostFacts;
  startFiles(): Promise<StartFiles>;
  demoFiles(): Promise<readonly NamedBytes[]>;
  demoSeries(): Promise<readonly NamedBytes[]>;
}

export interface LoopbackServer {
  readonly port: number;
  /** An address with a token of its own, which lets one browser in once. */
  issueAddress(): string;
  /** Whether a browser has come in. */
  entered(): boolean;
  close(): Promise<void>;
}

/**
 * The page and the host over HTTP, on 127.0.0.1 only.
 *
 *   GET /?token=T          exchanges the token for a cookie and leads to /
 *   GET /...               the page's own files
 *   GET /host/about        HostFacts
 *   GET /host/start        { files: { name, base64 }[], choices }
 *   GET /host/demo         { files: { name, base64 }[] }
 *
 * Opening and saving files need no server: the page does both itself.
 */
export async function serveLoopback(pageFiles: PageFiles, host: LoopbackHost): Promise<LoopbackServer> {
  const gate = makeGate();
  let entered = false;

  const answer = async (request: IncomingMessage, port: number): Promise<PageAnswer> => {
    const rawHosts = request.rawHeaders.filter((text, i) => i % 2 === 0 && /^host$/i.test(text)).length;
    const refusal = checkRequest(request.method ?? "", request.headers, rawHosts, port);
    if (refusal !== null) return plainAnswer(refusal.status, refusal.text);
    const url = request.url ?? "";
    const mark = url.indexOf("?");
    const path = mark < 0 ? url : url.slice(0, mark);
    const query = new URLSearchParams(mark < 0 ? "" : url.slice(mark + 1));
    // Cookies do not tell ports apart, so the name does: two windows in one browser keep out of each other's way.
    const cookie = `rungline-${port}`;
    const known = gate.isSession(cookieValue(request.headers.cookie, cookie));
    const token = query.get("token");
    if (path === "/" && token !== null) {
      if (request.method !== "GET" || !(gate.redeem(token) || known)) return notLetIn();
      entered = true;
      const setCookie = `${cookie}=${gate.session}; HttpOnly; SameSite=Strict; Path=/`;
      const answered = plainAnswer(303, "Enter.");
      return { ...answered, headers: { ...answered.headers, Location: "/", "Set-Cookie": setCookie } };
    }
    if (!known) return notLetIn();
    if (path.startsWith("/host/")) return answerHost(path.slice("/host/".length), host);
    return answerPage(pageFiles, path);
  };

  const server = createServer((request, response) => {
    const { port } = server.address() as AddressInfo;
    // Nothing that arrives with a body is read.
    request.resume();
    answer(request, port)
      .catch(() => plainAnswer(500, "Rungline could not read what was asked for."))
      .then(({ status, headers, body }) => {
        response.writeHead(status, { ...headers, "Content-Length": body.byteLength });
        response.end(request.method === "HEAD" ? undefined : body);
      })
      .catch(() => response.destroy());
  });
  await listen(server);
  const { port } = server.address() as AddressInfo;
  return {
    port,
    issueAddress: () => `http://127.0.0.1:${port}/?token=${gate.issue()}`,
    entered: () => entered,
    close: () =>
      new Promise((resolve) => {
        server.close(() => resolve());
        server.closeAllConnections();
      }),
  };
}

function listen(server: Server): Promise<void> {
  return new Promise((resolve, reject) => {
    server.once("error", reject);
    server.listen(0, "127.0.0.1", () => {
      server.off("error", reject);
      resolve();
    });
  });
}

function notLetIn(): PageAnswer {
  return plainAnswer(
    403,
    "This address has been used, or it is not whole. Each address lets one browser in once: start Rungline again for a new one.",
  );
}

async function answerHost(what: string, host: LoopbackHost): Promise<PageAnswer> {
  switch (what) {
    case "about":
      return jsonAnswer(host.facts);
    case "start": {
      const { files, choices } = await host.startFiles();
      return jsonAnswer({ files: files.map(encode), choices });
    }
    case "demo":
      return jsonAnswer({ files: (await host.demoFiles()).map(encode) });
    case "demo-series":
      return jsonAnswer({ files: (await host.demoSeries()).map(encode) });
    default:
      return plainAnswer(404, "There is nothing at this address.");
  }
}

function encode({ name, bytes }: NamedBytes): { name: string; base64: string } {
  return { name, base64: Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength).toString("base64") };
}

function jsonAnswer(value: unknown): PageAnswer {
  return {
    status: 200,
    headers: { ...pageHeaders(null), "Content-Type": "application/json; charset=utf-8" },
    body: new TextEncoder().encode(JSON.stringify(value)),
  };
}
