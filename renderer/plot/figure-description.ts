/**
 * A figure as plain data: what plotly takes, restricted to what this window draws, so that a test can freeze it and
 * what is on the screen is what is exported.
 */
export interface Trace {
  readonly type: "scatter";
  readonly name: string;
  readonly x: ArrayLike<number | null>;
  readonly y: ArrayLike<number | null>;
  readonly mode: "lines" | "markers" | "lines+markers" | "text" | "markers+text";
  /** `n` lights the trace with its rung; `part` names what it is. */
  readonly meta: { readonly part: string; readonly n?: number };
  readonly [attribute: string]: unknown;
}

export interface Axis {
  readonly [attribute: string]: unknown;
}

export interface FigureLayout {
  readonly [attribute: string]: unknown;
}

export interface FigureDescription {
  /** What the figure shows, in a sentence, for those who do not see it. */
  readonly summary: string;
  readonly data: readonly Trace[];
  readonly layout: FigureLayout;
}
