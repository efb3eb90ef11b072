import type { PowerResult, RunglineResult } from "../protocol/index.ts";
import { areaUnit, signalUnitWords } from "./area-unit.ts";
import { CRYOGEN_CAUTION, LASER_CAUTION } from "./cautions.ts";
import {
  ELECTRONVOLT,
  ends,
  energyUnit,
  formatEnergy,
  formatNumber,
  formatQuantity,
  MICROELECTRONVOLT,
  NOT_DETERMINED_WORDS,
  scaleQuantity,
} from "./format-quantity.ts";
import { textTable, wrap, type Align } from "./text-table.ts";

type Line = PowerResult["lines"][number];
type Quantity = Line["area0"];
type Spread = Line["blockade_volume_um3"];

const LAWS: Readonly<Record<PowerResult["law"], string>> = {
  "separate-pump": "A = A_0/(1 + S P)",
  "scanned-probe": "A = A_0/sqrt(1 + 2 S P)",
  "gaussian-self": "A = A_0 ln(1 + 2 S P)/(2 S P)",
  "gaussian-scanned": "A = A_0/sqrt(1 + 2 S P) averaged over a Gaussian beam",
  "gaussian-two-beam": "A = A_0/(1 + S P) averaged over a Gaussian pump and probe",
};

const READINGS: Readonly<Record<Line["reading"], string>> = {
  bleaches: "",
  "not-seen": "no bleaching seen",
  rises: "absorption rises",
  "not-determined": NOT_DETERMINED_WORDS,
};

/** The part `power` of a result: powers with their cautions, saturation, volumes, inputs, what else the power does. */
export function powerPart(result: RunglineResult): string[] {
  const { power } = result;
  if (power === null || power === undefined) return [];
  return [
    ...spectraPart(power, result),
    ...saturationPart(power, result),
    ...scalingPart(power),
    ...volumePart(power),
    ...inputPart(power),
    ...otherPart(power),
    ...crystalPart(power),
  ];
}

function heading(text: string): string[] {
  return ["", text, "-".repeat(Array.from(text).length)];
}

const left = (count: number): Align[] => Array.from({ length: count }, (): Align => "left");

function plain(quantity: Quantity): string {
  return formatQuantity(quantity.value, quantity.sigma, "", { ...ends(quantity), exactWord: "held" });
}

/** A positive quantity with a multiplicative error: `62 (times or over 1.3)`. */
function spread(one: Spread): string {
  if (one.value === null) return "";
  return one.factor === null
    ? formatNumber(one.value, 3)
    : `${formatNumber(one.value, 3)} ×/÷ ${formatNumber(one.factor, 3)}`;
}

function spectraPart(power: PowerResult, result: RunglineResult): string[] {
  const sources = power.fit?.sources ?? [];
  const rows = power.spectra.map((one, i) => [
    `${formatNumber(one.power_uW, 6)}`,
    one.label,
    sources[i]?.power_from ?? "",
    one.highest_n === null ? "" : String(one.highest_n),
    formatEnergy(one.gap_eV, ELECTRONVOLT),
    formatNumber(sources[i]?.reduced_chi2 ?? null, 3),
    (sources[i]?.held_widths ?? []).join(" "),
  ]);
  const fit = power.fit;
  return [
    ...heading(`Power series: ${power.spectra.length} spectra, ${power.excitation}`),
    ...textTable(
      [
        [
          "P/µW",
          "spectrum",
          "power from",
          "highest n",
          "gap of its own",
          "reduced chi square",
          "widths held, n",
        ],
        ...rows,
      ],
      ["right", "left", "left", "right", "left", "right", "left"],
    ),
    ...wrap(LASER_CAUTION, "  "),
    ...wrap(CRYOGEN_CAUTION, "  "),
    ...(fit === undefined
      ? []
      : [
          "",
          `  Fitted together with common ${fit.shared.join(", ")}:`,
          ...textTable(
            [
              ["gap E_g", formatEnergy(fit.gap_eV, ELECTRONVOLT)],
              ["Rydberg energy Ry", formatEnergy(fit.rydberg_eV, energyUnit(fit.rydberg_eV.value))],
              ["quantum defect", plain(fit.defect0)],
              ...(result.protocol.series.defect === "ritz"
                ? [["Ritz term delta_2", plain(fit.defect2)]]
                : []),
            ],
            left(2),
            "    ",
          ),
          `    chi square ${formatNumber(fit.chi2, 6)} for ${fit.dof} degrees of freedom, reduced ${formatNumber(fit.reduced_chi2)}; stopped by ${fit.termination} after ${fit.iterations} iterations`,
          ...fit.failed.flatMap(({ label, message }) => wrap(`left out: ${label}: ${message}`, "    ")),
        ]),
  ];
}

function saturationPart(power: PowerResult, result: RunglineResult): string[] {
  const area = areaUnit(result.reading.signal_unit);
  const signal = signalUnitWords(result.reading.signal_unit);
  const rows = power.lines.map((line) => [
    String(line.n),
    plain(line.area0),
    plain(line.saturation_per_uW),
    line.saturation_limit_per_uW === null ? "" : `< ${formatNumber(line.saturation_limit_per_uW, 2)}`,
    line.peak === null ? "" : plain(line.peak.saturation_per_uW),
    line.half_power_uW.value === null ? "" : plain(line.half_power_uW),
    formatNumber(line.area?.p ?? null, 2),
    READINGS[line.reading],
  ]);
  return [
    ...heading(`Saturation: ${LAWS[power.law]}`),
    ...textTable(
      [
        ["n", `A_0/(${area})`, "S/µW^-1", "limit (95 %)", "S of the peak", "half bleached at P/µW", "p", ""],
        ...rows,
      ],
      ["right", ...left(7)],
    ),
    `  Areas in ${area}, peaks in ${signal === "" ? "optical depth" : signal}; p: of the law's chi square.`,
  ];
}

function scalingPart(power: PowerResult): string[] {
  const row = (name: string, one: PowerResult["exponent"]): string[][] =>
    one === null
      ? [[name, NOT_DETERMINED_WORDS]]
      : [
          [
            name,
            plain(one.exponent),
            `predicted from the widths and areas ${plain(one.predicted)}`,
            `ideal ${one.ideal}`,
            `n = ${one.fit_n[0]} to ${one.fit_n[1]}, p = ${formatNumber(one.p, 2)}`,
          ],
        ];
  return [
    "",
    "  Scaling with n:",
    ...textTable(
      [...row("S_n ~ n^k", power.exponent), ...row("V_n ~ n^k", power.volume_exponent)],
      left(5),
      "    ",
    ),
  ];
}

function volumePart(power: PowerResult): string[] {
  const rows = power.lines
    .filter((line) => line.blockade_volume_um3.value !== null || line.blockade_volume_limit_um3 !== null)
    .map((line) => [
      String(line.n),
      spread(line.density_per_uW),
      line.blockade_volume_um3.value === null
        ? `< ${formatNumber(line.blockade_volume_limit_um3, 2)}`
        : spread(line.blockade_volume_um3),
      spread(line.blockade_radius_um),
      spread(line.expected_volume_um3),
      spread(line.measured_over_expected),
      formatNumber(line.blocked_fraction_at_highest, 2),
      plain(line.lifetime_ps),
    ]);
  if (rows.length === 0)
    return [...heading("Blockade volume"), `  ${NOT_DETERMINED_WORDS}: see the notes for what is missing`];
  return [
    ...heading("Density at zero bleaching and blockade volume"),
    ...textTable(
      [
        [
          "n",
          "density/(µm^-3 µW^-1)",
          "V/µm^3",
          "radius/µm",
          "expected V/µm^3",
          "measured/expected",
          "blocked at highest P",
          "lifetime/ps",
        ],
        ...rows,
      ],
      ["right", ...left(7)],
    ),
    "  ×/÷: multiplicative standard error (68 % interval), from seeded draws of all inputs.",
  ];
}

function inputPart(power: PowerResult): string[] {
  return [
    "",
    "  What went in:",
    ...textTable(
      power.inputs.map((input) => [
        input.name,
        input.value === null
          ? NOT_DETERMINED_WORDS
          : `${formatNumber(input.value, 4)} ${input.unit}`.trimEnd(),
        input.from === "default" ? "DEFAULT" : input.from,
        input.relative_sigma === null
          ? ""
          : `±${formatNumber(100 * input.relative_sigma, 2)} %${input.sigma_from === "default" ? " (default)" : ""}`,
        input.key,
      ]),
      left(5),
      "    ",
    ),
    ...(power.budget.length === 0
      ? []
      : [
          `  Share of the variance of ln V: ${power.budget
            .filter(({ share }) => share > 0.005)
            .map(({ input, share }) => `${input} ${formatNumber(100 * share, 2)} %`)
            .join("; ")}`,
        ]),
  ];
}

function otherPart(power: PowerResult): string[] {
  const { other } = power;
  const rows = [
    [
      "shift of the gap, lowest to highest power",
      formatEnergy(other.gap_shift_eV.at_highest, MICROELECTRONVOLT),
      other.gap_shift_eV.limit === null
        ? ""
        : `limit (95 %) ${formatNumber(1e6 * other.gap_shift_eV.limit, 2)} µeV`,
    ],
    [
      `relative width of n = ${other.heating.n.join(", ")} (thermometer)`,
      percent(other.heating.at_highest),
      other.heating.limit === null ? "" : `limit (95 %) ${formatNumber(100 * other.heating.limit, 2)} %`,
    ],
    [
      "highest n, lowest to highest power",
      `${other.highest_n.at_lowest ?? "none"} to ${other.highest_n.at_highest ?? "none"}`,
      "",
    ],
    ...other.broadening.map((one) => [
      `broadening of n = ${one.n}`,
      formatEnergy(one.at_highest, MICROELECTRONVOLT),
      one.limit === null ? "" : `limit (95 %) ${formatNumber(1e6 * one.limit, 2)} µeV`,
    ]),
  ];
  return [...heading("What else the power does"), ...textTable(rows, left(3))];
}

/** A relative change. */
function percent(quantity: Quantity): string {
  const scaled = scaleQuantity(quantity, 100);
  return formatQuantity(scaled.value, scaled.sigma, "%", ends(scaled));
}

function crystalPart(power: PowerResult): string[] {
  if (power.crystal.length === 0) return [];
  const width = energyUnit(power.crystal[0]!.width_eV.value);
  return [
    ...heading("What this crystal is good for"),
    ...textTable(
      [
        [
          "n",
          "spacing",
          "width",
          "spacing/width",
          "one line alone",
          "lifetime/ps",
          "orbit/µm",
          "blockade radius/µm",
          "from",
          "spot for one excitation/µm",
        ],
        ...power.crystal.map((one) => [
          String(one.n),
          formatEnergy(one.spacing_eV, width),
          formatEnergy(one.width_eV, width),
          plain(one.addressability),
          one.addressable === null ? "" : one.addressable ? "yes" : "no",
          plain(one.lifetime_ps),
          plain(one.orbit_radius_um),
          spread(one.blockade_radius_um),
          one.blockade_from === "not determined" ? "" : one.blockade_from,
          spread(one.single_spot_um),
        ]),
      ],
      ["right", ...left(9)],
    ),
  ];
}
