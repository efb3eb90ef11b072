import type { Axis, Trace } from "./figure-description.ts";

/** Where a panel stands in its figure, as parts of width and height from the lower left. */
export interface Place {
  readonly x: readonly [number, number];
  readonly y: readonly [number, number];
}

/** One panel: its traces and its two axes. */
export interface Drawn {
  readonly data: readonly Trace[];
  readonly x: Axis;
  readonly y: Axis;
}

/** Panels side by side: the traces of all, and the layout with the axes of each in its place. */
export function composePanels(
  panels: readonly { readonly place: Place; readonly drawn: Drawn }[],
  base: Record<string, unknown>,
): { data: Trace[]; layout: Record<string, unknown> } {
  const data: Trace[] = [];
  const layout: Record<string, unknown> = { ...base };
  panels.forEach(({ place, drawn }, i) => {
    const suffix = i === 0 ? "" : String(i + 1);
    const names = { xaxis: `x${suffix}`, yaxis: `y${suffix}` };
    data.push(...drawn.data.map((trace) => ({ ...trace, ...names })));
    layout[`xaxis${suffix}`] = { ...drawn.x, domain: place.x, anchor: names.yaxis };
    layout[`yaxis${suffix}`] = { ...drawn.y, domain: place.y, anchor: names.xaxis };
  });
  return { data, layout };
}

const LEFT: readonly [number, number] = [0, 0.43];
const RIGHT: readonly [number, number] = [0.57, 1];
const UPPER: readonly [number, number] = [0.58, 1];
const LOWER: readonly [number, number] = [0, 0.42];
const WHOLE: readonly [number, number] = [0, 1];

/** Places of up to four panels; of three the first is the largest. */
export function evenPlaces(count: number): readonly Place[] {
  if (count <= 1) return [{ x: WHOLE, y: WHOLE }];
  if (count === 2)
    return [
      { x: LEFT, y: WHOLE },
      { x: RIGHT, y: WHOLE },
    ];
  if (count === 3)
    return [
      { x: [0, 0.53], y: WHOLE },
      { x: [0.67, 1], y: UPPER },
      { x: [0.67, 1], y: LOWER },
    ];
  return [
    { x: LEFT, y: UPPER },
    { x: RIGHT, y: UPPER },
    { x: LEFT, y: LOWER },
    { x: RIGHT, y: LOWER },
  ];
}
