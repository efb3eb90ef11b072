import type { ComparedParameter, Comparison } from "../../app/protocol/index.ts";
import { Amount, Pick } from "../controls/choices.tsx";
import { parseNumber } from "../controls/parse-number.ts";
import { useMode } from "../frame/theme.ts";
import { useController, useWindow } from "../store/context.ts";
import { parameterWords } from "./batches-ledger.ts";
import { partColour } from "./quality-figure.ts";

type Weights = Partial<Record<ComparedParameter, number>>;

/** Where less is better a new part starts with a negative weight. */
const LESS_IS_BETTER: readonly ComparedParameter[] = [
  "width_floor_eV",
  "width_coefficient_eV",
  "background_slope",
  "urbach_energy_eV",
];

export function useWeights(): readonly [Weights, (weights: Weights, step: string) => void] {
  const controller = useController();
  const { choices } = useWindow((state) => state.session.compare);
  return [
    choices.quality ?? {},
    (quality, step) => controller.changeCompare({ choices: { ...choices, quality } }, step),
  ];
}

/** The parts of the figure of quality and their weights: what is weighed is chosen here and nowhere else. */
export function QualityWeights({ comparison }: { readonly comparison: Comparison }) {
  const [weights, change] = useWeights();
  const mode = useMode();
  const counted = comparison.quality?.parts.map(({ name }) => name) ?? [];
  const names = Object.keys(weights) as ComparedParameter[];
  const free = comparison.parameters.filter(({ name, samples }) => samples > 1 && !names.includes(name));
  return (
    <div className="weights" role="group" aria-label="Parts of the figure of quality">
      {names.map((name) => {
        const k = counted.indexOf(name);
        const words = parameterWords(name);
        return (
          <span key={name} className="weight" data-part={name} data-counts={k >= 0 || undefined}>
            <span
              className="weight-sign"
              aria-hidden="true"
              style={k < 0 ? {} : { background: partColour(k, mode) }}
            />
            {words} ×{" "}
            <Amount
              label={`Weight of ${words}`}
              value={String(weights[name])}
              placeholder="0"
              width={3}
              onCommit={(text) => {
                const weight = parseNumber(text);
                if (weight === null) return "a number; below zero where less is better";
                change({ ...weights, [name]: weight }, `weight of ${words}`);
                return null;
              }}
            />
            <button
              type="button"
              className="weight-out"
              aria-label={`Leave out ${words}`}
              title={`Leave out ${words}`}
              onClick={() =>
                change(
                  Object.fromEntries(Object.entries(weights).filter(([other]) => other !== name)),
                  `leave out ${words}`,
                )
              }
            >
              ×
            </button>
          </span>
        );
      })}
      <Pick<ComparedParameter | "">
        label="Add a part"
        value=""
        options={[
          { value: "", text: names.length === 0 ? "weigh a parameter" : "add a part" },
          ...free.map(({ name }) => ({ value: name, text: parameterWords(name) })),
        ]}
        onPick={(name) => {
          if (name !== "")
            change(
              { ...weights, [name]: LESS_IS_BETTER.includes(name) ? -1 : 1 },
              `weigh ${parameterWords(name)}`,
            );
        }}
      />
    </div>
  );
}
