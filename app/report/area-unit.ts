/** Areas are in eV times the unit of the signal. */
export function areaUnit(signalUnit: string): string {
  return isNumber(signalUnit) ? "eV" : signalUnit === "1/cm" ? "eV/cm" : `eV ${signalUnit}`;
}

/** The unit of the signal as printed: a pure number has none. */
export function signalUnitWords(signalUnit: string): string {
  return isNumber(signalUnit) ? "" : signalUnit;
}

export function signalName(signalUnit: string): string {
  return isNumber(signalUnit) ? "optical depth (pure number)" : `absorption coefficient in ${signalUnit}`;
}

function isNumber(signalUnit: string): boolean {
  return signalUnit === "1" || signalUnit === "";
}
