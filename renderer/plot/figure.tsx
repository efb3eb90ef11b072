import { useEffect, useImperativeHandle, useRef, useState, type Ref } from "react";
import Plotly from "plotly.js/lib/core";
import scatter from "plotly.js/lib/scatter";
import { apart, EdgeHandle, type AxisPlace, type Edge } from "./edge-handle.tsx";
import type { FigureDescription, Trace } from "./figure-description.ts";

Plotly.register([scatter]);

const CONFIG = {
  displayModeBar: false,
  displaylogo: false,
  showSendToCloud: false,
  scrollZoom: true,
  doubleClick: "reset",
  responsive: false,
};

export interface FigureHandle {
  image(format: "svg" | "png"): Promise<Uint8Array>;
}

interface Props {
  readonly figure: FigureDescription;
  /** Traces of this n are lit, and its label. */
  readonly lit: number | null;
  /** Pointing: the position on the x axis and, over a marker that has one, its n. */
  readonly onPoint?: (x: number | null, n: number | null) => void;
  readonly onChoose?: (x: number, n: number | null) => void;
  /** Borders that can be moved. */
  readonly edges?: readonly Edge[];
  readonly ref?: Ref<FigureHandle>;
}

interface PlotlyRoot extends HTMLDivElement {
  on?(event: string, handler: (event: PlotEvent) => void): void;
  /** The library's own record of where it drew its axes. */
  readonly _fullLayout?: { readonly xaxis?: PlacedAxis; readonly yaxis?: PlacedAxis };
}
interface PlacedAxis {
  readonly _offset: number;
  readonly _length: number;
  readonly range: readonly [number, number];
}
interface PlotEvent {
  readonly points?: readonly { readonly x: number; readonly customdata?: unknown }[];
  readonly xvals?: readonly number[];
  readonly [key: string]: unknown;
}

/** One drawing surface. It redraws when the description changes and only restyles when another line is lit. */
export function Figure({ figure, lit, onPoint, onChoose, edges, ref }: Props) {
  const root = useRef<PlotlyRoot>(null);
  const handlers = useRef({ onPoint, onChoose });
  const [drawn, setDrawn] = useState(0);
  const [place, setPlace] = useState<AxisPlace | null>(null);
  const litNow = useRef<{ figure: FigureDescription; lit: number | null } | null>(null);

  useEffect(() => {
    handlers.current = { onPoint, onChoose };
  });

  useEffect(() => {
    const element = root.current!;
    let stale = false;
    void Plotly.react(
      element,
      figure.data.map((trace) => ({ ...trace })),
      structuredClone(figure.layout),
      CONFIG,
    ).then(() => {
      if (stale) return;
      if (element.dataset["wired"] === undefined) {
        element.dataset["wired"] = "yes";
        wire(element, handlers, () => setPlace(placeOf(element)));
        setPlace(placeOf(element));
      }
      setDrawn((count) => count + 1);
    });
    return () => {
      stale = true;
    };
  }, [figure]);

  useEffect(() => {
    if (drawn === 0) return;
    const before = litNow.current?.figure === figure ? litNow.current.lit : null;
    if (before === lit && litNow.current?.figure === figure) return;
    litNow.current = { figure, lit };
    void light(root.current!, figure.data, before, lit);
  }, [figure, lit, drawn]);

  useEffect(() => {
    const element = root.current!;
    const observer = new ResizeObserver(() => {
      if (element.dataset["wired"] !== undefined && element.clientWidth > 0) Plotly.Plots.resize(element);
    });
    observer.observe(element);
    return () => {
      observer.disconnect();
      Plotly.purge(element);
    };
  }, []);

  useImperativeHandle(ref, () => ({
    async image(format) {
      const element = root.current!;
      const address = await Plotly.toImage(element, {
        format,
        width: element.clientWidth,
        height: element.clientHeight,
        scale: format === "png" ? 3 : 1,
      });
      return bytesOf(address);
    },
  }));

  return (
    <div className="figure-frame">
      <div
        ref={root}
        className="figure"
        role="group"
        aria-label={figure.summary}
        data-state={drawn > 0 ? "drawn" : "drawing"}
        data-drawn={drawn}
        onPointerLeave={() => onPoint?.(null, null)}
      />
      {place !== null &&
        apart(edges ?? [], place).map((edge) => <EdgeHandle key={edge.label} edge={edge} place={place} />)}
    </div>
  );
}

function placeOf({ _fullLayout: layout }: PlotlyRoot): AxisPlace | null {
  const x = layout?.xaxis;
  const y = layout?.yaxis;
  if (x === undefined || y === undefined) return null;
  return {
    left: x._offset,
    width: x._length,
    top: y._offset,
    height: y._length,
    from: x.range[0],
    to: x.range[1],
  };
}

function wire(
  element: PlotlyRoot,
  handlers: { current: Pick<Props, "onPoint" | "onChoose"> },
  moved: () => void,
): void {
  const where = (event: PlotEvent): [number, number | null] | null => {
    const point = event.points?.[0];
    const x = event.xvals?.[0] ?? point?.x;
    if (x === undefined) return null;
    return [x, typeof point?.customdata === "number" ? point.customdata : null];
  };
  element.on?.("plotly_hover", (event) => {
    const at = where(event);
    if (at !== null) handlers.current.onPoint?.(...at);
  });
  element.on?.("plotly_unhover", () => handlers.current.onPoint?.(null, null));
  element.on?.("plotly_click", (event) => {
    const at = where(event);
    if (at !== null) handlers.current.onChoose?.(...at);
  });
  element.on?.("plotly_afterplot", moved);
  element.on?.("plotly_relayout", moved);
  element.on?.("plotly_relayouting", moved);
}

/** Only what changes is restyled, in one call a kind: every call draws the whole figure again. */
async function light(
  element: HTMLElement,
  data: readonly Trace[],
  before: number | null,
  now: number | null,
): Promise<void> {
  // As drawn, nothing is lit.
  if (before === null && now === null) return;
  const component = (n: number): number[] =>
    data.flatMap((trace, i) => (trace.meta.n === n && trace.meta.part === "line" ? [i] : []));
  if (before !== null && component(before).length > 0)
    await Plotly.restyle(element, { opacity: 0.55, "line.width": 1.1 }, component(before));
  if (now !== null && component(now).length > 0)
    await Plotly.restyle(element, { opacity: 1, "line.width": 3 }, component(now));
  const rings = data.flatMap((trace, i) => {
    const numbers = trace["customdata"];
    if (trace.meta.part !== "levels" || !Array.isArray(numbers)) return [];
    if (!numbers.includes(before) && !numbers.includes(now)) return [];
    const rest = (trace["marker"] as { readonly size?: readonly number[] } | undefined)?.size;
    return [{ i, sizes: numbers.map((one, k) => (one === now ? 13 : (rest?.[k] ?? 8))) }];
  });
  if (rings.length > 0)
    await Plotly.restyle(
      element,
      { "marker.size": rings.map(({ sizes }) => sizes) },
      rings.map(({ i }) => i),
    );
}

function bytesOf(address: string): Uint8Array {
  const comma = address.indexOf(",");
  const head = address.slice(0, comma);
  const body = address.slice(comma + 1);
  if (!head.endsWith(";base64")) return new TextEncoder().encode(decodeURIComponent(body));
  const text = atob(body);
  return Uint8Array.from(text, (letter) => letter.charCodeAt(0));
}
