import type { IncomingHttpHeaders } from "node:http";

/** Why a request is refused before anything is looked up; the text is for the person who reads it in a browser. */
export interface Refusal {
  readonly status: number;
  readonly text: string;
}

/**
 * What every request must show, whatever it asks for. Host: our own address and nothing else, so that a foreign name
 * that resolves to this machine is no way in. Origin and Sec-Fetch-Site, where sent: our own page or the person
 * (`none` is a typed or opened address), never another page in the same browser.
 */
export function checkRequest(
  method: string,
  headers: IncomingHttpHeaders,
  rawHosts: number,
  port: number,
): Refusal | null {
  if (method !== "GET" && method !== "HEAD") return { status: 405, text: "Only reading is offered here." };
  const hosts = [`127.0.0.1:${port}`, `localhost:${port}`];
  const { host, origin } = headers;
  if (rawHosts !== 1 || host === undefined || !hosts.includes(host)) {
    return { status: 421, text: "This server answers to its own address only." };
  }
  if (origin !== undefined && origin !== `http://${host}`) {
    return { status: 403, text: "Requests from another page are refused." };
  }
  const site = headers["sec-fetch-site"];
  if (site !== undefined && site !== "same-origin" && site !== "none") {
    return { status: 403, text: "Requests from another page are refused." };
  }
  return null;
}

/** The value of one cookie; empty where it is not sent. */
export function cookieValue(header: string | undefined, name: string): string {
  for (const part of (header ?? "").split(";")) {
    const mark = part.indexOf("=");
    if (mark > 0 && part.slice(0, mark).trim() === name) return part.slice(mark + 1).trim();
  }
  return "";
}
