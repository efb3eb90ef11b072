import { useEffect, useMemo, useRef, useState, type KeyboardEvent } from "react";
import { resolveProtocol } from "../../app/protocol/index.ts";
import { colourOfN } from "../plot/colours.ts";
import { currentChoices, currentLadder, useController, useWindow } from "../store/context.ts";
import { useMode } from "../frame/theme.ts";
import { expectedLayout, rungLayout, type Rung } from "./rung-layout.ts";

const WIDTH = 148;
const LEFT = 32;
const RIGHT = 86;

const KIND_WORDS = {
  determined: "determined",
  doubtful: "in doubt",
  predicted: "predicted by the law",
} as const;

/** The ladder of the sample: picture, legend and control in one. */
export function RungStrip() {
  const controller = useController();
  const result = useWindow(currentLadder);
  const choices = useWindow(currentChoices);
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const mode = useMode();
  const [height, setHeight] = useState(560);
  const frame = useRef<HTMLDivElement>(null);
  useEffect(() => {
    const observer = new ResizeObserver(([entry]) => setHeight(Math.max(220, entry!.contentRect.height)));
    observer.observe(frame.current!);
    return () => observer.disconnect();
  }, []);
  const layout = useMemo(() => {
    if (result !== null) return rungLayout(result, height);
    const protocol = resolveProtocol(choices);
    return protocol.ok ? expectedLayout(protocol.value, height) : null;
  }, [result, choices, height]);

  const climb = (event: KeyboardEvent): void => {
    if (layout === null) return;
    const numbers = layout.rungs.map((rung) => rung.n);
    const at = selected === null ? -1 : numbers.indexOf(selected);
    const last = numbers.length - 1;
    const next = {
      ArrowUp: at < 0 ? 0 : Math.min(last, at + 1),
      ArrowDown: at < 0 ? last : Math.max(0, at - 1),
      Home: last,
      End: 0,
      Escape: -1,
    }[event.key];
    if (next === undefined) return;
    event.preventDefault();
    controller.select(next < 0 ? null : numbers[next]!);
  };

  return (
    <nav className="rungs" aria-label="Ladder">
      <div className="rungs-head">
        <span className="rungs-title">Ladder</span>
        <span className="small">{result === null ? "expected" : "eV"}</span>
      </div>
      <div className="rungs-frame" ref={frame}>
        {layout === null ? (
          <p className="hint">
            {result === null
              ? "The ladder of the sample grows here once its lines are fitted."
              : "No series was seen. Choose a material or name the lines."}
          </p>
        ) : (
          <>
            <svg className="rungs-rails" width={WIDTH} height={height} aria-hidden="true">
              <Rail x={LEFT} height={height} />
              <Rail x={RIGHT} height={height} />
              <line className="gap-line" x1={LEFT - 8} x2={RIGHT + 8} y1={layout.gapY} y2={layout.gapY} />
              <text className="rung-number" x={LEFT - 12} y={layout.gapY + 4} textAnchor="end">
                ∞
              </text>
              <text className="rung-energy" x={RIGHT + 10} y={layout.gapY + 4}>
                {layout.gap_eV.toFixed(5)}
              </text>
            </svg>
            <svg
              className="rungs-list"
              width={WIDTH}
              height={height}
              role="listbox"
              tabIndex={0}
              aria-label="Levels by n; arrow keys climb"
              aria-activedescendant={
                selected !== null && layout.rungs.some((rung) => rung.n === selected)
                  ? `rung-${selected}`
                  : undefined
              }
              onKeyDown={climb}
              onPointerLeave={() => controller.point(null)}
            >
              {layout.rungs.map((rung, i) => (
                <RungMark
                  key={rung.n}
                  rung={rung}
                  top={i + 1 < layout.rungs.length ? (rung.y + layout.rungs[i + 1]!.y) / 2 : rung.y - 9}
                  bottom={i > 0 ? (rung.y + layout.rungs[i - 1]!.y) / 2 : rung.y + 14}
                  colour={colourOfN(rung.n, mode)}
                  pointed={pointed === rung.n}
                  selected={selected === rung.n}
                  onPoint={() => controller.point(rung.n)}
                  onChoose={() => controller.select(selected === rung.n ? null : rung.n)}
                />
              ))}
            </svg>
          </>
        )}
      </div>
    </nav>
  );
}

/** A rail, broken under the gap: between the last rung and the series limit the axis is not to scale. */
function Rail({ x, height }: { readonly x: number; readonly height: number }) {
  return (
    <>
      <line className="rail" x1={x} x2={x} y1={14} y2={22} />
      <path className="rail" d={`M${x - 3} 24l6 -3M${x - 3} 28l6 -3`} />
      <line className="rail" x1={x} x2={x} y1={27} y2={height - 6} />
    </>
  );
}

interface MarkProps {
  readonly rung: Rung;
  readonly top: number;
  readonly bottom: number;
  readonly colour: string;
  readonly pointed: boolean;
  readonly selected: boolean;
  readonly onPoint: () => void;
  readonly onChoose: () => void;
}

function RungMark({ rung, top, bottom, colour, pointed, selected, onPoint, onChoose }: MarkProps) {
  const { n, y, kind, thickness } = rung;
  const lit = pointed || selected;
  const reach = lit ? 7 : 0;
  const thick = lit ? Math.max(thickness, 3) : thickness;
  return (
    <g
      id={`rung-${n}`}
      className="rung"
      role="option"
      aria-selected={selected}
      aria-label={`n = ${n}, ${rung.energy_eV.toFixed(5)} eV, ${KIND_WORDS[kind]}`}
      data-kind={kind}
      data-lit={lit || undefined}
      onPointerEnter={onPoint}
      onClick={onChoose}
    >
      <rect className="rung-catch" x={0} y={top} width={WIDTH} height={Math.max(1, bottom - top)} />
      {kind === "predicted" ? (
        <line
          x1={LEFT - reach}
          x2={RIGHT + reach}
          y1={y}
          y2={y}
          stroke={colour}
          strokeWidth={lit ? 2.6 : 1.4}
          strokeDasharray="5 4"
        />
      ) : (
        <rect
          className={kind === "doubtful" ? "rung-hollow" : undefined}
          x={LEFT - reach}
          y={y - thick / 2}
          width={RIGHT - LEFT + 2 * reach}
          height={kind === "doubtful" ? Math.max(thick, 3.4) : thick}
          rx={Math.min(2, thick / 2)}
          fill={kind === "doubtful" ? undefined : colour}
          stroke={kind === "doubtful" ? colour : undefined}
          strokeWidth={kind === "doubtful" ? 1.4 : undefined}
        />
      )}
      {(rung.numbered || lit) && (
        <text className="rung-number" x={LEFT - 12} y={y + 4} textAnchor="end">
          {n}
        </text>
      )}
      {(rung.measured || lit) && (
        <text className="rung-energy" x={RIGHT + 10} y={y + 4}>
          {rung.energy_eV.toFixed(5)}
        </text>
      )}
      {selected && <path className="rung-pointer" d={`M-5 ${y - 5}l7 5l-7 5z`} />}
    </g>
  );
}
