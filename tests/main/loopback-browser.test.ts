import { describe, expect, it } from "vitest";
import { browserFlags, findBrowser, hasDisplay } from "../../main/loopback/browser.ts";
import { findElectron } from "../../main/loopback/electron-program.ts";

describe("where a window can be shown", () => {
  it("on Linux only where a display is set", () => {
    expect(hasDisplay({}, "linux")).toBe(false);
    expect(hasDisplay({ DISPLAY: "" }, "linux")).toBe(false);
    expect(hasDisplay({ DISPLAY: ":0" }, "linux")).toBe(true);
    expect(hasDisplay({ WAYLAND_DISPLAY: "wayland-0" }, "linux")).toBe(true);
    expect(hasDisplay({}, "darwin")).toBe(true);
    expect(hasDisplay({}, "win32")).toBe(true);
  });

  it("a browser is looked for on the path, and one that the user names comes first", () => {
    const installed = new Set(["/opt/b/chromium", "/opt/own/browser"]);
    const has = (path: string): boolean => installed.has(path);
    expect(findBrowser({ PATH: "/opt/a:/opt/b" }, "linux", has)).toBe("/opt/b/chromium");
    expect(findBrowser({ PATH: "/opt/a:/opt/b", RUNGLINE_BROWSER: "/opt/own/browser" }, "linux", has)).toBe(
      "/opt/own/browser",
    );
    expect(findBrowser({ PATH: "/opt/a" }, "linux", has)).toBeNull();
    expect(findBrowser({}, "linux", has)).toBeNull();
  });

  it("an Electron whose binary was never fetched is not used", () => {
    expect(findElectron("/nowhere")).toBeNull();
  });
});

describe("the browser's window", () => {
  const flags = browserFlags("http://127.0.0.1:1/?token=t", "/tmp/profile", false);

  it("shows one address in a window and a profile of its own, off the network", () => {
    expect(flags).toContain("--app=http://127.0.0.1:1/?token=t");
    expect(flags).toContain("--user-data-dir=/tmp/profile");
    for (const quiet of [
      "--disable-background-networking",
      "--disable-component-update",
      "--disable-sync",
      "--no-first-run",
      "--disable-quic",
    ]) {
      expect(flags).toContain(quiet);
    }
  });

  it("keeps the browser's sandbox except as root, where it cannot run", () => {
    expect(flags).not.toContain("--no-sandbox");
    expect(browserFlags("a", "b", true)).toContain("--no-sandbox");
  });
});
