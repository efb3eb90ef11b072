import { describe, expect, test } from "vitest";
import {
  blockadeRadius,
  judgePower,
  slabFactor,
  sphereVolume,
  wordJudgeIssue,
  type PowerInput,
  type PowerJudgement,
} from "../../../app/power/index.ts";
import { powerSchema, resolveProtocol, type ProtocolInput } from "../../../app/protocol/index.ts";
import {
  areaOf,
  energyOf,
  GAP,
  makePowerInput,
  SPOT_UM,
  THICKNESS_UM,
  widthOf,
  type PowerTruth,
} from "../../support/make-power-table.ts";

const N = [6, 7, 8, 9, 10, 11, 12, 13];
const POWERS = [1, 3, 10, 30, 100, 300, 1000];
const EXPONENT = 9.5;
const SATURATION = (n: number): number => 1.5e-3 * (n / 10) ** EXPONENT;
const SAID: NonNullable<ProtocolInput["power"]> = {
  excitation: "separate-pump",
  spot_profile: "flat",
  draws: 200,
};

function input(truth: Partial<PowerTruth> = {}, power: ProtocolInput["power"] = {}): PowerInput {
  return makePowerInput({
    n: N,
    power_uW: POWERS,
    saturation: SATURATION,
    seed: 5,
    ...truth,
    protocol: { ...truth.protocol, power: { ...SAID, ...power } },
  });
}

function judge(given: PowerInput): PowerJudgement {
  const judged = judgePower(given);
  if (!judged.ok) throw new Error(JSON.stringify(judged.issues));
  // Whatever comes out keeps to the schema of results.
  powerSchema.parse(judged.value.power);
  return judged.value;
}

const codes = (judged: PowerJudgement): string[] => judged.notes.map((note) => note.code);
const pull = (q: { value: number | null; sigma: number | null }, truth: number): number =>
  (q.value! - truth) / q.sigma!;

describe("a series with a known truth", () => {
  const judged = judge(input());
  const { power } = judged;

  test("gives every S_n and the exponent within four standard errors", () => {
    // Derived: the truth of the generator, which calls no law of app/
    for (const line of power.lines)
      expect(Math.abs(pull(line.saturation_per_uW, SATURATION(line.n)))).toBeLessThan(4);
    expect(Math.abs(pull(power.exponent!.exponent, EXPONENT))).toBeLessThan(4);
    expect(power.exponent!.ideal).toBe(10);
    expect(power.volume_exponent!.ideal).toBe(7);
    // Derived: widths and areas exactly n^-3 predict the ideal exponents
    expect(Math.abs(pull(power.exponent!.predicted, 10))).toBeLessThan(4);
    expect(Math.abs(pull(power.volume_exponent!.predicted, 7))).toBeLessThan(4);
    // Derived: V = S times n^(-3+... ) of the truth: exponent of S minus 3 (tau n^3, alpha_n n^0)
    expect(Math.abs(pull(power.volume_exponent!.exponent, EXPONENT - 3))).toBeLessThan(4);
  });

  test("turns S into the volume that plain arithmetic gives", () => {
    for (const line of power.lines.filter((one) => one.reading === "bleaches")) {
      const d = THICKNESS_UM;
      const own = (areaOf(line.n) / (Math.PI * (widthOf(line.n) / 2))) * d * 1e-4;
      const total = own + 20 * d * 1e-4;
      const r = (2.95 - 1) ** 2 / (2.95 + 1) ** 2;
      const x = Math.exp(-total);
      const absorbed = ((1 - r) * (1 - x)) / (1 - r * x);
      const tau = 6.582119569509e-4 / widthOf(line.n);
      const photons = (1e-6 / (energyOf(line.n) * 1.602176634e-19)) * 1e-12;
      const density = (photons * absorbed * (own / total) * tau) / ((Math.PI / 4) * SPOT_UM ** 2 * d);
      // Derived: V = S P/rho_0 from the truth, in plain SI
      const truth = SATURATION(line.n) / density;
      const { value, factor } = line.blockade_volume_um3;
      expect(Math.abs(Math.log(value! / truth)) / Math.log(factor!)).toBeLessThan(4);
      // The inputs' own errors are in it: spot 10 % alone makes 20 %.
      expect(factor!).toBeGreaterThan(1.2);
      expect(Math.abs(line.density_per_uW.value! / density - 1)).toBeLessThan(0.1);
      // Derived: half is blocked at S P = 1
      expect(line.half_power_uW.value! * line.saturation_per_uW.value!).toBeCloseTo(1, 12);
    }
  });

  test("says what dominates the error, and the shares sum to one", () => {
    for (const line of power.lines.filter((one) => one.reading === "bleaches")) {
      // Derived: shares of one variance
      expect(line.budget.reduce((sum, one) => sum + one.share, 0)).toBeCloseTo(1, 10);
    }
    const top = power.lines.at(-1)!.budget[0]!;
    // Derived: 2 x 10 % of the spot against 5 % of everything else
    expect(top.input).toBe("spot diameter");
  });

  test("compares with the expected volume, and the orbit", () => {
    const line = power.lines[4]!;
    const radius = blockadeRadius("dipole-dipole", 2.37e-4, 10, widthOf(10), 0.5);
    const dipole = line.expected.find((one) => one.interaction === "dipole-dipole")!;
    // Derived: the formula at the true width; widths are known to 1 %
    expect(
      Math.abs(dipole.hard_um3.value! / (sphereVolume(radius) * slabFactor(radius, THICKNESS_UM)) - 1),
    ).toBeLessThan(0.05);
    expect(dipole.coefficient_from).toBe("default");
    // Derived: pi/2 softer
    expect(dipole.soft_um3.value! / dipole.hard_um3.value!).toBeCloseTo(Math.PI / 2, 12);
    const waals = line.expected.find((one) => one.interaction === "van-der-waals")!;
    expect(waals.coefficient_from).toBe("not determined");
    expect(waals.hard_um3.value).toBeNull();
    // Derived: a_B/2 (3 n^2 - 2) with 1.11 nm
    expect(line.orbit_radius_um.value!).toBeCloseTo((1.11e-3 / 2) * 298, 9);
  });

  test("marks every default as one", () => {
    const from = Object.fromEntries(power.inputs.map((row) => [row.key, row.from]));
    expect(from["power.transmission_to_sample"]).toBe("default");
    expect(from["power.c3_ueV_um3"]).toBe("default");
    expect(from["power.c6_ueV_um6"]).toBe("not determined");
    expect(from["material.index"]).toBe("preset");
    expect(from["power.spot_diameter_um"]).toBe("given");
    expect(codes(judged)).toEqual(
      expect.arrayContaining([
        "reflectance-assumed",
        "transmission-assumed",
        "input-sigma-assumed",
        "coefficient-assumed",
        "volume-upper-limit",
        "beyond-linear",
        "plasma-not-excluded",
      ]),
    );
    expect(codes(judged)).not.toContain("excitation-assumed");
    const bare = judge(input({}, { excitation: null, spot_profile: null }));
    expect(codes(bare)).toEqual(expect.arrayContaining(["excitation-assumed", "profile-assumed"]));
  });

  test("finds no heating, no shift and no other law where there is none", () => {
    for (const code of [
      "heating",
      "lines-shift-with-power",
      "other-law-fits-better",
      "saturation-exponent",
      "saturation-law-rejected",
      "area-peak-disagree",
      "absorption-rises",
      "repeats-scatter",
    ])
      expect(codes(judged)).not.toContain(code);
    expect(power.other.gap_shift_eV.limit).not.toBeNull();
  });

  test("gives the crystal's table with what a spot must be to hold one excitation", () => {
    const one = power.crystal[4]!;
    const spacing = energyOf(11) - energyOf(10);
    // Derived: levels of the truth
    expect(Math.abs(pull(one.spacing_eV, spacing))).toBeLessThan(4);
    expect(Math.abs(pull(one.addressability, spacing / widthOf(10)))).toBeLessThan(4);
    expect(one.addressable).toBe(true);
    expect(one.blockade_from).toBe("measured");
    const volume = power.lines[4]!.blockade_volume_um3.value!;
    // Derived: a disc through the crystal with that volume
    expect(
      Math.abs(one.single_spot_um.value! / Math.sqrt((4 * volume) / (Math.PI * THICKNESS_UM)) - 1),
    ).toBeLessThan(0.03);
  });

  test("the same input gives the same result, to the last digit", () => {
    expect(judge(input())).toEqual(judged);
  });

  test("V does not depend on the power: the unit of power and a factor of all powers drop out", () => {
    const twice = judge(input({ power_uW: POWERS.map((p) => 2 * p), saturation: (n) => SATURATION(n) / 2 }));
    power.lines.forEach((line, i) => {
      if (line.reading !== "bleaches") return;
      // Derived: S halves, rho_0 per uW stays, so V halves with it at the same stated spot; S times P is the same
      expect(twice.power.lines[i]!.blockade_volume_um3.value! * 2).toBeCloseTo(
        line.blockade_volume_um3.value!,
        4,
      );
      expect(twice.power.lines[i]!.blocked_fraction_at_highest!).toBeCloseTo(
        line.blocked_fraction_at_highest!,
        6,
      );
    });
    for (const line of power.curves.lines) {
      // Derived: V is one number
      expect(new Set(line.measured_volume_um3).size).toBe(1);
    }
  });
});

describe("series that could be read wrongly", () => {
  const swept: Partial<PowerTruth> = {
    areaFactor: (s) => 1 / Math.sqrt(1 + 2 * s),
    widthFactor: (s) => Math.sqrt(1 + 2 * s),
  };
  const gaussian: Partial<PowerTruth> = { areaFactor: (s) => (s === 0 ? 1 : Math.log(1 + 2 * s) / (2 * s)) };

  test("a swept laser is read by its own law, with twice the S in the volume and no broadening", () => {
    const judged = judge(input(swept, { excitation: "scanned-probe" }));
    const plain = judge(input());
    for (const line of judged.power.lines)
      // Derived: truth of the generator
      expect(Math.abs(pull(line.saturation_per_uW, SATURATION(line.n)))).toBeLessThan(4);
    const at = (one: PowerJudgement): number => one.power.lines[5]!.blockade_volume_um3.value!;
    const ratio = at(judged) / at(plain);
    // Derived: the peak's s is twice the fall of the area
    expect(ratio).toBeGreaterThan(1.7);
    expect(ratio).toBeLessThan(2.3);
    for (const code of ["lines-broaden-with-power", "area-peak-disagree", "other-law-fits-better"])
      expect(codes(judged)).not.toContain(code);
  });

  test("a swept laser taken for a separate pump does not pass without a doubt", () => {
    for (let seed = 1; seed <= 5; seed++) {
      const judged = judge(input({ ...swept, seed }));
      expect(codes(judged)).toEqual(expect.arrayContaining(["area-peak-disagree", "saturation-exponent"]));
    }
  });

  test("a Gaussian beam is read by its own law, and taken for a flat one not without a doubt", () => {
    const right = judge(input(gaussian, { spot_profile: "gaussian" }));
    for (const line of right.power.lines)
      // Derived: truth of the generator
      expect(Math.abs(pull(line.saturation_per_uW, SATURATION(line.n)))).toBeLessThan(4);
    for (let seed = 1; seed <= 5; seed++) {
      const wrong = judge(input({ ...gaussian, seed }));
      const doubts = codes(wrong).filter((code) =>
        ["law-not-distinguished", "other-law-fits-better", "saturation-exponent"].includes(code),
      );
      expect(doubts.length).toBeGreaterThan(0);
    }
  });

  test("rising absorption gives a note and no volume, also where it bleaches later", () => {
    const rising = judge(input({ areaFactor: (s) => 1 + (0.3 * s) / (1 + s) }));
    expect(codes(rising)).toEqual(expect.arrayContaining(["absorption-rises", "purification"]));
    const later = judge(input({ areaFactor: (s, _n, p) => (1 + (0.15 * p) / (p + 5)) / (1 + s) }));
    for (const { power, notes } of [rising, later]) {
      expect(notes.some((note) => note.code === "absorption-rises")).toBe(true);
      for (const line of power.lines)
        if (line.reading === "rises") expect(line.blockade_volume_um3.value).toBeNull();
    }
    // Derived: S below zero in truth, so no line may be said to bleach
    expect(rising.power.lines.some((line) => line.reading === "bleaches")).toBe(false);
  });

  test("no bleaching gives upper limits, which hold", () => {
    const { power } = judge(input({ saturation: () => 0 }));
    expect(power.exponent).toBeNull();
    for (const line of power.lines.filter((one) => one.reading === "not-seen")) {
      expect(line.saturation_limit_per_uW!).toBeGreaterThan(0);
      expect(line.blockade_volume_limit_um3!).toBeGreaterThan(0);
      expect(line.blockade_volume_um3.value).toBeNull();
    }
    expect(power.lines.filter((one) => one.reading === "not-seen").length).toBeGreaterThan(6);
  });

  test("broadband light and a pump on no line give no volume", () => {
    for (const changes of [{ excitation: "broadband" as const }, { pump_energy_eV: GAP + 0.01 }]) {
      const { power, notes } = judge(input({}, changes));
      for (const line of power.lines) expect(line.blockade_volume_um3.value).toBeNull();
      expect(notes.some((note) => ["broadband-no-volume", "pump-on-no-line"].includes(note.code))).toBe(true);
    }
  });

  test("a fixed pump gives the volumes between states", () => {
    const pumped = judge(input({}, { pump_energy_eV: energyOf(12) })).power;
    const own = judge(input()).power;
    expect(pumped.inter_state!.pump_n).toBe(12);
    const between = (n: number): number =>
      pumped.inter_state!.volumes.find((one) => one.n === n)!.volume_um3.value!;
    // Derived: V(n, n') over V(m, n') is S_n/S_m, the excitons being the same
    const s = (n: number): number => pumped.lines.find((line) => line.n === n)!.saturation_per_uW.value!;
    expect(Math.abs(between(11) / between(13) / (s(11) / s(13)) - 1)).toBeLessThan(0.03);
    // Derived: on the pumped line it is the line's own volume
    expect(
      Math.abs(between(12) / own.lines.find((line) => line.n === 12)!.blockade_volume_um3.value! - 1),
    ).toBeLessThan(0.05);
    expect(pumped.exponent!.ideal).toBeNull();
  });

  test("heating and a shift of all lines are seen", () => {
    const judged = judge(
      input({ widthFactor: (_s, _n, p) => 1 + 1e-4 * p, shift_eV: (p) => -1e-9 * p * 50 }),
    );
    expect(codes(judged)).toEqual(expect.arrayContaining(["heating", "lines-shift-with-power"]));
    // Derived: truth of the generator
    expect(Math.abs(pull(judged.power.other.gap_shift_eV.per_uW, -5e-8))).toBeLessThan(4);
    expect(Math.abs(pull(judged.power.other.heating.per_uW, 1e-4))).toBeLessThan(4);
    // The lifetime stays that of zero power, though the widths grow by 10 %.
    for (const line of judged.power.lines)
      expect(Math.abs(line.width0_eV.value! / widthOf(line.n) - 1)).toBeLessThan(0.05);
  });

  test("lines lost at high power stand in the evidence", () => {
    const judged = judge(input({ highestN: (p) => (p > 50 ? 11 : 13) }));
    // Derived: 13 - 11
    expect(judged.power.other.highest_n).toEqual({ at_lowest: 13, at_highest: 11, lost: 2 });
    expect(codes(judged)).toContain("high-lines-lost");
  });
});

describe("choices", () => {
  test("a given lifetime replaces the width's, and the note of the upper limit goes", () => {
    const given = judge(
      input(
        {},
        {
          lifetime_ps: [
            [10, 20],
            [11, 26],
          ],
        },
      ),
    );
    const line = given.power.lines.find((one) => one.n === 10)!;
    expect(line.lifetime_ps.value).toBe(20);
    expect(line.lifetime_from).toBe("given");
    const plain = judge(input()).power.lines.find((one) => one.n === 10)!;
    // Derived: V goes as 1/tau
    expect(
      Math.abs(
        (line.blockade_volume_um3.value! / plain.blockade_volume_um3.value!) *
          (20 / plain.lifetime_ps.value!) -
          1,
      ),
    ).toBeLessThan(0.05);
    expect(codes(judge(input({}, { lifetime_ps: 30 })))).not.toContain("volume-upper-limit");
  });

  test("less light on the sample, a given coefficient and kappa go where they should", () => {
    const base = judge(input()).power.lines[5]!;
    const half = judge(input({}, { transmission_to_sample: 0.5 })).power.lines[5]!;
    // Derived: V = S/(K t)
    expect(half.blockade_volume_um3.value! / base.blockade_volume_um3.value!).toBeCloseTo(2, 6);
    const given = judge(input({}, { c6_ueV_um6: 1e-10, interaction: "van-der-waals", kappa: 1 })).power
      .lines[5]!;
    const waals = given.expected.find((one) => one.interaction === "van-der-waals")!;
    const radius = blockadeRadius("van-der-waals", 1e-10, 11, widthOf(11), 1);
    // Derived: the formula at the true width
    expect(Math.abs(waals.radius_um.value! / radius - 1)).toBeLessThan(0.02);
    expect(given.expected_volume_um3).toEqual(waals.hard_um3);
    expect(given.shrinkage.exponent).toBe(-1 / 4);
  });

  test("without a spot or a thickness there is S but no volume, and it is said", () => {
    const judged = judge(input({}, { spot_diameter_um: null }));
    expect(codes(judged)).toContain("volume-not-determined");
    expect(judged.power.exponent).not.toBeNull();
    for (const line of judged.power.lines) expect(line.blockade_volume_um3.value).toBeNull();
  });

  test("repeats are used: a drift between them widens all errors", () => {
    const powers = [...POWERS, ...POWERS];
    const quiet = judge(input({ power_uW: powers })).power;
    const drifting = judge(input({ power_uW: powers, drift: 0.05 }));
    expect(quiet.repeat_factor).toBe(1);
    expect(drifting.power.repeat_factor).toBeGreaterThan(1.5);
    expect(codes(drifting)).toContain("repeats-scatter");
    const sigma = (one: typeof quiet): number =>
      one.lines[5]!.saturation_per_uW.sigma! / one.lines[5]!.saturation_per_uW.value!;
    expect(sigma(drifting.power)).toBeGreaterThan(1.4 * sigma(quiet));
    // Derived: twice the data, errors smaller by sqrt 2
    const once = judge(input()).power;
    expect(sigma(once) / sigma(quiet)).toBeGreaterThan(1.2);
  });

  test("a line that is missing at some powers is judged by the others", () => {
    const given = input();
    const values = Float64Array.from(given.table.values);
    const covariance = Float64Array.from(given.table.covariance);
    const block = POWERS.length * N.length;
    for (let q = 0; q < 4; q++)
      for (const j of [5, 6]) {
        const at = q * block + j * N.length + 7;
        values[at] = Number.NaN;
        for (let i = 0; i < values.length; i++) {
          covariance[at * values.length + i] = 0;
          covariance[i * values.length + at] = 0;
        }
      }
    const { power } = judge({ ...given, table: { ...given.table, values, covariance } });
    expect(power.lines[7]!.reading).toBe("bleaches");
    expect(Math.abs(pull(power.lines[7]!.saturation_per_uW, SATURATION(13)))).toBeLessThan(4);
    expect(power.curves.lines[7]!.data[6]!.area).toBeNull();
  });

  test("widths shared by all powers leave broadening open and give a lifetime", () => {
    const given = input();
    const values = Float64Array.from(given.table.values);
    const block = POWERS.length * N.length;
    for (let j = 0; j < POWERS.length; j++)
      for (let i = 0; i < N.length; i++) values[block + j * N.length + i] = widthOf(N[i]!);
    const { power } = judge({ ...given, table: { ...given.table, values } });
    expect(power.lines[4]!.lifetime_ps.value).not.toBeNull();
    expect(power.other.broadening.every((one) => one.per_uW.value === null)).toBe(true);
  });

  test("too few powers, a negative power and no lines are refused in words", () => {
    const one = judgePower(input({ power_uW: [5, 5] }));
    expect(!one.ok && wordJudgeIssue(one.issues[0]!).message).toContain("1 different power");
    const negative = judgePower(input({ power_uW: [-1, 5, 7] }));
    expect(!negative.ok && wordJudgeIssue(negative.issues[0]!).message).toContain("-1 uW");
    const none = judgePower(input({ n: [] }));
    expect(!none.ok && none.issues[0]!.code).toBe("power/no-common-line");
  });

  test("a protocol written before power was known resolves, and a spot of zero is refused by name", () => {
    expect(resolveProtocol({}).ok).toBe(true);
    const zero = resolveProtocol({ power: { spot_diameter_um: 0 } });
    expect(!zero.ok && zero.issues[0]!.facts).toMatchObject({ key: "power.spot_diameter_um" });
  });
});

test("a floor of the widths bends the predicted exponents, and what it may do to the volumes is said", () => {
  const judged = judge(input({ floor_eV: 3e-6, areaError: () => 0.003 }));
  const { exponent, volume_exponent: volume, lines } = judged.power;
  // Derived: slopes between n = 6 and 13 with widths 16 meV/n^3 + 3 ueV lie between those at the ends,
  // 1 + 9 f and 4 + 3 f with f the part of the width that falls with n (0.961 and 0.708)
  expect(exponent!.predicted.value!).toBeGreaterThan(1 + 9 * 0.708);
  expect(exponent!.predicted.value!).toBeLessThan(1 + 9 * 0.961);
  expect(volume!.predicted.value!).toBeGreaterThan(4 + 3 * 0.708);
  expect(volume!.predicted.value!).toBeLessThan(4 + 3 * 0.961);
  const last = lines.at(-1)!;
  // Derived: the whole width, floor included, makes the lifetime
  expect(Math.abs(pull(last.lifetime_ps, 6.582119569509e-4 / widthOf(13, 3e-6)))).toBeLessThan(4);
  const note = judged.notes.find((one) => one.code === "volume-upper-limit")!;
  expect(note.text).toContain("If the floor of the width law shortens no life");
});
