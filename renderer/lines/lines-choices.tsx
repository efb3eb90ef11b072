import { PRESETS, resolveProtocol, type BackgroundTerm } from "../../app/protocol/index.ts";
import { Amount, Clause, NumberAmount, Pick, Sentence } from "../controls/choices.tsx";
import { parseNumber } from "../controls/parse-number.ts";
import { FitButton } from "../controls/fit-button.tsx";
import { ExtraSeriesClauses } from "./extra-series.tsx";
import { fromPrinted, printed } from "./line-units.ts";
import { parseList } from "./parse-list.ts";
import { currentChoices, useController, useWindow } from "../store/context.ts";

const NO_PRESET = "";
const MICRO = { unit: "µeV", scale: 1e6 } as const;

/** How the lines are fitted, as a sentence whose underlined words can be chosen. */
export function LinesChoices() {
  const controller = useController();
  const choices = useWindow(currentChoices);
  const resolved = resolveProtocol(choices);
  if (!resolved.ok) return null;
  const protocol = resolved.value;
  const { lines, series, width, strength } = protocol;
  const polynomial = protocol.background.find((term) => term.term === "polynomial");
  const window = protocol.window_eV;
  return (
    <div className="choices">
      <Sentence label="How the lines are fitted">
        <Clause>
          Fit{" "}
          <Amount
            label="Lines to fit: list of n, or empty to find them"
            value={lines.n === "auto" ? "" : lines.n.join(", ")}
            placeholder="all lines found"
            width={13}
            onCommit={(text) => {
              const list = parseList(text);
              if (list === null) return "a list such as 2-9 or 3, 4, 7";
              controller.change(
                { lines: { n: list } },
                list === "auto" ? "find the lines" : `fit lines ${text}`,
              );
              return null;
            }}
          />
        </Clause>
        <Clause>
          of{" "}
          <Pick
            label="Material"
            value={protocol.material.preset ?? NO_PRESET}
            options={[
              { value: NO_PRESET, text: "an unknown material" },
              ...PRESETS.map((preset) => ({ value: preset.id, text: preset.title })),
            ]}
            onPick={(id) =>
              controller.change(
                { material: { preset: id === NO_PRESET ? null : id } },
                id === NO_PRESET ? "no material" : `material ${id}`,
              )
            }
          />
        </Clause>
        <Clause>
          from{" "}
          <Amount
            label="Low end of the window in eV"
            value={window === null ? "" : String(window[0])}
            placeholder="auto"
            width={7}
            onCommit={(text) => moveWindow(text, 0)}
          />{" "}
          to{" "}
          <Amount
            label="High end of the window in eV"
            value={window === null ? "" : String(window[1])}
            placeholder="auto"
            width={7}
            onCommit={(text) => moveWindow(text, 1)}
          />{" "}
          eV
        </Clause>
        <Clause>
          through a slit of{" "}
          <NumberAmount
            label="Full width of the slit in µeV, or empty where it is not known"
            value={lines.slit_fwhm_eV === null ? null : Number(printed(lines.slit_fwhm_eV, MICRO))}
            placeholder="unknown"
            width={4}
            accept={(value) => value > 0}
            expected="a width in µeV above zero, or empty"
            onTake={(value) =>
              controller.change(
                { lines: { slit_fwhm_eV: value === null ? null : fromPrinted(value, MICRO) } },
                `slit ${value ?? "unknown"} µeV`,
              )
            }
          />{" "}
          µeV
        </Clause>
        <Clause>
          with{" "}
          <Pick
            label="Asymmetry of the lines"
            value={lines.asymmetry}
            options={[
              { value: "shared", text: "one asymmetry for all" },
              { value: "free", text: "an asymmetry each" },
              { value: "zero", text: "symmetric lines" },
              { value: "law", text: "an asymmetry smooth in n" },
            ]}
            onPick={(asymmetry) => controller.change({ lines: { asymmetry } }, `asymmetry ${asymmetry}`)}
          />
        </Clause>
        <Clause>
          over a{" "}
          <Pick
            label="Order of the background"
            value={polynomial === undefined ? "none" : String(polynomial.order)}
            options={[
              { value: "none", text: "background without polynomial" },
              { value: "0", text: "flat background" },
              { value: "1", text: "straight background" },
              { value: "2", text: "quadratic background" },
              { value: "3", text: "cubic background" },
            ]}
            onPick={(order) =>
              controller.change({ background: withOrder(protocol.background, order) }, `background ${order}`)
            }
          />
        </Clause>
        <Clause>
          and{" "}
          <Pick
            label="Tail of the series"
            value={protocol.tail.model}
            options={[
              { value: "law", text: "a tail tied to the laws" },
              { value: "none", text: "no tail" },
            ]}
            onPick={(model) => controller.change({ tail: { model } }, `tail ${model}`)}
          />
          ,
        </Clause>
        <Clause>
          levels{" "}
          <FreeOrLaw
            label="Levels"
            value={series.mode}
            onPick={(mode) => controller.change({ series: { mode } }, `levels ${mode}`)}
          />
          , widths{" "}
          <FreeOrLaw
            label="Widths"
            value={width.mode}
            onPick={(mode) => controller.change({ width: { mode } }, `widths ${mode}`)}
          />
          , areas{" "}
          <FreeOrLaw
            label="Areas"
            value={strength.mode}
            onPick={(mode) => controller.change({ strength: { mode } }, `areas ${mode}`)}
          />
          ;
        </Clause>
        <ExtraSeriesClauses extra={series.extra} />
      </Sentence>
      <FitButton />
    </div>
  );

  function moveWindow(text: string, end: 0 | 1): string | null {
    if (text === "") {
      controller.change({ window_eV: null }, "window auto");
      return null;
    }
    const value = parseNumber(text);
    if (value === null || value <= 0) return "an energy in eV";
    const other = window?.[1 - end] ?? controller.fittedWindow()?.[1 - end];
    if (other === undefined) return "fit once, or name both ends in the protocol";
    const moved: [number, number] = end === 0 ? [value, other] : [other, value];
    if (moved[0] >= moved[1]) return "the low end lies above the high end";
    controller.change({ window_eV: moved }, `window ${moved[0]} to ${moved[1]} eV`);
    return null;
  }
}

interface FreeOrLawProps {
  readonly label: string;
  readonly value: "free" | "tied";
  readonly onPick: (value: "free" | "tied") => void;
}

/** Whether a parameter of the lines is fitted line by line or is the law itself. */
function FreeOrLaw(props: FreeOrLawProps) {
  return (
    <Pick
      {...props}
      options={[
        { value: "free", text: "free" },
        { value: "tied", text: "by their law" },
      ]}
    />
  );
}

function withOrder(terms: readonly BackgroundTerm[], order: string): BackgroundTerm[] {
  const rest = terms.filter((term) => term.term !== "polynomial");
  return order === "none" ? rest : [{ term: "polynomial", order: Number(order) }, ...rest];
}
