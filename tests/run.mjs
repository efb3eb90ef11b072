/**
 * `npm test`: compiler, linter, formatter, unit and reference tests, then the window in a real browser, one test
 * at a time. Every stage runs even where an earlier one failed. The last line counts everything:
 * `N passed, N failed[, N skipped]`.
 *
 * Where no browser is installed and this runs as root on Debian, one is installed and said so; elsewhere the browser
 * tests count as skipped, which is a failure where CI=true.
 */
import { spawnSync } from "node:child_process";
import { accessSync, constants, existsSync, mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { delimiter, dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { countReport } from "./count-report.mjs";

const ROOT = dirname(dirname(fileURLToPath(import.meta.url)));
const IN_CI = process.env.CI === "true";
const reports = mkdtempSync(join(tmpdir(), "rungline-tests-"));
const total = { passed: 0, failed: 0, skipped: 0 };

try {
  checkStage("typecheck", "typescript/bin/tsc", ["-b", "tsconfig.json"]);
  checkStage("lint", "eslint/bin/eslint.js", [
    "--config",
    "tests/lint/eslint.config.js",
    "app",
    "main",
    "renderer",
    "tests",
    "fixtures",
  ]);
  // Data in fixtures stay as they were published; only the scripts beside them are formatted.
  checkStage("format", "prettier/bin/prettier.cjs", [
    "--log-level",
    "warn",
    "--check",
    "app",
    "main",
    "renderer",
    "tests",
    "fixtures/**/*.mjs",
  ]);
  testStage("unit and reference tests", "tests/vitest.config.ts", {});
  windowStage();
} finally {
  rmSync(reports, { recursive: true, force: true });
}

const skipped = total.skipped > 0 ? `, ${total.skipped} skipped` : "";
console.log(`\n${total.passed} passed, ${total.failed} failed${skipped}`);
process.exitCode = total.failed > 0 ? 1 : 0;

function run(script, args, env) {
  const { status } = spawnSync(process.execPath, [join(ROOT, "node_modules", script), ...args], {
    cwd: ROOT,
    stdio: "inherit",
    env: { ...process.env, ...env },
  });
  return status === 0;
}

/** A stage that passes or fails as a whole and counts as one. */
function checkStage(name, script, args) {
  console.log(`\n== ${name}`);
  const ok = run(script, args, {});
  if (ok) total.passed++;
  else total.failed++;
  console.log(ok ? `${name}: passed` : `${name}: FAILED`);
}

function testStage(name, config, env) {
  console.log(`\n== ${name}`);
  const report = join(reports, `${readdirSync(reports).length}.json`);
  const ok = run(
    "vitest/vitest.mjs",
    ["run", "--config", config, "--reporter=default", "--reporter=json", `--outputFile.json=${report}`],
    env,
  );
  const counts = existsSync(report)
    ? countReport(JSON.parse(readFileSync(report, "utf8")))
    : { passed: 0, failed: 1, skipped: 0 };
  // Whatever made it end badly without a failed test (an error outside any test, a crash) is a failure too.
  if (!ok && counts.failed === 0) counts.failed = 1;
  total.passed += counts.passed;
  total.failed += counts.failed;
  total.skipped += counts.skipped;
}

function windowStage() {
  const config = "tests/window/vitest.config.ts";
  const files = readdirSync(join(ROOT, "tests", "window")).filter((name) => name.endsWith(".test.ts"));
  if (files.length === 0) {
    console.log("\n== window tests: none yet");
    return;
  }
  console.log("\n== window: build");
  const built = spawnSync(process.execPath, [join(ROOT, "main", "build.mjs")], {
    cwd: ROOT,
    stdio: "inherit",
  });
  if (built.status !== 0) {
    total.failed++;
    console.log("window: FAILED, it could not be built");
    return;
  }
  const browser = findBrowser() ?? installBrowser();
  if (browser === null) {
    const command = "apt-get update && apt-get install -y --no-install-recommends chromium fonts-dejavu-core";
    console.log(`window tests: no Chromium-family browser found. To run them: ${command}`);
    console.log("or name one: RUNGLINE_BROWSER=/path/to/browser npm test");
    if (IN_CI) total.failed += files.length;
    else total.skipped += files.length;
    return;
  }
  console.log(`browser: ${browser}`);
  testStage("window tests", config, { RUNGLINE_BROWSER: browser });
}

function findBrowser() {
  const named = process.env.RUNGLINE_BROWSER;
  const names = ["chromium", "chromium-browser", "google-chrome", "google-chrome-stable", "microsoft-edge"];
  const folders = (process.env.PATH ?? "").split(delimiter).filter((folder) => folder !== "");
  const candidates = [
    ...(named ? [named] : []),
    ...names.flatMap((name) => folders.map((folder) => join(folder, name))),
    "/Applications/Chromium.app/Contents/MacOS/Chromium",
    "/Applications/Google Chrome.app/Contents/MacOS/Google Chrome",
    ...["ProgramFiles", "ProgramFiles(x86)", "LOCALAPPDATA"]
      .map((base) => process.env[base])
      .filter(Boolean)
      .flatMap((base) => [
        join(base, "Google/Chrome/Application/chrome.exe"),
        join(base, "Microsoft/Edge/Application/msedge.exe"),
      ]),
  ];
  return candidates.find(isProgram) ?? null;
}

function isProgram(path) {
  try {
    accessSync(path, constants.X_OK);
    return true;
  } catch {
    return false;
  }
}

/** Only as root on Debian, and said aloud; null where that is not the case or did not work. */
function installBrowser() {
  if (process.getuid?.() !== 0 || !existsSync("/etc/debian_version")) return null;
  console.log(
    "No browser found: installing Debian's chromium and fonts-dejavu-core by apt-get for the window tests.",
  );
  const env = { ...process.env, DEBIAN_FRONTEND: "noninteractive" };
  for (const args of [
    ["update"],
    ["install", "-y", "--no-install-recommends", "chromium", "fonts-dejavu-core"],
  ]) {
    const { status } = spawnSync("apt-get", args, { stdio: ["ignore", "ignore", "inherit"], env });
    if (status !== 0) return null;
  }
  return findBrowser();
}
