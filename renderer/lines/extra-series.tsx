import type { Protocol, RunglineResult } from "../../app/protocol/index.ts";
import { Amount, Clause, Pick } from "../controls/choices.tsx";
import { parseNumber } from "../controls/parse-number.ts";
import { currentAnalysed, useController, useWindow } from "../store/context.ts";
import { parseList } from "./parse-list.ts";

type Extra = Protocol["series"]["extra"][number];

/** Other series with the same gap and Rydberg energy, as clauses of the sentence; and the way to one more. */
export function ExtraSeriesClauses({ extra }: { readonly extra: readonly Extra[] }) {
  const controller = useController();
  const result = useWindow(currentAnalysed)?.result ?? null;
  const set = (next: readonly Extra[], step: string): void =>
    controller.change({ series: { extra: [...next] } }, step);
  return (
    <>
      {extra.map((one, i) => (
        <ExtraClause
          key={i}
          series={one}
          taken={extra.flatMap(({ name }, k) => (k === i ? [] : [name]))}
          onChange={(change, step) =>
            set(
              extra.map((other, k) => (k === i ? { ...other, ...change } : other)),
              `series ${one.name}: ${step}`,
            )
          }
          onRemove={() =>
            set(
              extra.filter((_, k) => k !== i),
              `without series ${one.name}`,
            )
          }
        />
      ))}
      <Clause>
        <button
          type="button"
          className="pick"
          title="Fit lines of another series with the same gap and Rydberg energy"
          onClick={() => {
            const added = firstExtra(extra, result);
            set([...extra, added], `another series ${added.name}`);
          }}
        >
          {extra.length === 0 ? "add another series" : "one more series"}
        </button>
      </Clause>
    </>
  );
}

const NAMES = ["F", "D", "S", "H"] as const;

/** Its n where the main series is seen well, its defect a little below the main one: a start, not a guess. */
export function firstExtra(extra: readonly Extra[], result: RunglineResult | null): Extra {
  const name = NAMES.find((one) => !extra.some((other) => other.name === one)) ?? `X${extra.length + 1}`;
  const high = (result?.lines ?? []).flatMap(({ n }) => (n >= 4 ? [n] : []));
  const defect = result?.series?.defect0.value ?? null;
  return {
    name,
    n: high.length > 0 ? high.slice(0, 3) : [4, 5, 6],
    defect: defect === null ? 0 : Number((defect - 0.1).toFixed(2)),
    hold_defect: false,
    width: "law",
    asymmetry: "own",
  };
}

interface ExtraProps {
  readonly series: Extra;
  readonly taken: readonly string[];
  readonly onChange: (change: Partial<Extra>, step: string) => void;
  readonly onRemove: () => void;
}

function ExtraClause({ series, taken, onChange, onRemove }: ExtraProps) {
  const { name, n, defect, hold_defect: held, width } = series;
  return (
    <>
      <Clause>
        series{" "}
        <Amount
          label={`Name of the other series ${name}`}
          value={name}
          placeholder=""
          width={2}
          onCommit={(text) => {
            if (text === "") return "a name such as F";
            if (taken.includes(text)) return "a name that no other series has";
            onChange({ name: text }, `name ${text}`);
            return null;
          }}
        />{" "}
        at n ={" "}
        <Amount
          label={`n of the series ${name}`}
          value={n.join(", ")}
          placeholder=""
          width={5}
          onCommit={(text) => {
            const list = parseList(text);
            if (list === null || list === "auto") return "a list such as 4-6 or 4, 5";
            onChange({ n: list }, `n = ${list.join(", ")}`);
            return null;
          }}
        />
      </Clause>
      <Clause>
        with{" "}
        <Pick
          label={`Quantum defect of the series ${name}, fitted or held`}
          value={held ? "held" : "fitted"}
          options={[
            { value: "fitted", text: "a defect near" },
            { value: "held", text: "the defect held at" },
          ]}
          onPick={(text) => onChange({ hold_defect: text === "held" }, `defect ${text}`)}
        />{" "}
        <Amount
          label={`Quantum defect of the series ${name}`}
          value={String(defect)}
          placeholder=""
          width={4}
          onCommit={(text) => {
            const value = parseNumber(text);
            if (value === null || Math.abs(value) > 3) return "a number from −3 to 3";
            onChange({ defect: value }, `defect ${value}`);
            return null;
          }}
        />
      </Clause>
      <Clause>
        and{" "}
        <Pick
          label={`Widths of the series ${name}`}
          value={width}
          options={[
            { value: "law", text: "the same width law" },
            { value: "free", text: "widths of its own" },
          ]}
          onPick={(text) => onChange({ width: text }, `widths ${text}`)}
        />{" "}
        <button
          type="button"
          className="pick"
          aria-label={`Take the series ${name} away`}
          title={`Take the series ${name} away`}
          onClick={onRemove}
        >
          ×
        </button>
        ,
      </Clause>
    </>
  );
}
