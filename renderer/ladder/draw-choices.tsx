import { useState } from "react";
import { Button } from "react-aria-components";
import { resolveProtocol, type Protocol } from "../../app/protocol/index.ts";
import { Amount, Clause, Pick, Sentence } from "../controls/choices.tsx";
import { currentChoices, useController, useWindow } from "../store/context.ts";

type Kind = Exclude<Protocol["uncertainty"]["resample"], "none">;

/** How many spectra are drawn anew, from which noise and with which seed; the button draws them. */
export function DrawChoices() {
  const controller = useController();
  const resolved = resolveProtocol(useWindow(currentChoices));
  const job = useWindow((state) => state.job);
  const busy = job !== null;
  const uncertainty = resolved.ok ? resolved.value.uncertainty : null;
  const asked = uncertainty?.resample ?? "none";
  const [kind, setKind] = useState<Kind>(asked === "none" ? "parametric" : asked);
  const [count, setCount] = useState(uncertainty?.resamples ?? 500);
  const [seed, setSeed] = useState(uncertainty?.seed ?? 1);
  if (uncertainty === null) return null;
  return (
    <div className="draw-choices">
      <Sentence label="Spectra drawn anew">
        <Clause>
          Draw{" "}
          <Amount
            label="Number of spectra drawn anew"
            value={String(count)}
            placeholder="500"
            width={5}
            onCommit={(text) => {
              const value = Number(text);
              if (!Number.isInteger(value) || value < 10 || value > 100_000) return "10 to 100000";
              setCount(value);
              return null;
            }}
          />{" "}
          spectra
        </Clause>
        <Clause>
          from the fit with{" "}
          <Pick<Kind>
            label="Noise of the spectra drawn anew"
            value={kind}
            options={[
              { value: "parametric", text: "the stated noise" },
              { value: "residual", text: "its own residuals" },
            ]}
            onPick={setKind}
          />
        </Clause>
        <Clause>
          and seed{" "}
          <Amount
            label="Seed of the random numbers"
            value={String(seed)}
            placeholder="1"
            width={5}
            onCommit={(text) => {
              const value = Number(text);
              if (text === "" || !Number.isInteger(value) || value < 0 || value > 0xffffffff)
                return "a whole number from 0";
              setSeed(value);
              return null;
            }}
          />
        </Clause>
      </Sentence>
      {/* One button for both, so that the keyboard stays where it was. */}
      <div className="draw-job">
        <Button
          className={busy ? "button" : "button button-main"}
          onPress={() => {
            if (busy) controller.cancel();
            else void controller.drawAnew({ resample: kind, resamples: count, seed });
          }}
        >
          {busy ? "Stop" : "Draw and fit them"}
        </Button>
        {busy && <span className="small">{job.cancelling ? "stopping" : job.step}</span>}
      </div>
      {asked !== "none" && (
        <p className="small draw-again">
          The protocol asks for them: every fit draws them again.{" "}
          <button
            type="button"
            className="quiet"
            disabled={busy}
            onClick={() =>
              controller.change({ uncertainty: { resample: "none" } }, "spectra no longer drawn anew")
            }
          >
            Not any more
          </button>
        </p>
      )}
    </div>
  );
}
