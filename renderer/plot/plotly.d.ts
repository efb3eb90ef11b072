/** The part of plotly.js that the plot layer uses; its own types describe far more than is registered here. */
declare module "plotly.js/lib/core" {
  interface Plotly {
    register(modules: readonly unknown[]): void;
    react(root: HTMLElement, data: unknown, layout: unknown, config: unknown): Promise<HTMLElement>;
    restyle(root: HTMLElement, update: Record<string, unknown>, traces: number[]): Promise<unknown>;
    relayout(root: HTMLElement, update: Record<string, unknown>): Promise<unknown>;
    purge(root: HTMLElement): void;
    toImage(
      figure: { data: unknown; layout: unknown } | HTMLElement,
      options: { format: "svg" | "png"; width: number; height: number; scale?: number },
    ): Promise<string>;
    Plots: { resize(root: HTMLElement): void };
  }
  const plotly: Plotly;
  export default plotly;
}
declare module "plotly.js/lib/scatter" {
  const scatter: unknown;
  export default scatter;
}
