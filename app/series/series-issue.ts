import type { Issue } from "../base/index.ts";

export type SeriesIssue =
  | (Issue & {
      readonly code: "series/too-few-lines";
      readonly facts: { readonly law: string; readonly found: number; readonly needed: number };
    })
  | (Issue & {
      readonly code: "series/bad-covariance";
      readonly facts: { readonly law: string; readonly lines: number };
    })
  | (Issue & { readonly code: "series/not-finite"; readonly facts: { readonly law: string } });
