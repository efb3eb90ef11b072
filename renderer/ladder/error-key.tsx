import type { RunglineResult } from "../../app/protocol/index.ts";
import type { ErrorView } from "./error-figure.ts";

const KEYS: Readonly<Record<ErrorView, readonly (readonly [key: string, text: string])[]>> = {
  regions: [
    ["fitted", "68.3 %"],
    ["outer", "95.4 %"],
  ],
  profiles: [
    ["fitted", "profile"],
    ["ideal", "parabola of σ"],
  ],
  influence: [],
  correlations: [
    ["positive", "positive"],
    ["negative", "negative"],
  ],
  residuals: [["chance", "by chance"]],
  draws: [
    ["fitted", "fit"],
    ["drawn", "drawn"],
  ],
};

/** What the marks of the figure mean. */
export function ErrorKey({ result, view }: { readonly result: RunglineResult; readonly view: ErrorView }) {
  const drawn = result.resampled?.draws !== undefined;
  const entries =
    view === "regions" && drawn
      ? [...KEYS.regions, ["points", "drawn"] as const]
      : view === "draws" && !drawn
        ? []
        : KEYS[view];
  if (entries.length === 0) return null;
  return (
    <ul className="key" aria-label="Key">
      {entries.map(([key, text]) => (
        <li key={key} data-key={key}>
          {text}
        </li>
      ))}
    </ul>
  );
}
