import type { Comparison, RunglineResult } from "../protocol/index.ts";
import { comparisonTables } from "./comparison-tables.ts";
import { powerTables } from "./power-tables.ts";
import { resultTables } from "./result-tables.ts";
import { tablesToLatex } from "./table-to-latex.ts";

/** By its first line a file is known as one that may be replaced. */
export const RESULT_LATEX_MARK = "% Rungline, tables of a result";
export const COMPARISON_LATEX_MARK = "% Rungline, tables of a comparison";

/** The tables of results for a paper, in the conventions of siunitx; labels carry the place of the result where there are several. */
export function resultToLatex(...results: readonly RunglineResult[]): string {
  return results
    .map((result, i) => {
      const tables = [
        ...resultTables(result),
        ...((result.power ?? null) === null ? [] : powerTables(result.power!, result)),
      ];
      const own =
        results.length === 1 ? tables : tables.map((table) => ({ ...table, name: `${table.name}-${i + 1}` }));
      return tablesToLatex(`${RESULT_LATEX_MARK} of ${oneLine(result.source.file)}`, own);
    })
    .join("\n");
}

export function comparisonToLatex(comparison: Comparison): string {
  return tablesToLatex(COMPARISON_LATEX_MARK, comparisonTables(comparison));
}

function oneLine(text: string): string {
  return text.replace(/[\r\n]+/g, " ");
}
