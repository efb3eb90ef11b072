import type { Note } from "../base/index.ts";

/**
 * Doubts in the order in which they should be looked into: what the file did wrong comes before what the model misses, and
 * that before what follows from either. Codes that stand nowhere come after the third group, in the order they were said.
 */
const CAUSES: readonly (readonly string[])[] = [
  // The file and the instrument.
  [
    "no-series",
    "rows-not-read",
    "cells-missing",
    "axis-row-out-of-order",
    "axis-not-monotonic",
    "axis-not-positive",
    "energy-implausible",
    "several-signals",
    "header-facts-differ",
    "reference-too-weak",
    "noise-not-seen",
    "sigma-missing",
    "isolated-readings",
    "dead-readings",
    "clipped-readings",
    "step-seen",
    "noise-correlated",
    "saturated-points",
    "low-transmission",
    "sampling-coarse",
    "axis-rounded",
    "slit-not-taken",
    "stray-light-seen",
  ],
  // Which lines there are, and whether the fit came to an end.
  [
    "fit-not-converged",
    "rydberg-unlike-material",
    "reading-disputed",
    "reading-revised",
    "series-not-determined",
    "named-line-not-seen",
    "line-missing",
    "line-at-bound",
    "parameters-degenerate",
    "no-range-follows-law",
  ],
  // What the model misses.
  [
    "fringes-seen",
    "fringes-not-found",
    "fringes-additive",
    "fringes-near-lines",
    "satellite",
    "line-unassigned",
    "background-better",
    "lines-smeared",
    "tail-left-out",
    "tail-stronger-than-law",
    "tail-weaker-than-law",
    "misfit",
    "line-shape-misfit",
    "axis-jitter-seen",
    "residuals-correlated",
    "tail-not-settled",
  ],
];
const LAST = [
  // What the laws say of lines that were fitted so.
  "law-rejected",
  "low-n-off-law",
  "gap-depends-on-range",
  "width-law-rejected",
  "strength-law-rejected",
  "width-exponent-differs",
  "width-lowest-left-out",
  "strength-range-cut",
  "strength-rolls-off",
  "highest-line-blended",
];

const ORDER = new Map(CAUSES.flat().map((code, i) => [code, i]));
const BETWEEN = ORDER.size;
LAST.forEach((code, i) => ORDER.set(code, BETWEEN + 1 + i));

/** Doubts that follow where another one stands: the first of these that is there is named. */
const LAWS = ["law-rejected", "width-law-rejected", "strength-law-rejected"];
const SHAPES = [
  "satellite",
  "misfit",
  "residuals-correlated",
  "line-shape-misfit",
  "axis-jitter-seen",
  "background-better",
];
const FOLLOWS: readonly { readonly cause: string; readonly codes: readonly string[] }[] = [
  {
    cause: "step-seen",
    codes: [...SHAPES, ...LAWS, "line-unassigned", "lines-smeared", "tail-not-settled", "fit-not-converged"],
  },
  { cause: "noise-correlated", codes: ["residuals-correlated"] },
  { cause: "stray-light-seen", codes: [...SHAPES, ...LAWS] },
  { cause: "fit-not-converged", codes: ["misfit", "tail-not-settled", ...LAWS] },
  { cause: "fringes-seen", codes: [...SHAPES, ...LAWS, "fringes-near-lines", "low-n-coherent"] },
  {
    cause: "misfit",
    codes: ["residuals-correlated", "line-shape-misfit", "axis-jitter-seen", "tail-not-settled", ...LAWS],
  },
  { cause: "lines-smeared", codes: ["strength-rolls-off", "strength-law-rejected"] },
  { cause: "tail-weaker-than-law", codes: ["strength-rolls-off", "strength-law-rejected"] },
];

/** Doubts before assumptions, each once, causes before what they lead to; a doubt that another explains says so. */
export function sortNotes(notes: readonly Note[]): Note[] {
  const once = notes.filter(
    (note, i) => notes.findIndex((other) => other.code === note.code && other.about === note.about) === i,
  );
  const place = ({ code }: Note): number => ORDER.get(code) ?? BETWEEN;
  const doubts = once
    .filter((note) => note.level === "doubt")
    .map((note, i) => ({ note, i }))
    .sort((a, b) => place(a.note) - place(b.note) || a.i - b.i)
    .map(({ note }) => note);
  const there = new Set(doubts.map(({ code }) => code));
  return [
    ...doubts.map((note) => withCause(note, there)),
    ...once.filter((note) => note.level === "assumption"),
  ];
}

function withCause(note: Note, there: ReadonlySet<string>): Note {
  const found = FOLLOWS.find(({ cause, codes }) => there.has(cause) && codes.includes(note.code));
  if (found === undefined || note.text.includes(FOLLOWING)) return note;
  return { ...note, text: `${note.text} ${FOLLOWING} ${found.cause}: look there first.` };
}

const FOLLOWING = "It may follow from";
