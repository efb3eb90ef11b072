import { useState, type KeyboardEvent, type PointerEvent } from "react";

/** Where the x axis lies on the screen: pixels of the figure's element, and the values at its ends. */
export interface AxisPlace {
  readonly left: number;
  readonly width: number;
  readonly top: number;
  readonly height: number;
  readonly from: number;
  readonly to: number;
}

/** A border in the figure that can be moved: by pointer, or with the arrow keys; taken when let go. */
export interface Edge {
  readonly label: string;
  readonly x: number;
  /** Between what it may be moved. */
  readonly lowest: number;
  readonly highest: number;
  /** Of the whole figure, or of one line: thinner, its grip at the foot. */
  readonly of?: "line";
  readonly onMoved: (x: number) => void;
}

/** Pixels that a handle takes to be hit. */
const HANDLE = 24;

/** The borders that a hand can tell apart: of those that would lie on each other only the first; zoomed in, all are there. */
export function apart(edges: readonly Edge[], place: AxisPlace): readonly Edge[] {
  const shown: Edge[] = [];
  const scale = place.width / (place.to - place.from);
  for (const edge of edges)
    if (edge.of !== "line" || shown.every(({ x }) => Math.abs(x - edge.x) * scale >= HANDLE))
      shown.push(edge);
  return shown;
}

/** One key press moves by this share of what is shown. */
const KEY_STEP = 0.004;

export function EdgeHandle({ edge, place }: { readonly edge: Edge; readonly place: AxisPlace }) {
  const [draft, setDraft] = useState<number | null>(null);
  const x = draft ?? edge.x;
  const span = place.to - place.from;
  const left = place.left + ((x - place.from) / span) * place.width;
  if (!(left > place.left - 1 && left < place.left + place.width + 1)) return null;
  // A line is placed finer than a border of the window.
  const digits = edge.of === "line" ? 7 : 5;
  const held = (value: number): number => Math.min(edge.highest, Math.max(edge.lowest, value));
  const take = (): void => {
    if (draft !== null && draft !== edge.x) edge.onMoved(draft);
    setDraft(null);
  };
  const drag = (event: PointerEvent<HTMLDivElement>): void => {
    if (!event.currentTarget.hasPointerCapture(event.pointerId)) return;
    const origin = event.currentTarget.parentElement!.getBoundingClientRect().left;
    setDraft(held(place.from + ((event.clientX - origin - place.left) / place.width) * span));
  };
  const key = (event: KeyboardEvent): void => {
    const direction = { ArrowLeft: -1, ArrowDown: -1, ArrowRight: 1, ArrowUp: 1 }[event.key];
    if (direction !== undefined) {
      event.preventDefault();
      setDraft(held(x + direction * KEY_STEP * span));
    } else if (event.key === "Escape") setDraft(null);
  };
  return (
    <div
      className="edge"
      role="slider"
      tabIndex={0}
      aria-label={edge.label}
      aria-orientation="horizontal"
      aria-valuenow={x}
      aria-valuemin={edge.lowest}
      aria-valuemax={edge.highest}
      aria-valuetext={`${x.toFixed(digits)} eV`}
      data-of={edge.of}
      data-moving={draft !== null || undefined}
      style={{ left, top: place.top, height: place.height }}
      onPointerDown={(event) => event.currentTarget.setPointerCapture(event.pointerId)}
      onPointerMove={drag}
      onPointerUp={take}
      onPointerCancel={() => setDraft(null)}
      onKeyDown={key}
      onKeyUp={(event) => {
        if (event.key.startsWith("Arrow")) take();
      }}
      onBlur={take}
    >
      <span className="edge-grip" aria-hidden="true" />
      {draft !== null && <span className="edge-value">{draft.toFixed(digits)} eV</span>}
    </div>
  );
}
