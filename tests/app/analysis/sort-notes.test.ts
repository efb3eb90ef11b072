import { expect, test } from "vitest";
import { sortNotes } from "../../../app/analysis/sort-notes.ts";
import { assumption, doubt, type Note } from "../../../app/base/index.ts";

const said = (code: string): Note => doubt(code, "fit", `${code} is seen.`, "look");
const codes = (notes: readonly Note[]): string[] => notes.map(({ code }) => code);

test("the file's faults come before what the model misses, and that before what the laws say", () => {
  const sorted = sortNotes([
    assumption("noise-estimated", "fit", "estimated", "give it"),
    said("law-rejected"),
    said("a-code-of-its-own"),
    said("misfit"),
    said("step-seen"),
    said("misfit"),
  ]);
  // Derived: step, misfit, what has no place, law; assumptions last; each once
  expect(codes(sorted)).toEqual([
    "step-seen",
    "misfit",
    "a-code-of-its-own",
    "law-rejected",
    "noise-estimated",
  ]);
});

test("a doubt that another explains names it, once however often notes are sorted", () => {
  const sorted = sortNotes(sortNotes([said("misfit"), said("law-rejected"), said("step-seen")]));
  // Derived: both follow from the step; the step from nothing
  expect(sorted.map(({ text }) => text)).toEqual([
    "step-seen is seen.",
    "misfit is seen. It may follow from step-seen: look there first.",
    "law-rejected is seen. It may follow from step-seen: look there first.",
  ]);
  expect(sortNotes([said("law-rejected")])[0]!.text).toBe("law-rejected is seen.");
});
