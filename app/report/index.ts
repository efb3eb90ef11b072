export * from "./format-quantity.ts";
export { csvLine } from "./csv.ts";
export { cautionsFor, CRYOGEN_CAUTION, LASER_CAUTION } from "./cautions.ts";
export { besideN } from "./beside-n.ts";
export { gravestFirst, noteLine } from "./notes.ts";
export { areaUnit } from "./area-unit.ts";
export { resultToText, RESULT_TEXT_MARK } from "./result-to-text.ts";
export { resultToCsv, RESULT_CSV_MARK } from "./result-to-csv.ts";
export {
  summaryRow,
  summaryToCsv,
  summaryToJson,
  SUMMARY_MARK,
  SUMMARY_SCHEMA,
  type SummaryRow,
} from "./summary.ts";
export { resultToJson, resultsToJson, protocolToJson } from "./result-to-json.ts";
export { inspectionToText, type ReadingShown } from "./inspection-to-text.ts";
export {
  comparisonNotes,
  comparisonToText,
  COMPARISON_TEXT_MARK,
  LAW_FORMULAS,
  PARAMETER_TITLES,
  powerScatterInWords,
  powerTitle,
  sampleLabels,
  seriesTitle,
  spreadInWords,
  temperatureVerdict,
  TEMPERATURE_LAW_NAMES,
  weightInWords,
} from "./comparison-to-text.ts";
export {
  resultToLatex,
  comparisonToLatex,
  RESULT_LATEX_MARK,
  COMPARISON_LATEX_MARK,
} from "./result-to-latex.ts";
export { latexNumber } from "./table-to-latex.ts";
export { curvesToCsv, curvesFromCsv, CURVES_CSV_MARK, type FittedCurves } from "./curves-csv.ts";
export { seriesCurvesToCsv, seriesCurvesFromCsv, SERIES_CURVES_CSV_MARK } from "./series-curves-csv.ts";
export { stackSpectra, type PowerSpectrum } from "./figures/stack-spectra.ts";
export {
  reportContents,
  reportToHtml,
  REPORT_HTML_MARK,
  type ReportContents,
  type ReportInput,
} from "./report-to-html.ts";
export { figureFile, figureToSvg, FIGURE_SVG_MARK } from "./figures/figure-to-svg.ts";
export { FULL_WIDTH_MM, ONE_COLUMN_MM, type Figure } from "./figures/figure.ts";
export { NARROWEST_MM, WIDEST_MM, resizeFigure } from "./figures/resize-figure.ts";
export {
  FIGURE_DPI,
  FIGURE_KINDS,
  FIGURE_PDF_MARK,
  FIGURE_PNG_MARK,
  OWN_SIZE,
  makeFigurePress,
  type DrawingTools,
  type FigureChoices,
  type FigureKind,
  type FigurePress,
} from "./figures/figure-files.ts";
export type { FontFiles } from "./figures/typefaces.ts";
export { batchLook, colourOfN, colourOfPower, type Mode, type Shape } from "./figures/colours.ts";
export { comparisonToCsv, comparisonToJson, COMPARISON_CSV_MARK } from "./comparison-to-csv.ts";
