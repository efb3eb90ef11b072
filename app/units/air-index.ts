/**
 * What      Refractive index of moist air,
 *             n - 1 = (rho_a/rho_axs) (n_axs - 1) + (rho_v/rho_vs) (n_ws - 1),
 *           dry part a at the density of standard dry air (15 C, 101325 Pa), water part v at that of pure vapour
 *           (20 C, 1333 Pa); densities from the BIPM 1981/91 equation with its compressibility Z.
 * Units     vacuum wavelength um; temperature C; pressure Pa; humidity 0..1 (relative, over liquid water);
 *           co2 in parts per million.
 * Domain    fitted for 0.3-1.69 um, -40..100 C, 8e4-1.2e5 Pa; used beyond without a jump. Zero pressure gives n = 1.
 * Accuracy  the author claims 2e-8 to 5e-8; reproduces the printed tables to half their last digit
 *           (tests/reference/air-index.test.ts).
 * Source    Ciddor, Appl. Opt. 35, 1566 (1996), equations 1-5 and appendices A-B.
 */
export interface AirState {
  readonly temperature_C: number;
  readonly pressure_Pa: number;
  readonly humidity: number;
  readonly co2_ppm: number;
}

/** Standard air: 15 C, 101325 Pa, dry, 450 ppm of carbon dioxide. */
export const STANDARD_AIR: AirState = { temperature_C: 15, pressure_Pa: 101325, humidity: 0, co2_ppm: 450 };

/** What the state of the air means for its index: factors of the dry and the water dispersion. */
export interface AirRefraction {
  readonly dry: number;
  readonly water: number;
}

const GAS = 8.31451; // J/(mol K), the value that the equations of 1996 were built with
const MOLAR_WATER = 0.018015; // kg/mol

function molarDry(co2_ppm: number): number {
  return 1e-3 * (28.9635 + 12.011e-6 * (co2_ppm - 400));
}

function compressibility(t: number, p: number, xw: number): number {
  const T = t + 273.15;
  const a = 1.58123e-6 - 2.9331e-8 * t + 1.1043e-10 * t * t;
  const b = (5.707e-6 - 2.051e-8 * t) * xw;
  const c = (1.9898e-4 - 2.376e-6 * t) * xw * xw;
  const ratio = p / T;
  return 1 - ratio * (a + b + c) + ratio * ratio * (1.83e-11 - 0.765e-8 * xw * xw);
}

/** Saturation pressure of water vapour over liquid water, Pa (Davis 1992, as in Ciddor 1996). */
export function waterSaturation_Pa(temperature_C: number): number {
  const T = temperature_C + 273.15;
  return Math.exp(1.2378847e-5 * T * T - 1.9121316e-2 * T + 33.93711047 - 6.3431645e3 / T);
}

/** The state of the air with the water given as partial pressure (Pa) in place of relative humidity. */
export function refractionOfMoistAir(
  temperature_C: number,
  pressure_Pa: number,
  water_Pa: number,
  co2_ppm: number,
): AirRefraction {
  if (pressure_Pa <= 0) return { dry: 0, water: 0 };
  const t = temperature_C;
  const enhancement = 1.00062 + 3.14e-8 * pressure_Pa + 5.6e-7 * t * t;
  const xw = (enhancement * water_Pa) / pressure_Pa;
  const Ma = molarDry(co2_ppm);
  const moles = pressure_Pa / (compressibility(t, pressure_Pa, xw) * GAS * (t + 273.15));
  const standard = (101325 * Ma) / (compressibility(15, 101325, 0) * GAS * 288.15);
  const vapour = (1333 * MOLAR_WATER) / (compressibility(20, 1333, 1) * GAS * 293.15);
  return {
    dry: ((moles * Ma * (1 - xw)) / standard) * (1 + 0.534e-6 * (co2_ppm - 450)),
    water: (moles * MOLAR_WATER * xw) / vapour,
  };
}

export function refractionOfAir(state: AirState): AirRefraction {
  const water = state.humidity * waterSaturation_Pa(state.temperature_C);
  return refractionOfMoistAir(state.temperature_C, state.pressure_Pa, water, state.co2_ppm);
}

/** n - 1 at a vacuum wavelength (um). */
export function airRefractivity(vacuum_um: number, air: AirRefraction): number {
  const s2 = 1 / (vacuum_um * vacuum_um);
  const dry = 5792105 / (238.0185 - s2) + 167917 / (57.362 - s2);
  const water = 1.022 * (295.235 + s2 * (2.6422 + s2 * (-0.03238 + s2 * 0.004028)));
  return 1e-8 * (air.dry * dry + air.water * water);
}

/** dn/d(vacuum wavelength), 1/um. */
export function airRefractivityDerivative(vacuum_um: number, air: AirRefraction): number {
  const s2 = 1 / (vacuum_um * vacuum_um);
  const dry = 5792105 / (238.0185 - s2) ** 2 + 167917 / (57.362 - s2) ** 2;
  const water = 1.022 * (2.6422 + s2 * (-0.06476 + s2 * 0.012084));
  return ((1e-8 * (air.dry * dry + air.water * water) * -2) / vacuum_um) * s2;
}

/**
 * Vacuum wavelength of an air wavelength (um): the fixed point of lambda_vac = n(lambda_vac) lambda_air. Each step
 * shrinks the error by |lambda dn/dlambda| < 1e-4, so a few steps reach the last bit.
 */
export function vacuumFromAir_um(air_um: number, air: AirRefraction): number {
  let vacuum = air_um;
  for (let step = 0; step < 12; step++) {
    const next = air_um * (1 + airRefractivity(vacuum, air));
    if (next === vacuum || !Number.isFinite(next)) return next;
    vacuum = next;
  }
  return vacuum;
}
