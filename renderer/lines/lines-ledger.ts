import { NOT_DETERMINED } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { formatNumber } from "../../app/report/index.ts";
import type { CardText, LedgerEntry, LedgerSection } from "../ledger/ledger-entry.ts";
import { notesOfLine } from "../rungs/rung-layout.ts";
import { valueText } from "../ledger/value-text.ts";
import { lineUnits, type PrintedUnit } from "./line-units.ts";

const SHAPE = "α_n = (A_n/π)[g + 2q(E − E_n)]/[(E − E_n)² + g²], g = Γ_n/2";
const TOYOZAWA = "Toyozawa, J. Phys. Chem. Solids 25, 59 (1964)";
const CLEARER = "less noise or finer steps across this line; a thickness at which its peak depth is near 1";

const CARDS = {
  energy: {
    definition: "Energy of the level; the maximum of an asymmetric line lies beside it.",
    formula: SHAPE,
    source: TOYOZAWA,
    improve: CLEARER,
  },
  width: {
    definition: "Full width at half maximum of the Lorentzian part.",
    formula: SHAPE,
    source: TOYOZAWA,
    improve: "state the slit width; measure colder and at lower power",
  },
  area: {
    definition: "Area under the line alone.",
    formula: SHAPE,
    source: TOYOZAWA,
    improve: "thickness and surface losses known",
  },
  asymmetry: {
    definition: "Mixing of the dispersive part: interference with the continuum below.",
    formula: SHAPE,
    source: `${TOYOZAWA}; Fano, Phys. Rev. 124, 1866 (1961)`,
    improve: "a wider window with a stiffer background",
  },
  peak: {
    definition: "Highest point of the line alone.",
    formula: "at E_n + g[√(1 + 4q²) − 1]/(2q)",
    source: "from the line shape",
    improve: CLEARER,
  },
  lifetime: {
    definition: "ħ/Γ: a lower bound of the lifetime, since the width holds dephasing and any floor too.",
    formula: "ħ/Γ, ħ = 658.2119569 µeV ps",
    source: "CODATA; a floor or slit in the width shortens it further",
    improve: "a width free of slit and strain",
  },
  offset: {
    definition: "Energy of the line minus the level law.",
    formula: "E_n − [E_g − Ry/(n − δ_n)²]",
    source: "definition",
    improve: "see the level law in Ladder",
  },
  ratio: {
    definition: "Width over the distance to the next level; above 1 the lines run together.",
    formula: "Γ_n/(E_{n+1} − E_n)",
    source: "definition",
    improve: CLEARER,
  },
} as const satisfies Record<string, CardText>;

/** Why a number that is not the line's own parameter has no error: others were held. */
const EXACT_WORDS: Partial<Record<keyof typeof CARDS, string>> = {
  offset: "follows the law",
  peak: "from held values",
  lifetime: "from held values",
};

/** The numbers of the chosen line. */
export function lineSection(result: RunglineResult, n: number): LedgerSection | null {
  const index = result.lines.findIndex((line) => line.n === n);
  const line = result.lines[index];
  if (line === undefined) return null;
  const about = notesOfLine(result.notes, index, n);
  const perCm = result.reading.signal_unit === "1/cm";
  const { unit: areaUnit, scale: areaScale } = lineUnits(result).area;
  const entry = (
    id: keyof typeof CARDS,
    letter: string,
    below: string | undefined,
    name: string,
    quantity: LedgerEntry["quantity"],
    unit: string,
    scale: number,
    key: string,
    plain?: string,
  ): LedgerEntry => ({
    id: `line-${id}`,
    exactWord: EXACT_WORDS[id] ?? "held",
    ...((id === "peak" || id === "lifetime") && { exactDigits: 4 }),
    symbol: below === undefined ? { letter } : { letter, below },
    name,
    quantity,
    unit,
    scale,
    notes: about.filter(
      (note) => note.about.endsWith(`.${key}`) || (key === "energy_eV" && note.about.endsWith("]")),
    ),
    card: CARDS[id],
    correlations: [],
    ...(plain !== undefined && { plain }),
  });
  const sub = String(n);
  return {
    title: `Line n = ${n}`,
    entries: [
      entry("energy", "E", sub, "Energy", line.energy_eV, "eV", 1, "energy_eV"),
      entry("width", "Γ", sub, "Width", line.width_eV, "µeV", 1e6, "width_eV"),
      entry("area", "A", sub, "Area", line.area, areaUnit, areaScale, "area"),
      entry("asymmetry", "q", sub, "Asymmetry", line.asymmetry, "", 1, "asymmetry"),
      entry("peak", "α", sub, "Peak", line.peak, perCm ? "cm⁻¹" : "", 1, "peak"),
      entry("offset", "Δ", sub, "From the law", line.law_offset_eV, "µeV", 1e6, "law_offset_eV"),
      entry("lifetime", "ħ/Γ", sub, "Lifetime, at least", line.lifetime_ps, "ps", 1, "lifetime_ps"),
      entry(
        "ratio",
        "Γ/Δ",
        sub,
        "Width/spacing",
        NOT_DETERMINED,
        "",
        1,
        "width_over_spacing",
        formatNumber(line.width_over_spacing, 2),
      ),
    ],
  };
}

const FIT_CARDS = {
  chi: {
    definition: "Weighted sum of squares per degree of freedom: 1 where model and noise are right.",
    formula: "χ²/ν",
    source: "least squares",
    improve: "residuals with structure ask for another background, a satellite, or the slit",
  },
  watson: {
    definition: "Whether neighbouring residuals are alike: 2 where they are independent.",
    formula: "Σ(r_i − r_{i−1})²/Σr_i²",
    source: "Durbin and Watson, Biometrika 37, 409 (1950)",
    improve: "the noise of the detector may be correlated; errors are then too small",
  },
  runs: {
    definition: "Probability of so few or so many runs of one sign by chance.",
    formula: "runs test",
    source: "Wald and Wolfowitz, Ann. Math. Stat. 11, 147 (1940)",
    improve: "see where the residuals leave the ±2 band",
  },
} as const satisfies Record<string, CardText>;

/** How good the fit is. */
export function fitSection(result: RunglineResult): LedgerSection | null {
  const { fit } = result;
  if (fit === null) return null;
  const plain = (
    id: string,
    letter: string,
    name: string,
    value: number | null,
    card: CardText,
  ): LedgerEntry => ({
    id,
    symbol: { letter },
    name,
    quantity: NOT_DETERMINED,
    unit: "",
    scale: 1,
    notes: result.notes.filter((note) => note.about === "fit" || note.about.startsWith(`fit.${id}`)),
    card,
    correlations: [],
    plain: formatNumber(value, 3),
  });
  return {
    title: "Fit",
    entries: [
      plain("reduced_chi2", "χ²/ν", `Reduced, ν = ${fit.dof ?? "?"}`, fit.reduced_chi2, FIT_CARDS.chi),
      plain("durbin_watson", "d", "Durbin–Watson", fit.durbin_watson, FIT_CARDS.watson),
      plain("runs_p", "p", "Runs test", fit.runs_p, FIT_CARDS.runs),
    ],
    remark: `${result.status === "converged" ? "Converged" : "Not converged"}: ${TERMINATION[fit.termination]}, ${
      fit.iterations ?? "?"
    } ${fit.iterations === 1 ? "step" : "steps"}, ${fit.parameters ?? "?"} parameters, ${fit.domain === "alpha" ? "absorption" : "transmittance"} domain`,
  };
}

const TERMINATION = {
  gradient: "gradient small",
  step: "step small",
  cost: "change of χ² small",
  iterationLimit: "out of steps",
  cancelled: "cancelled",
  notFinite: "model not finite",
} as const;

const BACKGROUND_CARD: CardText = {
  definition: "A parameter of the background under the lines.",
  formula: "the sum of the terms that the protocol names",
  source: "fitted with the lines",
  improve: "a reference spectrum of the background",
};

export function backgroundSection(result: RunglineResult): LedgerSection | null {
  if (result.background.length === 0) return null;
  return {
    title: "Background",
    entries: result.background.map(({ term, name, unit, quantity }, i) => ({
      id: `background-${i}`,
      symbol: { letter: "b", below: String(i) },
      name: termWords(term, name),
      quantity,
      unit: unitWords(unit),
      scale: 1,
      notes: result.notes.filter((note) => note.about.startsWith(`background[${i}]`)),
      card: BACKGROUND_CARD,
      correlations: [],
    })),
  };
}

/** `legendre2` of a polynomial is its order; other names are words already. */
function termWords(term: string, name: string): string {
  const order = /^legendre(\d+)$/.exec(name)?.[1];
  return order === undefined ? `${term}, ${name}` : `${term}, order ${order}`;
}

/** A unit of the result as the figures print it. */
function unitWords(unit: string): string {
  const [signal, per] = unit.split(" ");
  const first = signal === "1/cm" ? "cm⁻¹" : signal === "1" ? "" : (signal ?? "");
  if (per === undefined) return first;
  return per === "eV^-1/2" ? `${first === "" ? "1" : first}/√eV` : `${first} ${per}`.trim();
}

const EXTRA_CARDS = {
  defect: {
    definition: "Quantum defect of a series that shares gap and Rydberg energy with the main one.",
    formula: "E_n = E_g − Ry/(n − δ)²",
    source: "fitted with the lines",
    improve: "more lines of this series; or hold it at a published value",
  },
  energy: {
    definition: "Energy of a line of the other series, as gap, Rydberg energy and its own defect give it.",
    formula: "E_n = E_g − Ry/(n − δ)²",
    source: "fitted with the lines",
    improve: CLEARER,
  },
} as const satisfies Record<string, CardText>;

/** The other series that were fitted with the main one. */
export function extraSections(result: RunglineResult): LedgerSection[] {
  const units = lineUnits(result);
  const value = (quantity: LedgerEntry["quantity"], { unit, scale }: PrintedUnit): string => {
    const text = valueText({ quantity, scale, unit, exactWord: "held" });
    return text.unit === "" ? text.value : `${text.value} ${text.unit}`;
  };
  return (result.extra ?? []).map(({ name, defect, lines }, i) => {
    const notes = result.notes.filter(
      ({ about, text }) => about === "extra" && text.includes(`extra series ${name}`),
    );
    return {
      title: `Series ${name}`,
      entries: [
        {
          id: `extra-${i}-defect`,
          symbol: { letter: "δ", below: name },
          name: "Quantum defect",
          quantity: defect,
          unit: "",
          scale: 1,
          exactWord: "held",
          notes,
          card: EXTRA_CARDS.defect,
          correlations: [],
        },
        ...lines.map((line) => ({
          id: `extra-${i}-${line.n}`,
          symbol: { letter: "E", below: String(line.n) },
          name: `Energy, ${line.significance.toFixed(0)} standard errors seen`,
          quantity: line.energy_eV,
          unit: "eV",
          scale: 1,
          exactWord: "from held values",
          notes: [],
          card: EXTRA_CARDS.energy,
          correlations: [],
          table: {
            caption: "Its width and area",
            head: ["Γ", "A"],
            rows: [[value(line.width_eV, units.width), value(line.area, units.area)]],
          },
        })),
      ],
    };
  });
}
