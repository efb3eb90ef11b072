import { readFileSync } from "node:fs";

/** Set by the bundler from package.json; absent where the sources run as they are (tests). */
declare const RUNGLINE_VERSION: string | undefined;

export function programVersion(): string {
  if (typeof RUNGLINE_VERSION === "string") return RUNGLINE_VERSION;
  const facts = JSON.parse(readFileSync(new URL("../../package.json", import.meta.url), "utf8")) as {
    version: string;
  };
  return facts.version;
}
