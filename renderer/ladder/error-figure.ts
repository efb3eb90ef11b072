import type { RunglineResult } from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import type { FigureDescription } from "../plot/figure-description.ts";
import { correlationFigure } from "./correlation-figure.ts";
import { drawsFigure } from "./draws-figure.ts";
import { influenceFigure } from "./influence-figure.ts";
import { profilesFigure } from "./profiles-figure.ts";
import { regionsFigure } from "./regions-figure.ts";
import { residualsFigure } from "./residuals-figure.ts";

export type ErrorView = "regions" | "profiles" | "influence" | "correlations" | "residuals" | "draws";

/** What a referee asks of the errors: one of six ways to look at them. */
export function errorFigure(result: RunglineResult, palette: Palette, view: ErrorView): FigureDescription {
  switch (view) {
    case "regions":
      return regionsFigure(result, palette);
    case "profiles":
      return profilesFigure(result, palette);
    case "influence":
      return influenceFigure(result, palette);
    case "correlations":
      return correlationFigure(result, palette);
    case "residuals":
      return residualsFigure(result, palette);
    case "draws":
      return drawsFigure(result, palette);
  }
}
