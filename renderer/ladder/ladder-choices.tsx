import { resolveProtocol } from "../../app/protocol/index.ts";
import { Amount, Clause, NumberAmount, Pick, Sentence } from "../controls/choices.tsx";
import { FitButton } from "../controls/fit-button.tsx";
import { currentChoices, useController, useWindow } from "../store/context.ts";

/** Which laws the ladder is read with. */
export function LadderChoices() {
  const controller = useController();
  const resolved = resolveProtocol(useWindow(currentChoices));
  if (!resolved.ok) return null;
  const { series, width, strength } = resolved.value;
  const range = series.fit_n === "auto" ? "" : `${series.fit_n[0]}-${series.fit_n[1]}`;
  return (
    <div className="choices">
      <Sentence label="How the ladder is read">
        <Clause>
          Levels with{" "}
          <Pick
            label="Quantum defect"
            value={series.defect}
            options={[
              { value: "none", text: "no quantum defect" },
              { value: "constant", text: "a constant quantum defect" },
              { value: "ritz", text: "a Ritz quantum defect" },
            ]}
            onPick={(defect) => controller.change({ series: { defect } }, `quantum defect ${defect}`)}
          />
        </Clause>
        <Clause>
          over n{" "}
          <Amount
            label="Range of n of the level law, or empty to judge it from the data"
            value={range}
            placeholder="judged"
            width={7}
            onCommit={(text) => {
              if (text === "") {
                controller.change({ series: { fit_n: "auto" } }, "range of n judged");
                return null;
              }
              const match = /^(\d{1,2})\s*[-–]\s*(\d{1,2})$/.exec(text);
              if (match === null || Number(match[1]) >= Number(match[2])) return "a range such as 5-14";
              controller.change(
                { series: { fit_n: [Number(match[1]), Number(match[2])] } },
                `range of n ${text}`,
              );
              return null;
            }}
          />
          ;
        </Clause>
        <Clause>
          widths as{" "}
          <Pick
            label="Base of the width law"
            value={width.base}
            options={[
              { value: "n", text: "n" },
              { value: "n-delta", text: "(n − δ)" },
              { value: "p-envelope", text: "(n² − 1)/n⁵" },
            ]}
            onPick={(base) => controller.change({ width: { base } }, `widths on ${base}`)}
          />{" "}
          to the power −
          <NumberAmount
            label="Exponent of the width law, or empty to fit it"
            value={width.exponent === "free" ? null : width.exponent}
            placeholder="free"
            width={3}
            accept={(value) => value >= 0 && value <= 8}
            expected="0 to 8, or empty"
            onTake={(value) =>
              controller.change({ width: { exponent: value ?? "free" } }, `width exponent ${value ?? "free"}`)
            }
          />
        </Clause>
        <Clause>
          over{" "}
          <Pick
            label="Floor of the widths"
            value={width.floor_kind}
            options={[
              { value: "lorentzian", text: "a Lorentzian floor" },
              { value: "gaussian", text: "a Gaussian floor" },
              { value: "none", text: "no floor" },
            ]}
            onPick={(kind) => controller.change({ width: { floor_kind: kind } }, `width floor ${kind}`)}
          />
          ;
        </Clause>
        <Clause>
          strengths as{" "}
          <Pick
            label="Strength law"
            value={strength.law}
            options={[
              { value: "cubic", text: "n⁻³" },
              { value: "p-envelope", text: "(n² − 1)/n⁵" },
              { value: "sheet", text: "(n − ½)⁻³" },
            ]}
            onPick={(law) => controller.change({ strength: { law } }, `strength law ${law}`)}
          />
        </Clause>
      </Sentence>
      <FitButton />
    </div>
  );
}
