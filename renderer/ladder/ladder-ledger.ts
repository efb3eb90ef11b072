import { NOT_DETERMINED, type Quantity } from "../../app/base/index.ts";
import { quotedLevels, type RunglineResult } from "../../app/protocol/index.ts";
import { formatNumber } from "../../app/report/index.ts";
import { notesAbout, type CardText, type LedgerEntry, type LedgerSection } from "../ledger/ledger-entry.ts";

const MORE_LINES = "more resolved lines: a thinner or purer crystal, lower power, finer steps near the gap";

const CARDS = {
  gap: {
    definition: "The energy at which the series converges: the band gap seen by this exciton series.",
    formula: "E_n = E_g − Ry/(n − δ_n)², fitted to the line energies with their full covariance",
    source: "Ritz 1908; Elliott, Phys. Rev. 108, 1384 (1957)",
    improve: `a wavelength calibration with a stated error, and ${MORE_LINES}`,
  },
  rydberg: {
    definition:
      "The binding energy that an undisturbed hydrogen-like n = 1 would have: the slope of the level law.",
    formula: "Ry in E_n = E_g − Ry/(n − δ_n)²",
    source: "Elliott, Phys. Rev. 108, 1384 (1957)",
    improve: "a wider range of n; low n carries most of the weight",
  },
  defect: {
    definition:
      "The shift of the effective quantum number from the integer n, here with that of a sheet included (0.5).",
    formula: "δ_n = δ₀ + δ₂/(n − δ₀)²",
    source: "Seaton, Rep. Prog. Phys. 46, 167 (1983)",
    improve: "at least five lines in the fit; n and δ are told apart by a convention, not by the energies",
  },
  defect2: {
    definition: "How the quantum defect changes towards low n.",
    formula: "δ₂ in δ_n = δ₀ + δ₂/(n − δ₀)²",
    source: "Seaton, Rep. Prog. Phys. 46, 167 (1983)",
    improve: "more lines at low n",
  },
  floor: {
    definition: "The width that is left at high n: strain, charges, the instrument.",
    formula: "Γ_n = Γ₀ + Γ₁ b⁻ᵏ",
    source: "common practice; see the result's protocol for the base b and the kind of floor",
    improve: "state the slit width, and measure colder and at lower power",
  },
  width: {
    definition: "The coefficient of the width law: the width that n = 1 would have.",
    formula: "Γ_n = Γ₀ + Γ₁ b⁻ᵏ",
    source: "Toyozawa, J. Phys. Chem. Solids 25, 59 (1964)",
    improve: "widths of low n with the slit width known",
  },
  exponent: {
    definition: "The power with which the widths fall.",
    formula: "k in Γ_n = Γ₀ + Γ₁ b⁻ᵏ; 3 for radiative and phonon widths",
    source: "hydrogen-like wave functions scale as n⁻³",
    improve: "set the exponent free and compare; floor and exponent are strongly correlated",
  },
  strength: {
    definition: "The coefficient of the strength law.",
    formula: "A_n = C n⁻³, or C (n² − 1)/n⁵ for a P envelope, or C (n − ½)⁻³ in a sheet",
    source: "Elliott, Phys. Rev. 108, 1384 (1957)",
    improve: "thickness and surface losses known, so that areas are absolute",
  },
  tail: {
    definition: "The strength of the lines above the last resolved one against the strength law.",
    formula: "f in the tied tail, 0 ≤ f ≤ 1.2",
    source: "follows from the continuity of lines and continuum at the gap",
    improve: "lower power; charges and plasma weaken high n first",
  },
  bohr: {
    definition: "The Bohr radius of the exciton.",
    formula: "given, or from permittivity and mass, or from Ry and permittivity",
    source: "effective-mass hydrogen model",
    improve: "give the Bohr radius or permittivity and reduced mass in the protocol",
  },
  binding: {
    definition: "The distance of the named line to the gap; for a P series not the 1S binding energy.",
    formula: "E_g − E_n with the covariance of both",
    source: "definition",
    improve: "a better gap",
  },
  radius: {
    definition: "The mean radius of the exciton in the highest resolved state.",
    formula: "⟨r⟩ = a_B/2 [3n² − l(l + 1)]",
    source: "Bethe and Salpeter, Quantum Mechanics of One- and Two-Electron Atoms (1957), section 3",
    improve: "a better Bohr radius",
  },
  highest: {
    definition: "The highest n whose area stands above five standard errors and which the data ask for.",
    formula: "A_n > 5 σ and a gain of the information criterion above 10",
    source: "Schwarz, Ann. Stat. 6, 461 (1978)",
    improve: "longer exposure, lower power, lower temperature",
  },
  unscaled: {
    definition:
      "The same value with the standard error that the errors of the lines give: too small, since the law is rejected. Above it is widened by the scatter of the levels around the law.",
    formula: "above: σ times the root of reduced χ² of the level law",
    source: "common practice for errors that do not explain the scatter",
    improve: "a range of n that the law describes, or a Ritz quantum defect",
  },
  reading: {
    definition: "Which n the lowest line was given. A constant defect can take up any shift of n.",
    formula: "n + 1 with δ + 1 gives the same energies",
    source: "ranked by strength and width laws, since energies cannot decide",
    improve: "pin the lowest line with the material's first n where it is known",
  },
  systematic: {
    definition: "Spread over defensible backgrounds and windows with the axis offset; never mixed into σ.",
    formula: "spread of the trials listed in the result",
    source: "the trials are listed in the saved result",
    improve: "a reference spectrum of the background and a calibrated axis",
  },
} as const satisfies Record<string, CardText>;

/** The numbers of the series in the order a paper gives them. */
export function ladderLedger(result: RunglineResult): readonly LedgerSection[] {
  const { series, width_law: width, strength_law: strength, derived, tail, systematic } = result;
  const levels = series === null ? null : quotedLevels(series);
  const sections: LedgerSection[] = [];
  const entry = (
    id: string,
    letter: string,
    below: string | undefined,
    name: string,
    quantity: Quantity,
    unit: string,
    scale: number,
    card: CardText,
    paths: readonly string[],
    more: Partial<LedgerEntry> = {},
  ): LedgerEntry => ({
    id,
    symbol: below === undefined ? { letter } : { letter, below },
    name,
    quantity,
    unit,
    scale,
    notes: notesAbout(result.notes, ...paths),
    card,
    correlations: correlationsOf(result, id),
    ...more,
  });
  const q = NOT_DETERMINED;
  sections.push({
    title: "Series",
    entries: [
      entry(
        "gap",
        "E",
        "g",
        "Gap",
        levels?.gap_eV ?? q,
        "eV",
        1,
        CARDS.gap,
        ["series", "series.fit_n", "series.gap_eV"],
        {
          main: true,
        },
      ),
      entry(
        "rydberg",
        "Ry",
        undefined,
        "Rydberg energy",
        levels?.rydberg_eV ?? q,
        "meV",
        1e3,
        CARDS.rydberg,
        ["series.rydberg_eV"],
        { main: true },
      ),
      entry(
        "defect0",
        "δ",
        "0",
        "Quantum defect",
        levels?.defect0 ?? q,
        "",
        1,
        CARDS.defect,
        ["series.defect0"],
        { main: true, exactWord: "held" },
      ),
      ...(series !== null && series.defect2.value !== null
        ? [entry("defect2", "δ", "2", "Ritz term", series.defect2, "", 1, CARDS.defect2, ["series.defect2"])]
        : []),
      ...(series !== null && series.readings.length > 1 ? [readings(series.readings)] : []),
    ],
    ...(series !== null && {
      remark: `n = ${series.fit_n[0]} to ${series.fit_n[1]}, ${chiText(series.chi2, series.dof, series.p)}${
        levels?.scaled === true ? "; the law is rejected, errors scaled by the scatter" : ""
      }`,
    }),
  });
  if (series !== null && levels?.scaled === true)
    sections.push({
      title: "Without the scatter around the law",
      entries: [
        entry("unscaled-gap", "E", "g", "Gap", series.gap_eV, "eV", 1, CARDS.unscaled, []),
        entry(
          "unscaled-rydberg",
          "Ry",
          undefined,
          "Rydberg energy",
          series.rydberg_eV,
          "meV",
          1e3,
          CARDS.unscaled,
          [],
        ),
        entry("unscaled-defect", "δ", "0", "Quantum defect", series.defect0, "", 1, CARDS.unscaled, [], {
          exactWord: "held",
        }),
      ],
    });
  if (systematic !== null)
    sections.push({
      title: "Systematic part, apart",
      entries: [
        spread("systematic-gap", "E", "g", "Gap", systematic.gap_eV, "µeV", 1e6),
        spread("systematic-rydberg", "Ry", undefined, "Rydberg energy", systematic.rydberg_eV, "meV", 1e3),
        spread("systematic-defect", "δ", "0", "Quantum defect", systematic.defect0, "", 1),
      ],
    });
  if (width !== null)
    sections.push({
      title: "Width law",
      entries: [
        entry("width", "Γ", "1", "Coefficient", width.coefficient_eV, "meV", 1e3, CARDS.width, [
          "width_law",
          "width_law.coefficient_eV",
        ]),
        entry(
          "exponent",
          "k",
          undefined,
          "Exponent",
          width.exponent,
          "",
          1,
          CARDS.exponent,
          ["width_law.exponent"],
          { exactWord: "held" },
        ),
        entry("floor", "Γ", "0", "Floor", width.floor_eV, "µeV", 1e6, CARDS.floor, ["width_law.floor_eV"], {
          exactWord: "held",
        }),
      ],
      remark: `n = ${width.fit_n[0]} to ${width.fit_n[1]}, ${chiText(width.chi2, width.dof, width.p)}`,
    });
  const areaUnit = result.reading.signal_unit === "1/cm" ? "meV/cm" : "meV";
  const strengths: LedgerEntry[] = [];
  if (strength !== null)
    strengths.push(
      entry("strength", "C", undefined, "Coefficient", strength.coefficient, areaUnit, 1e3, CARDS.strength, [
        "strength_law",
        "strength_law.coefficient",
      ]),
    );
  if (tail !== null)
    strengths.push(
      entry("tail", "f", undefined, `Tail, n > ${tail.from_n - 1}`, tail.factor, "", 1, CARDS.tail, [
        "tail",
        "tail.factor",
      ]),
    );
  if (strengths.length > 0)
    sections.push({
      title: "Strength law",
      entries: strengths,
      ...(strength !== null &&
        strength.half_at_n !== null && {
          remark: `half of the law at n = ${formatNumber(strength.half_at_n, 3)}`,
        }),
    });
  if (derived !== null) {
    const top = derived.radius_um[derived.radius_um.length - 1];
    sections.push({
      title: "Derived",
      entries: [
        entry(
          "bohr",
          "a",
          "B",
          "Bohr radius",
          derived.bohr_radius_nm,
          "nm",
          1,
          { ...CARDS.bohr, formula: derived.bohr_radius_from },
          ["derived.bohr_radius_nm"],
          { exactWord: "given" },
        ),
        entry(
          "binding",
          "E",
          "b",
          `Binding, n = ${derived.binding_eV.n}`,
          derived.binding_eV,
          "meV",
          1e3,
          CARDS.binding,
          ["derived.binding_eV"],
        ),
        ...(top === undefined
          ? []
          : [
              entry("radius", "r", String(top.n), `Radius, n = ${top.n}`, top, "nm", 1e3, CARDS.radius, [
                "derived.radius_um",
              ]),
            ]),
        entry(
          "highest",
          "n",
          "max",
          "Highest n",
          q,
          "",
          1,
          CARDS.highest,
          ["derived.highest_n", "derived.highest_resolved_n"],
          {
            plain: `${derived.highest_n ?? "not determined"}${
              derived.highest_resolved_n === null ? "" : ` (resolved ${derived.highest_resolved_n})`
            }`,
          },
        ),
      ],
    });
  }
  return sections;

  function readings(known: NonNullable<RunglineResult["series"]>["readings"]): LedgerEntry {
    const chosen = known.find((one) => one.chosen);
    const sign = (shift: number): string =>
      shift === 0 ? "as read" : `${shift > 0 ? "+" : "−"}${Math.abs(shift)}`;
    return entry("reading", "n", undefined, "Reading of n", q, "", 1, CARDS.reading, ["series.readings"], {
      plain: chosen === undefined ? "not determined" : `${sign(chosen.shift)}; ${known.length} ranked`,
      table: {
        caption: "Readings",
        head: ["shift of n", "δ₀", "χ² strengths", "χ² widths", ""],
        rows: known.map((one) => [
          sign(one.shift),
          formatNumber(one.defect0, 4),
          formatNumber(one.strength_chi2, 3),
          formatNumber(one.width_chi2, 3),
          one.chosen ? "chosen" : "",
        ]),
      },
    });
  }

  function spread(
    id: string,
    letter: string,
    below: string | undefined,
    name: string,
    value: number | null,
    unit: string,
    scale: number,
  ): LedgerEntry {
    const plain = value === null ? "not determined" : `± ${formatNumber(value * scale, 2)}`;
    return entry(
      id,
      letter,
      below,
      name,
      q,
      value === null ? "" : unit,
      scale,
      CARDS.systematic,
      ["systematic", `systematic.${letter}`],
      { plain },
    );
  }
}

export function chiText(chi2: number | null, dof: number | null, p: number | null): string {
  if (chi2 === null || dof === null || dof === 0) return "no degree of freedom left";
  return `χ² = ${formatNumber(chi2, 3)} for ${dof}${p === null ? "" : `, p = ${formatNumber(p, 2)}`}`;
}

const NAMES: Readonly<Record<string, readonly string[]>> = {
  gap: ["gap_eV", "gap", "series.gap_eV"],
  rydberg: ["rydberg_eV", "rydberg", "series.rydberg_eV"],
  defect0: ["defect0", "series.defect0"],
  defect2: ["defect2", "series.defect2"],
};

function correlationsOf(result: RunglineResult, id: string): LedgerEntry["correlations"] {
  const wanted = NAMES[id];
  const table = result.series?.correlation;
  if (wanted === undefined || table === undefined) return [];
  const row = table.names.findIndex((name) => wanted.includes(name));
  if (row < 0) return [];
  const spoken: Readonly<Record<string, string>> = {
    gap_eV: "gap",
    rydberg_eV: "Rydberg energy",
    defect0: "δ₀",
    defect2: "δ₂",
  };
  return table.names.flatMap((name, i) =>
    i === row ? [] : [{ with: spoken[name] ?? name, value: table.matrix[row]?.[i] ?? Number.NaN }],
  );
}
