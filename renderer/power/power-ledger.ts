import { NOT_DETERMINED, type Quantity } from "../../app/base/index.ts";
import type { PowerLineResult, PowerResult, RunglineResult } from "../../app/protocol/index.ts";
import { formatNumber } from "../../app/report/index.ts";
import { chiText } from "../ladder/ladder-ledger.ts";
import { notesAbout, type CardText, type LedgerEntry, type LedgerSection } from "../ledger/ledger-entry.ts";

const MORE_POWERS =
  "more powers around the one at which a line has fallen to half, and repeats of the lowest";

const CARDS = {
  exponent: {
    definition: "How fast saturation grows with n.",
    formula: "S_n ~ nᵏ over the lines that bleach, with the covariance of all S_n",
    source: "weighted least squares in log n; the ideal 10 holds for widths and areas exactly n⁻³",
    improve: "lines at lower and higher n that still bleach within the powers at hand",
  },
  predicted: {
    definition: "The exponent that this sample's own widths and areas make expected.",
    formula: "S ~ V_expected τ_n A_n/Γ_n",
    source: "follows from density and blockade volume; a floor of the widths lowers it",
    improve: "a better width law: state the slit, measure colder",
  },
  volumeExponent: {
    definition: "How fast the measured blockade volume grows with n.",
    formula: "V_n ~ nᵏ over the lines that bleach",
    source: "the ideal 7 holds for n⁻³ widths: n¹¹ under a cube root of a square, or n⁴ over n⁻³",
    improve: MORE_POWERS,
  },
  volumePredicted: {
    definition: "The exponent of the expected volume by this sample's own widths.",
    formula: "V_expected = (4π/3) R³, interaction = κ Γ_n at R",
    source: "Lukin et al., Phys. Rev. Lett. 87, 037901 (2001): blockade criterion",
    improve: "a better width law",
  },
  saturation: {
    definition: "The initial relative fall of the line's area per microwatt of stated power.",
    formula: "A = A_0/(1 + S P) for a separate pump; other laws as the series was taken",
    source: "rate equilibrium with excluded volume; two-level saturation, Siegman, Lasers (1986)",
    improve: MORE_POWERS,
  },
  half: {
    definition: "The power at which half of the area is bleached.",
    formula: "A(P_½) = A_0/2",
    source: "from the saturation law",
    improve: MORE_POWERS,
  },
  volume: {
    definition: "The volume that one exciton keeps free of others of its n.",
    formula: "V_n = S_n P/ρ_0, independent of P",
    source: "Kazimierczuk et al., Nature 514, 343 (2014), from memory, for the idea of the method",
    improve: "the input that leads the budget below",
  },
  limit: {
    definition: "Bleaching is not seen: the volume is below this.",
    formula: "one-sided 95 % limit of S_n through V_n = S_n P/ρ_0",
    source: "definition",
    improve: "higher power, or the same line with less noise",
  },
  expected: {
    definition:
      "The volume that the chosen interaction makes expected, hard edge, in a slab of this thickness.",
    formula: "(4π/3) R³ (1 − 3R/8d), C_3 n⁴/R³ = κ Γ_n or C_6 n¹¹/R⁶ = κ Γ_n",
    source: "Saffman, Walker and Mølmer, Rev. Mod. Phys. 82, 2313 (2010)",
    improve: "give the interaction coefficient; the default is an order of magnitude",
  },
  ratio: {
    definition: "Measured over expected volume; far above one, something else bleaches too.",
    formula: "V_n/V_expected",
    source: "common practice: above 10 plasma or heating is suspected",
    improve: "a control series that makes pairs but no such excitons",
  },
  density: {
    definition: "Excitons of this n per volume at the highest power, with what they block.",
    formula: "ρ = ρ_0/(1 + S P), ρ_0 = f_abs P (α_n/α_tot) τ_n/(ħω A d)",
    source: "absorbed photons times lifetime over the pumped volume",
    improve: "spot, reflectance and lifetime measured in place of defaults",
  },
  blocked: {
    definition: "The part of the crystal that is blocked at the highest power.",
    formula: "S P/(1 + S P)",
    source: "from the saturation law",
    improve: "stay below 0.3 where the linear reading matters",
  },
  lifetime: {
    definition: "How long an exciton of this n lives, by the homogeneous width at zero power.",
    formula: "τ = ħ/Γ",
    source: "definition; floor and slit make it short and the volume large",
    improve: "give measured lifetimes",
  },
  areaPeak: {
    definition: "Area and peak tell the same story where they agree; in standard errors.",
    formula: "difference of the two S that enter the volume over its standard error",
    source: "definition",
    improve: "a scanned probe falls in the peak first: say how the series was taken",
  },
  gap: {
    definition: "How the series limit moves from zero to the highest power.",
    formula: "slope of the gaps against power, or its 95 % limit",
    source: "definition",
    improve: "let each spectrum have its own gap",
  },
  heating: {
    definition: "Relative growth of the lowest lines' widths: a thermometer.",
    formula: "slope of their widths against power, or its 95 % limit",
    source: "common practice",
    improve: "a smaller duty cycle of the light, better cooling",
  },
  lost: {
    definition: "Lines seen at the lowest power and no longer at the highest.",
    formula: "highest n with an area above noise, lowest against highest power",
    source: "definition",
    improve: "less light",
  },
} as const satisfies Record<string, CardText>;

/** The numbers of a power series in the order a paper would give them; of one line where one is chosen. */
export function powerLedger(result: RunglineResult, chosenN: number | null): readonly LedgerSection[] {
  const power = result.power ?? null;
  if (power === null) return [];
  const sections: LedgerSection[] = [scalingSection(result, power)];
  const line = power.lines.find(({ n }) => n === chosenN) ?? mostTelling(power);
  if (line !== null) sections.push(lineSection(result, power, line));
  sections.push(otherSection(result, power));
  return sections;
}

/** Where no line is chosen: the bleaching line whose S is known best. */
export function mostTelling(power: PowerResult): PowerLineResult | null {
  let best: PowerLineResult | null = null;
  let sharpest = 0;
  for (const line of power.lines) {
    const { value, sigma } = line.saturation_per_uW;
    if (line.reading !== "bleaches" || value === null || sigma === null || !(sigma > 0)) continue;
    if (value / sigma > sharpest) {
      best = line;
      sharpest = value / sigma;
    }
  }
  return best;
}

function scalingSection(result: RunglineResult, power: PowerResult): LedgerSection {
  const { exponent, volume_exponent: volume } = power;
  const entries: LedgerEntry[] = [
    entry(
      result,
      "saturation-exponent",
      "k",
      "S",
      "Exponent of S",
      exponent?.exponent ?? NOT_DETERMINED,
      "",
      1,
      {
        card: CARDS.exponent,
        paths: ["power.exponent"],
        main: true,
      },
    ),
  ];
  if (exponent !== null)
    entries.push(
      entry(result, "saturation-predicted", "k", "S", "predicted", exponent.predicted, "", 1, {
        card: CARDS.predicted,
        paths: [],
      }),
    );
  if (volume !== null)
    entries.push(
      entry(result, "volume-exponent", "k", "V", "Exponent of V", volume.exponent, "", 1, {
        card: CARDS.volumeExponent,
        paths: ["power.volume_exponent"],
        main: true,
      }),
      entry(result, "volume-predicted", "k", "V", "predicted", volume.predicted, "", 1, {
        card: CARDS.volumePredicted,
        paths: [],
      }),
    );
  const ideal = [exponent?.ideal, volume?.ideal].filter((one) => typeof one === "number");
  return {
    title: "Scaling with n",
    entries,
    remark:
      exponent === null
        ? "fewer than three lines bleach"
        : `n = ${exponent.fit_n[0]} to ${exponent.fit_n[1]}, ${chiText(exponent.chi2, exponent.dof, exponent.p)}${
            ideal.length === 0 ? "" : `; ideal ${ideal.join(" and ")}`
          }`,
  };
}

const READING_WORDS = {
  bleaches: "bleaches",
  "not-seen": "bleaching not seen",
  rises: "absorption rises with power",
  "not-determined": "not determined",
} as const;

function lineSection(result: RunglineResult, power: PowerResult, line: PowerLineResult): LedgerSection {
  const at = `power.lines[n=${line.n}]`;
  const below = String(line.n);
  const make = (
    id: string,
    letter: string,
    name: string,
    quantity: Quantity,
    unit: string,
    card: CardText,
    more: { plain?: string; main?: boolean; scale?: number } = {},
  ): LedgerEntry =>
    entry(result, id, letter, below, name, quantity, unit, more.scale ?? 1, {
      card,
      paths: [`${at}.${id}`, ...(more.main === true ? ["power.lines", at] : [])],
      correlations: id === "saturation_per_uW" ? correlations(power, line.n) : [],
      ...more,
    });
  const plain = (text: string): { plain: string } => ({ plain: text });
  const measured = line.blockade_volume_um3.value !== null;
  const entries: LedgerEntry[] = [
    make("saturation_per_uW", "S", "Saturation", line.saturation_per_uW, "/µW", CARDS.saturation, {
      main: true,
    }),
    make("half_power_uW", "P", "Half bleached at", line.half_power_uW, "µW", CARDS.half),
    ...(measured || line.blockade_volume_limit_um3 === null
      ? [
          make("blockade_volume_um3", "V", "Blockade volume", line.blockade_volume_um3, "µm³", CARDS.volume, {
            main: true,
          }),
        ]
      : [
          make("blockade_volume_um3", "V", "Blockade volume", NOT_DETERMINED, "µm³", CARDS.limit, {
            main: true,
            ...plain(`below ${formatNumber(line.blockade_volume_limit_um3, 2)}`),
          }),
        ]),
    make("expected_volume_um3", "V", "expected", line.expected_volume_um3, "µm³", CARDS.expected),
    make("measured_over_expected", "V", "measured/expected", line.measured_over_expected, "", CARDS.ratio),
    make("density_at_highest_um3", "ρ", "Density, most light", NOT_DETERMINED, "/µm³", CARDS.density, {
      plain:
        line.density_at_highest_um3 === null
          ? "not determined"
          : formatNumber(line.density_at_highest_um3, 2),
    }),
    make("blocked_fraction_at_highest", "S", "Blocked, most light", NOT_DETERMINED, "", CARDS.blocked, {
      plain:
        line.blocked_fraction_at_highest === null
          ? "not determined"
          : formatNumber(line.blocked_fraction_at_highest, 2),
    }),
    make("lifetime_ps", "τ", "Lifetime", line.lifetime_ps, "ps", CARDS.lifetime),
    make("area_peak_difference", "S", "Area against peak", NOT_DETERMINED, "", CARDS.areaPeak, {
      plain:
        line.area_peak_difference === null
          ? "not determined"
          : `${formatNumber(Math.abs(line.area_peak_difference), 2)} σ apart`,
    }),
  ];
  const { chi2, dof, p } = line.area ?? { chi2: null, dof: null, p: null };
  return {
    title: `Line n = ${line.n}: ${READING_WORDS[line.reading]}`,
    entries,
    ...(line.area !== null && { remark: `law of the areas, ${chiText(chi2, dof, p)}` }),
  };
}

function otherSection(result: RunglineResult, power: PowerResult): LedgerSection {
  const { gap_shift_eV: gap, heating, highest_n: highest } = power.other;
  return {
    title: "What else the power does",
    entries: [
      trend("gap-shift", "E", "g", "Gap, most light", gap, "µeV", 1e6, CARDS.gap, [
        "power.other.gap_shift_eV",
      ]),
      trend("heating", "Γ", heating.n.join(","), "Lowest widths", heating, "%", 100, CARDS.heating, [
        "power.other.heating",
      ]),
      entry(result, "lost", "n", "max", "Highest n", NOT_DETERMINED, "", 1, {
        card: CARDS.lost,
        paths: ["power.other.highest_n"],
        plain: `${highest.at_lowest ?? "none"} → ${highest.at_highest ?? "none"}`,
      }),
    ],
  };

  function trend(
    id: string,
    letter: string,
    below: string,
    name: string,
    one: PowerResult["other"]["gap_shift_eV"],
    unit: string,
    scale: number,
    card: CardText,
    paths: readonly string[],
  ): LedgerEntry {
    const seen = one.significance !== null && Math.abs(one.significance) >= 2;
    return entry(result, id, letter, below, name, seen ? one.at_highest : NOT_DETERMINED, unit, scale, {
      card,
      paths,
      ...(!seen && one.limit !== null && { plain: `not seen, < ${formatNumber(one.limit * scale, 2)}` }),
    });
  }
}

interface More {
  readonly card: CardText;
  readonly paths: readonly string[];
  readonly correlations?: LedgerEntry["correlations"];
  readonly plain?: string;
  readonly main?: boolean;
}

function entry(
  result: RunglineResult,
  id: string,
  letter: string,
  below: string,
  name: string,
  quantity: Quantity,
  unit: string,
  scale: number,
  { card, paths, correlations: known = [], plain, main }: More,
): LedgerEntry {
  return {
    id: `power-${id}`,
    symbol: { letter, below },
    name,
    quantity,
    unit: plain === "not determined" ? "" : unit,
    scale,
    notes: notesAbout(result.notes, ...paths),
    card,
    correlations: known,
    ...(plain !== undefined && { plain }),
    ...(main !== undefined && { main }),
  };
}

/** The three S_n that this one is most tied to. */
function correlations(power: PowerResult, n: number): LedgerEntry["correlations"] {
  const row = power.correlation.n.indexOf(n);
  if (row < 0) return [];
  return power.correlation.n
    .flatMap((other, i) =>
      i === row ? [] : [{ with: `S${other}`, value: power.correlation.matrix[row]![i]! }],
    )
    .sort((a, b) => Math.abs(b.value) - Math.abs(a.value))
    .slice(0, 3);
}
