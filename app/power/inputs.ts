import { reflectance } from "../units/index.ts";
import type { PowerResult, Protocol } from "../protocol/index.ts";
import { spotArea } from "./beam.ts";
import { DEFAULT_C3, type Interaction } from "./blockade.ts";

type InputRow = PowerResult["inputs"][number];

/** A number that came from outside the spectra, with its relative standard error and origin. */
export interface GivenNumber {
  readonly value: number;
  readonly relativeSigma: number;
  readonly from: InputRow["from"];
}

export interface GivenInputs {
  readonly transmission: GivenNumber;
  readonly powerSigma: number;
  readonly spot: GivenNumber | null;
  readonly spotArea_um2: number | null;
  readonly thickness: GivenNumber | null;
  readonly reflectance: GivenNumber | null;
  readonly reflections: "single" | "all";
  /** Given lifetimes, ps, by n; null: from the widths. */
  readonly lifetime: ((n: number) => number | null) | null;
  readonly lifetimeSigma: number;
  readonly coefficient: Readonly<Record<Interaction, GivenNumber | null>>;
  readonly kappa: number;
  readonly rows: readonly InputRow[];
}

/** Relative standard errors where none is given: what a careful laboratory would own up to. */
export const DEFAULT_SIGMAS = {
  power: 0.05,
  transmission: 0.05,
  spot: 0.1,
  thickness: 0.05,
  reflectance: 0.05,
  lifetime: 0.1,
} as const;

/** Every number that enters the volumes besides the spectra, with its origin; defaults are marked as defaults. */
export function gatherInputs(protocol: Protocol, probeRatio: number): GivenInputs {
  const { power, signal, material } = protocol;
  const rows: InputRow[] = [];
  const sigmaOf = (given: number | null, fallback: number): { value: number; from: "given" | "default" } =>
    given === null ? { value: fallback, from: "default" } : { value: given, from: "given" };
  const add = (
    name: string,
    key: string,
    unit: string,
    value: number | null,
    from: InputRow["from"],
    sigma: { value: number; from: "given" | "default" } | null,
  ): GivenNumber | null => {
    const known = value !== null && sigma !== null;
    rows.push({
      name,
      key,
      value,
      unit,
      relative_sigma: known ? sigma.value : null,
      from: value === null ? "not determined" : from,
      sigma_from: known ? sigma.from : "none",
    });
    return known ? { value, relativeSigma: sigma.value, from } : null;
  };
  const powerSigma = sigmaOf(power.value_sigma, DEFAULT_SIGMAS.power);
  add("power", "power.value_sigma", "relative to stated", 1, "given", powerSigma);
  const transmission = add(
    "transmission to sample",
    "power.transmission_to_sample",
    "",
    power.transmission_to_sample ?? 1,
    power.transmission_to_sample === null ? "default" : "given",
    sigmaOf(power.transmission_sigma, DEFAULT_SIGMAS.transmission),
  )!;
  const spot = add(
    "spot diameter",
    "power.spot_diameter_um",
    "um",
    power.spot_diameter_um,
    "given",
    sigmaOf(power.spot_sigma, DEFAULT_SIGMAS.spot),
  );
  const thickness = add(
    "thickness",
    "signal.thickness_um",
    "um",
    signal.thickness_um,
    "given",
    sigmaOf(power.thickness_sigma, DEFAULT_SIGMAS.thickness),
  );
  const index = signal.surface.index ?? material.index;
  const givenR = signal.surface.reflectance;
  const surface = add(
    "reflectance",
    givenR === null && index !== null ? "material.index" : "signal.surface.reflectance",
    "",
    givenR ?? (index === null ? null : reflectance(index, signal.surface.surround_index)),
    givenR !== null || signal.surface.index !== null ? "given" : "preset",
    sigmaOf(power.reflectance_sigma, DEFAULT_SIGMAS.reflectance),
  );
  const times = power.lifetime_ps;
  const lifetimeSigma = sigmaOf(power.lifetime_sigma, DEFAULT_SIGMAS.lifetime);
  if (times !== null) {
    const one = typeof times === "number" ? times : times[0]![1];
    add("lifetime", "power.lifetime_ps", "ps", one, "given", lifetimeSigma);
  }
  const factor = (given: number | null, isDefault: boolean): { value: number; from: "given" | "default" } =>
    given === null
      ? { value: Math.log(isDefault ? 3 : 1.5), from: "default" }
      : { value: Math.log(given), from: "given" };
  const c3 = add(
    "C3 at n = 1",
    "power.c3_ueV_um3",
    "ueV um^3",
    power.c3_ueV_um3 ?? DEFAULT_C3,
    power.c3_ueV_um3 === null ? "default" : "given",
    factor(power.coefficient_factor, power.c3_ueV_um3 === null),
  );
  const c6 = add(
    "C6 at n = 1",
    "power.c6_ueV_um6",
    "ueV um^6",
    power.c6_ueV_um6,
    "given",
    factor(power.coefficient_factor, false),
  );
  rows.push({
    name: "interaction over width at the blockade radius",
    key: "power.kappa",
    value: power.kappa,
    unit: "",
    relative_sigma: null,
    from: power.kappa === 0.5 ? "default" : "given",
    sigma_from: "none",
  });
  return {
    transmission,
    powerSigma: powerSigma.value,
    spot,
    spotArea_um2:
      spot === null
        ? null
        : spotArea(power.spot_profile ?? "flat", power.spot_definition, spot.value, probeRatio),
    thickness,
    reflectance: surface,
    reflections: signal.surface.model === "single" ? "single" : "all",
    lifetime:
      times === null
        ? null
        : (n) => (typeof times === "number" ? times : (times.find(([m]) => m === n)?.[1] ?? null)),
    lifetimeSigma: lifetimeSigma.value,
    coefficient: { "dipole-dipole": c3, "van-der-waals": c6 },
    kappa: power.kappa,
    rows,
  };
}
