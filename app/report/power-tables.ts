import type { PowerResult, RunglineResult } from "../protocol/index.ts";
import { areaUnit } from "./area-unit.ts";
import { count, measured, numberColumn, textColumn, words, type Cell, type DataTable } from "./data-table.ts";
import { formatNumber, NOT_DETERMINED_WORDS } from "./format-quantity.ts";

const LAWS: Readonly<Record<string, string>> = {
  "separate-pump": "*A* = *A*_{0}/(1 + *S P*)",
  "scanned-probe": "*A* = *A*_{0}/(1 + 2 *S P*)^{1/2}",
  "gaussian-self": "*A* = *A*_{0} ln(1 + 2 *S P*)/(2 *S P*)",
  "gaussian-scanned": "the law of a scanned probe averaged over its Gaussian beam",
  "gaussian-two-beam": "*A* = *A*_{0}/(1 + *S P*) averaged over Gaussian pump and probe",
};

const READINGS: Readonly<Record<PowerResult["lines"][number]["reading"], string>> = {
  bleaches: "bleaches",
  "not-seen": "not seen",
  rises: "absorption rises",
  "not-determined": NOT_DETERMINED_WORDS,
};

/** The tables of the part `power` of a result. */
export function powerTables(power: PowerResult, result: RunglineResult): readonly DataTable[] {
  return [
    saturationTable(power, result),
    volumeTable(power),
    scalingTable(power),
    spectraTable(power),
    inputTable(power),
    otherTable(power),
    crystalTable(power),
  ].filter((table) => table !== null);
}

function limit(value: number | null): Cell {
  return value === null ? words("") : words(`<\u00a0${formatNumber(value, 2)}`);
}

function saturationTable(power: PowerResult, result: RunglineResult): DataTable {
  const area = areaUnit(result.reading.signal_unit);
  return {
    name: "saturation",
    title: `Bleaching of the lines, ${LAWS[power.law] ?? power.law} (${power.excitation.replaceAll("-", " ")})`,
    columns: [
      numberColumn("*n*"),
      textColumn("reading"),
      numberColumn("*A*_{n,0}", area.includes("/") ? `(${area})` : area),
      numberColumn("*S*_{n}", "(1/µW)"),
      textColumn("limit at 95 %"),
      numberColumn("half power", "µW"),
      numberColumn("area and peak differ", "*σ*"),
      numberColumn("exponent of the power"),
    ],
    rows: power.lines.map((line) => [
      count(line.n),
      words(READINGS[line.reading]),
      measured(line.area0),
      measured(line.saturation_per_uW),
      limit(line.saturation_limit_per_uW),
      measured(line.half_power_uW),
      count(line.area_peak_difference, 2),
      measured(line.exponent_test.exponent),
    ]),
    remarks:
      power.repeat_factor > 1
        ? [
            `Errors of areas and peaks times ${formatNumber(power.repeat_factor, 3)}: repeats at one power scatter so much more.`,
          ]
        : [],
  };
}

function volumeTable(power: PowerResult): DataTable {
  return {
    name: "volumes",
    title: "Volume that one exciton blocks",
    columns: [
      numberColumn("*n*"),
      numberColumn("lifetime", "ps"),
      numberColumn("*V*_{n}", "µm^{3}"),
      textColumn("limit at 95 %"),
      numberColumn("expected", "µm^{3}"),
      numberColumn("measured over expected"),
      numberColumn("radius", "µm"),
      numberColumn("orbit radius", "µm"),
      numberColumn("blocked share at the highest power"),
    ],
    rows: power.lines.map((line) => [
      count(line.n),
      measured(line.lifetime_ps),
      measured(line.blockade_volume_um3),
      limit(line.blockade_volume_limit_um3),
      measured(line.expected_volume_um3),
      measured(line.measured_over_expected),
      measured(line.blockade_radius_um),
      measured(line.orbit_radius_um),
      count(line.blocked_fraction_at_highest, 2),
    ]),
    remarks: [
      "Volumes are medians with the 68 % interval of lognormal inputs.",
      ...(power.budget.length === 0
        ? []
        : [
            `Shares of their variance: ${power.budget
              .slice(0, 6)
              .map(({ input, share }) => `${input} ${formatNumber(100 * share, 2)} %`)
              .join(", ")}.`,
          ]),
    ],
  };
}

function scalingTable(power: PowerResult): DataTable | null {
  const rows = [
    { name: "bleaching S", one: power.exponent },
    { name: "volume V", one: power.volume_exponent },
  ].flatMap(({ name, one }) =>
    one === null
      ? []
      : [
          [
            words(name),
            measured(one.exponent),
            measured(one.predicted),
            count(one.ideal, 3),
            words(`${one.fit_n[0]} to ${one.fit_n[1]}`),
            count(one.chi2, 3),
            count(one.dof),
            count(one.p, 2),
          ],
        ],
  );
  return rows.length === 0
    ? null
    : {
        name: "scaling",
        title: "Exponents against *n*",
        columns: [
          textColumn("of"),
          numberColumn("measured"),
          numberColumn("from this sample's widths and areas"),
          numberColumn("ideal"),
          textColumn("*n*"),
          numberColumn("chi square"),
          numberColumn("degrees of freedom"),
          numberColumn("*p*"),
        ],
        rows,
        remarks: [],
      };
}

function spectraTable(power: PowerResult): DataTable {
  return {
    name: "power-spectra",
    title: "Spectra of the series",
    columns: [
      textColumn("spectrum"),
      numberColumn("power", "µW"),
      numberColumn("*E*_{g}", "eV"),
      numberColumn("apparent gap", "eV"),
      numberColumn("highest *n*"),
      numberColumn("chi square"),
      numberColumn("points"),
    ],
    rows: power.spectra.map((one) => [
      words(one.label),
      count(one.power_uW),
      measured(one.gap_eV),
      measured(one.apparent_gap_eV),
      count(one.highest_n),
      count(one.chi2, 6),
      count(one.points),
    ]),
    remarks: [],
  };
}

function inputTable(power: PowerResult): DataTable {
  return {
    name: "power-inputs",
    title: "What went into densities and volumes",
    columns: [
      textColumn("input"),
      numberColumn("value"),
      textColumn("unit"),
      textColumn("relative standard error"),
      textColumn("from"),
      textColumn("key"),
    ],
    rows: power.inputs.map((one) => [
      words(one.name),
      count(one.value, 5),
      words(one.unit),
      words(
        one.relative_sigma === null
          ? ""
          : `${formatNumber(100 * one.relative_sigma, 2)} % (${one.sigma_from})`,
      ),
      words(one.from),
      words(one.key),
    ]),
    remarks: [],
  };
}

function otherTable(power: PowerResult): DataTable {
  const { other } = power;
  const row = (name: string, trend: typeof other.gap_shift_eV, factor: number, unit: string): Cell[] => [
    words(name),
    measured(trend.per_uW, factor, unit === "" ? "1/µW" : `${unit}/µW`),
    measured(trend.at_highest, factor, unit),
    count(trend.significance, 2),
    words(trend.limit === null ? "" : `${formatNumber(trend.limit * factor, 2)} ${unit}`.trim()),
  ];
  const { highest_n: highest } = other;
  return {
    name: "power-other",
    title: "What else the power does",
    columns: [
      textColumn("quantity"),
      textColumn("per power"),
      textColumn("at the highest power"),
      numberColumn("significance"),
      textColumn("limit at 95 %"),
    ],
    rows: [
      row("shift of the gap", other.gap_shift_eV, 1e6, "µeV"),
      row("growth of the lowest widths (relative)", other.heating, 1, ""),
      ...other.broadening.map((one) => row(`width of n = ${one.n}`, one, 1e6, "µeV")),
    ],
    remarks: [
      `Highest *n*: ${highest.at_lowest ?? NOT_DETERMINED_WORDS} at the lowest power, ${highest.at_highest ?? NOT_DETERMINED_WORDS} at the highest.`,
      ...other.plasma.map(
        ({ evidence, value, speaks }) => `${evidence}: ${formatNumber(value, 3)} (${speaks}).`,
      ),
    ],
  };
}

function crystalTable(power: PowerResult): DataTable | null {
  if (power.crystal.length === 0) return null;
  return {
    name: "crystal",
    title: "What each *n* is good for",
    columns: [
      numberColumn("*n*"),
      numberColumn("spacing", "µeV"),
      numberColumn("*Γ*_{n}", "µeV"),
      numberColumn("spacing/*Γ*_{n}"),
      textColumn("addressable"),
      numberColumn("blockade radius", "µm"),
      textColumn("from"),
      numberColumn("spot for one excitation", "µm"),
    ],
    rows: power.crystal.map((one) => [
      count(one.n),
      measured(one.spacing_eV, 1e6),
      measured(one.width_eV, 1e6),
      measured(one.addressability),
      words(one.addressable === null ? NOT_DETERMINED_WORDS : one.addressable ? "yes" : "no"),
      measured(one.blockade_radius_um),
      words(one.blockade_from),
      measured(one.single_spot_um),
    ]),
    remarks: [],
  };
}
