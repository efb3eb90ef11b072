import {
  energyUnit,
  formatNumber,
  LAW_FORMULAS,
  seriesTitle,
  temperatureVerdict,
  TEMPERATURE_LAW_NAMES,
  weightInWords,
} from "../../app/report/index.ts";
import { NOT_DETERMINED } from "../../app/base/index.ts";
import type { Comparison, TemperatureLaw, TemperatureSeries } from "../../app/protocol/index.ts";
import {
  notesAbout,
  type CardText,
  type LedgerEntry,
  type LedgerSection,
  type LedgerSymbol,
} from "../ledger/ledger-entry.ts";
import { lawsInOrder } from "./temperature-figure.ts";

const SOURCES: Readonly<Record<TemperatureLaw["law"], string>> = {
  varshni: "Varshni, Physica 34, 149 (1967)",
  "bose-einstein": "O'Donnell and Chen, Appl. Phys. Lett. 58, 2924 (1991)",
  phonons: "Rudin, Reinecke and Segall, Phys. Rev. B 42, 11218 (1990)",
  optical: "Rudin, Reinecke and Segall, Phys. Rev. B 42, 11218 (1990)",
  acoustic: "Rudin, Reinecke and Segall, Phys. Rev. B 42, 11218 (1990)",
};

const NAMES: Readonly<Record<string, readonly [LedgerSymbol, string, string]>> = {
  gap0: [{ letter: "E", below: "0" }, "Gap at 0 K", "The gap that the law gives at zero temperature."],
  alpha: [{ letter: "α" }, "Slope at high T", "The slope that the gap falls with far above β."],
  beta: [{ letter: "β" }, "Scale of T", "The temperature around which the gap begins to fall."],
  gapB: [
    { letter: "E", below: "B" },
    "Bare gap",
    "The gap without phonons; at 0 K it is lower by the coupling.",
  ],
  coupling: [{ letter: "a", below: "B" }, "Coupling", "How strongly phonons of energy kΘ lower the gap."],
  theta: [{ letter: "Θ" }, "Phonon scale", "Mean temperature of the phonons that move the gap."],
  width0: [{ letter: "Γ", below: "0" }, "Width at 0 K", "What is left of the width without phonons."],
  acoustic: [{ letter: "a" }, "Acoustic", "Growth of the width with temperature by acoustic phonons."],
  optical: [{ letter: "b" }, "Optical", "Width by one optical phonon a mode; times their number."],
  phonon_energy: [{ letter: "ħω" }, "Phonon energy", "Energy of the phonons that broaden the line."],
};

/** Every law of gap and width with its parameters; the preferred one first. */
export function temperatureLedger(
  { temperature }: Comparison,
  shown: readonly (TemperatureSeries | null)[],
): readonly LedgerSection[] {
  const notes = temperature?.notes ?? [];
  return shown.flatMap((series) =>
    series === null
      ? []
      : lawsInOrder(series).map((law, k): LedgerSection => ({
          title: `${capital(seriesTitle(series))}: ${TEMPERATURE_LAW_NAMES[law.law]}`,
          entries: law.parameters.map((one) => parameter(series, law, one, notes, k === 0)),
          remark: [
            ...(k === 0 ? [temperatureVerdict(series)] : []),
            `χ² = ${formatNumber(law.chi2, 3)} for ${law.dof}`,
            ...(law.weight === null ? [] : [`weight ${weightInWords(law.weight)}`]),
            ...(k === 0 && law.scaled_by > 1 ? [`errors × ${formatNumber(law.scaled_by, 2)}`] : []),
          ].join("; "),
        })),
  );
}

function parameter(
  series: TemperatureSeries,
  law: TemperatureLaw,
  { name, unit, quantity }: TemperatureLaw["parameters"][number],
  notes: Comparison["notes"],
  main: boolean,
): LedgerEntry {
  const [symbol, words, definition] = NAMES[name]!;
  const whole = name === "gap0" || name === "gapB";
  const energy = unit.startsWith("eV") && !whole ? energyUnit(quantity.value) : null;
  const scale = energy?.perElectronvolt ?? 1;
  const shownUnit = energy === null ? unit : unit.replace("eV", energy.name);
  const bound = quantity.value !== null && quantity.sigma === null;
  const card: CardText = {
    definition,
    formula: LAW_FORMULAS[law.law].replace(/^[^,]*, /, ""),
    source: SOURCES[law.law],
    improve: "a wider range of temperatures, up to where kT is a good part of the phonon energy",
  };
  return {
    id: `temperature-${series.quantity}-${law.law}-${name}`,
    symbol,
    name: words,
    quantity: bound ? NOT_DETERMINED : quantity,
    ...(bound && { plain: `${formatNumber(quantity.value! * scale)} ${shownUnit}, its bound` }),
    unit: quantity.value === null || bound ? "" : shownUnit,
    scale,
    notes: notesAbout(notes, `temperature.${series.quantity}`),
    card,
    correlations: [],
    main: main && !bound,
  };
}

function capital(text: string): string {
  return `${text.slice(0, 1).toUpperCase()}${text.slice(1)}`;
}
