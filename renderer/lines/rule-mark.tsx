import type { ReactNode } from "react";
import type { RuleMark } from "./line-rules.ts";

/** A rung in small: pinned, between stops, dashed like a predicted one, or one of a pair. */
const SHAPES = {
  held: (
    <>
      <path d="M0.5 5h11" />
      <circle cx="6" cy="5" r="2.6" className="rule-solid" />
    </>
  ),
  bounded: <path d="M2.5 5h7M1.5 1v8M10.5 1v8" />,
  law: <path d="M0.5 5h3M4.7 5h2.6M8.5 5h3" />,
  shared: <path d="M1 3.2h10M1 6.8h10" />,
  free: (
    <>
      <path d="M0.5 5h2.9M8.6 5h2.9" />
      <circle cx="6" cy="5" r="2.6" />
    </>
  ),
} as const satisfies Record<RuleMark["kind"], ReactNode>;

/** Beside a value that is not simply fitted; what it means is read out and stands in its tip. */
export function RuleMarkSign({ mark, of }: { readonly mark: RuleMark; readonly of?: string }) {
  const words = of === undefined ? mark.words : `${of} ${mark.words}`;
  return (
    <span
      className="rule-mark"
      role="img"
      aria-label={words}
      title={words}
      data-kind={mark.kind}
      data-pending={mark.pending || undefined}
    >
      <svg width="12" height="10" aria-hidden="true">
        {SHAPES[mark.kind]}
      </svg>
      {mark.atBound && (
        <span className="mark-doubt" aria-hidden="true">
          ▲
        </span>
      )}
    </span>
  );
}
