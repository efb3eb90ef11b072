import { dayNumber } from "../../app/batch/index.ts";
import type { ComparedSample } from "../../app/protocol/index.ts";
import { Amount, Clause, NumberAmount, Pick, Sentence } from "../controls/choices.tsx";
import { FitAllButton } from "../controls/fit-all-button.tsx";
import { useController, useWindow } from "../store/context.ts";
import type { CompareView } from "../store/session.ts";
import { typedColumns, typeFacts } from "../store/typed-facts.ts";
import { batchesOf, gather } from "../store/gather.ts";

const NONE = "";

/** Which samples stand side by side and how they are compared, as a sentence. */
export function BatchesChoices({ chosen }: { readonly chosen: ComparedSample | null }) {
  const controller = useController();
  const session = useWindow((state) => state.session);
  const view = session.compare;
  const gathered = gather(session);
  const batches = batchesOf(gathered.filter(({ shown }) => shown));
  const labels = factLabels(session);
  const change = (part: Partial<CompareView>, step: string): void => controller.changeCompare(part, step);
  const choose = (part: CompareView["choices"], step: string): void =>
    change({ choices: { ...view.choices, ...part } }, step);
  const bound = (
    key: "temperature" | "date",
    at: 0 | 1,
    value: number | string | null,
    step: string,
  ): void => {
    const pair = [...view[key]] as [never, never];
    pair[at] = value as never;
    change({ [key]: pair } as Partial<CompareView>, step);
  };
  const temperature = (at: 0 | 1, label: string, placeholder: string) => (
    <NumberAmount
      label={label}
      value={view.temperature[at]}
      placeholder={placeholder}
      accept={(value) => value >= 0}
      expected="a temperature in kelvin, or nothing"
      onTake={(value) => bound("temperature", at, value, "temperatures shown")}
    />
  );
  const date = (at: 0 | 1, label: string, placeholder: string) => (
    <Amount
      label={label}
      value={view.date[at] ?? ""}
      placeholder={placeholder}
      width={9}
      onCommit={(text) => {
        if (text !== "" && dayNumber(text) === null) return "a date as 2025-03-11, or nothing";
        bound("date", at, text === "" ? null : text, "dates shown");
        return null;
      }}
    />
  );
  return (
    <div className="choices">
      <Sentence label="Which samples are compared, and how">
        <Clause>
          Samples measured from {temperature(0, "Lowest temperature in kelvin", "any")} to{" "}
          {temperature(1, "Highest temperature in kelvin", "any")} K,
        </Clause>
        <Clause>
          from {date(0, "First date", "any date")} to {date(1, "Last date", "any date")};
        </Clause>
        <Clause>
          compared by their{" "}
          <Pick
            label="Errors that count"
            value={view.choices.errors ?? "total"}
            options={[
              { value: "total", text: "total errors" },
              { value: "statistical", text: "statistical errors" },
            ]}
            onPick={(errors) => choose({ errors }, "errors that count")}
          />
          ,
        </Clause>
        <Clause>
          batches{" "}
          <Pick
            label="Reference batch"
            value={view.choices.reference ?? NONE}
            options={[
              { value: NONE, text: "each with each" },
              ...batches.map((batch) => ({ value: batch, text: `against ${batch}` })),
            ]}
            onPick={(reference) =>
              choose({ reference: reference === NONE ? null : reference }, "reference batch")
            }
          />
          ,
        </Clause>
        <Clause>
          <Pick
            label="Trend along"
            value={view.choices.against ?? NONE}
            options={[
              { value: NONE, text: "without a trend" },
              ...labels.map((label) => ({ value: label, text: `trend along ${label.toLowerCase()}` })),
            ]}
            onPick={(against) => choose({ against: against === NONE ? null : against }, "trend")}
          />
          .
        </Clause>
        {chosen !== null && (
          <Clause>
            {chosen.sample} belongs to batch{" "}
            <Amount
              label={`Batch of ${chosen.sample}`}
              value={chosen.batch}
              placeholder="as the header says"
              width={8}
              onCommit={(text) => {
                // Typed over the header for every file of the sample; nothing typed gives the header back.
                const changes = chosen.results.map(({ file }) => ({ of: file, name: "batch", text }));
                choose(
                  { values: typeFacts(view.choices.values ?? [], changes) },
                  `batch of ${chosen.sample}`,
                );
                return null;
              }}
            />
            .
          </Clause>
        )}
      </Sentence>
      <FitAllButton />
    </div>
  );
}

/** Facts of the headers that say something else from sample to sample and could order them, and typed columns. */
function factLabels(session: Parameters<typeof gather>[0]): readonly string[] {
  const texts = new Map<string, Set<string>>();
  for (const { named } of gather(session))
    if (named.temperature_K !== null)
      texts.set("temperature", (texts.get("temperature") ?? new Set()).add(String(named.temperature_K)));
  for (const { result } of gather(session))
    for (const { key, label, text } of result.reading.facts) {
      if (key === "sample" || key === "batch" || key === "temperature") continue;
      const name = key === "other" ? label : key;
      if (/\d/.test(text)) texts.set(name, (texts.get(name) ?? new Set()).add(text));
    }
  const told = [...texts].flatMap(([name, different]) => (different.size > 1 ? [name] : []));
  return [...new Set([...told, ...typedColumns(session.compare.choices.values ?? [])])];
}
