import type { AxisUnit, SignalQuantity } from "./spectrum.ts";

/** What a header says by itself, before any number is looked at. */
export interface HeaderMeaning {
  readonly kind: HeaderKind;
  /** The word that decided, as written in plain letters; "" where only a unit decided. */
  readonly word: string;
  /** Unit of a light axis and the factor to it from the unit as written (GHz is 1e-3 THz). */
  readonly axis: { readonly unit: AxisUnit; readonly factor: number } | null;
  /** Kind of axis where the word alone tells: a wavelength without unit may still be nm or um. */
  readonly light: LightKind | null;
  readonly quantity: SignalQuantity | "counts" | null;
  /** Unit of the signal: percent, or of an absorption coefficient. */
  readonly signalUnit: "fraction" | "percent" | "1/cm" | "1/mm" | "1/um" | "1/m" | null;
}

export type LightKind = "energy" | "wavelength" | "wavenumber" | "frequency";
export type HeaderKind =
  | "axis"
  | "pixel"
  | "signal"
  | "sigma"
  | "reference"
  | "dark"
  | "reflectance"
  | "emission"
  | "other"
  | "nothing";

/** Small letters without accents, superscripts, brackets and joining marks: one pattern then serves many spellings. */
export function plainWords(text: string): string {
  return text
    .replace(/ß/g, "ss")
    .replace(/[\u00b5\u03bc]/g, "u")
    .replace(/[ΔδƊ∆]/g, "delta ")
    .normalize("NFKD")
    .replace(/[\u0300-\u036f]/g, "")
    .replace(/[−–]/g, "-")
    .toLowerCase()
    .replace(/α/g, "alpha")
    .replace(/λ/g, "lambda")
    .replace(/σ/g, "sigma")
    .replace(/ν/g, "nu")
    .replace(/τ/g, "tau")
    .replace(/[_'’"()[\]{}<>;:,]+/g, " ")
    .replace(/\s+/g, " ")
    .trim();
}

/** A unit in one spelling: small letters, plain digits, `u` for micro, no spaces, carets or brackets. */
function plainUnit(unit: string): string {
  if (/^[\u00c5\u00e5\u212b]\.?$/.test(unit.trim())) return "angstrom";
  return unit
    .replace(/[\u00b5\u03bc]/g, "u")
    .normalize("NFKD")
    .replace(/[\u0300-\u036f]/g, "")
    .replace(/\*\*|[\s^{}()[\]$]|\\mathrm|\\/g, "")
    .replace(/[−–]/g, "-")
    .toLowerCase();
}

const AXIS_UNITS: Readonly<Record<string, readonly [AxisUnit, number]>> = {
  ev: ["eV", 1],
  mev: ["meV", 1],
  uev: ["meV", 1e-3],
  kev: ["eV", 1e3],
  nm: ["nm", 1],
  nanometer: ["nm", 1],
  nanometers: ["nm", 1],
  pm: ["nm", 1e-3],
  angstrom: ["Angstrom", 1],
  angstroms: ["Angstrom", 1],
  ang: ["Angstrom", 1],
  um: ["um", 1],
  micron: ["um", 1],
  microns: ["um", 1],
  micrometer: ["um", 1],
  "cm-1": ["cm-1", 1],
  "1/cm": ["cm-1", 1],
  "/cm": ["cm-1", 1],
  percm: ["cm-1", 1],
  cm1: ["cm-1", 1],
  invcm: ["cm-1", 1],
  "m-1": ["cm-1", 0.01],
  "1/m": ["cm-1", 0.01],
  thz: ["THz", 1],
  ghz: ["THz", 1e-3],
  mhz: ["THz", 1e-6],
  hz: ["THz", 1e-12],
};

const SIGNAL_UNITS: Readonly<Record<string, NonNullable<HeaderMeaning["signalUnit"]>>> = {
  "%": "percent",
  percent: "percent",
  pct: "percent",
  prozent: "percent",
  "cm-1": "1/cm",
  "1/cm": "1/cm",
  "/cm": "1/cm",
  percm: "1/cm",
  cm1: "1/cm",
  invcm: "1/cm",
  "mm-1": "1/mm",
  "1/mm": "1/mm",
  "/mm": "1/mm",
  permm: "1/mm",
  "um-1": "1/um",
  "1/um": "1/um",
  perum: "1/um",
  "m-1": "1/m",
  "1/m": "1/m",
  perm: "1/m",
};

/** Units of a bare detector reading: with a word for a signal it is counts, whatever else the header says. */
const READING_UNITS = /^([munp]?[vwa]|counts?|cts|cps|counts\/s|cts\/s|adu)$/;
const READING_WORDS =
  /transmi|signal|sample|probe|echantillon|intens|counts|photodiode|detector|detektor|^t$/;

/** Units that say for certain that a column is neither light axis nor signal. */
const OTHER_UNITS =
  /^(k|mk|degc|°c|c|w|mw|uw|nw|pw|s|ms|us|min|h|v|mv|kv|a|ma|mbar|pa|hpa|t|mt|mm|deg|°|rad)$/;

const LIGHT: readonly (readonly [LightKind, RegExp])[] = [
  [
    "wavelength",
    /wave ?length|wellenlange|wellenlaenge|longueur d ?onde|longitud de onda|\blambda\b|^wl$|^wvl$/,
  ],
  ["wavenumber", /wave ?number|wellenzahl|nombre d ?onde|numero de onda|\bkayser\b/],
  ["energy", /\benerg(y|ie|ia|ies)\b|photon ?energ|photonenenergie|\bhnu\b|\bh nu\b|^e$|^hv$|\bphoton e\b/],
  ["frequency", /frequen[cz]|\bfreq\b|^nu$|^f$/],
];

const SIGMA =
  /\b(sd|std|stdev|stddev|std dev|sigma|err|error|errors|uncertainty|uncert|unc|noise|rms|sem|se|fehler|unsicherheit|messunsicherheit|standardabweichung|rauschen|ecart[ -]?type|incertitude|erreur|bruit|standard (deviation|error)|deviation)\b|±|\+\/-|standardabw/;
const REFERENCE =
  /\b(ref|reference|referenz|lamp|lampe|blank|i0|i 0|incident|empty|leer|without sample|ohne probe|sans echantillon|monitor|leerkanal)\b|referenz|lampenspektrum/;
const DARK = /\b(dark|dunkel|obscurite|noir|stray)\b|^dunkel|dunkelsignal|dunkelstrom/;
const REFLECTANCE =
  /reflect|reflekt|reflexion|\breflex\b|\bdelta ?r ?\/ ?r0?\b|^dr\/r0?$|\br\/r0\b|\brc\b(?=.*contrast)|^r$/;
const EMISSION =
  /luminescen|lumineszen|\bpl\b|\bple\b|emission|emissivity|fluorescen|fluoreszen|\braman\b|irradiance/;
const PIXEL = /\b(pixel|pixels|px|channel|kanal|canal|pixelnummer|pixel number)\b|^pixel/;
const OTHER =
  /\b(time|zeit|temps|temperature|temperatur|power|leistung|puissance|thickness|dicke|fit|model|residual|residuals|residuum|index|row|no|nr|point|punkt|phase|mask|flag|quality|baseline)\b/;

const QUANTITIES: readonly (readonly [SignalQuantity | "counts", RegExp])[] = [
  [
    "optical-depth",
    /optical (depth|thickness)|optische (tiefe|dicke)|profondeur optique|epaisseur optique|\balpha ?[*·x]? ?d\b|\balphad\b|^tau$|naperian|napierian|neper|-ln\b/,
  ],
  ["optical-density", /optical density|optische dichte|densite optique|densidad optica|^o\.? ?d\.?\b|\bod\b/],
  [
    "alpha",
    /\balpha\b|absorption coeff|abs\.? ?coeff|absorptionskoeffizient|absorptionskoeff|coefficient d ?absorption|coeficiente de absorcion|attenuation coeff/,
  ],
  [
    "transmittance",
    /transmi(ss|tt|tan)|^trans\b|transmissionsgrad|durchlass|transmitanc|transmision|^%? ?t ?%?$|^t \d|\bt\/t0\b|^i ?\/ ?i_? ?0$|\b(sample|signal|probe|s) ?\/ ?(ref|reference|referenz|monitor|lamp|r|f)\b|\bratio\b|\bverhaltnis\b/,
  ],
  ["absorbance", /absorbanc|absorbanz|extin[ck]tion|absorbancia|^abs$|^abs\b(?!.*coeff)|^a$|-log/],
  [
    "counts",
    /\b(counts?|cts|intensit\w*|signal|sample|probe|echantillon|zahlrate|adu|photodiode|detector|messwert|y)\b/,
  ],
];

/** Header name and unit to meaning. `unit` is what the table split off; `whole` the header as written. */
export function readHeader(name: string, unit: string, whole: string): HeaderMeaning {
  const words = plainWords(name === "" ? whole : name);
  const plain = plainUnit(unit);
  const axisUnit = AXIS_UNITS[plain];
  const axis = axisUnit === undefined ? null : { unit: axisUnit[0], factor: axisUnit[1] };
  const percentName = /%/.test(name);
  const signalUnit = SIGNAL_UNITS[plain] ?? (percentName ? "percent" : null);
  const nothing: HeaderMeaning = {
    kind: "nothing",
    word: words,
    axis: null,
    light: null,
    quantity: null,
    signalUnit,
  };
  if (whole.trim() === "") return { ...nothing, word: "" };

  const quantity = QUANTITIES.find(([, pattern]) => pattern.test(words))?.[0] ?? null;
  // An error of something, a reference of something: these words overrule what they belong to.
  if (SIGMA.test(words) || /^(d|delta ?|u ?|s ?)(t|a|od|alpha)$/.test(words))
    return { ...nothing, kind: "sigma", quantity };
  if (DARK.test(words)) return { ...nothing, kind: "dark" };
  if (PIXEL.test(words) || /^(px|pixels?)$/.test(plain)) return { ...nothing, kind: "pixel" };
  if (EMISSION.test(words)) return { ...nothing, kind: "emission" };
  if (REFLECTANCE.test(words) && (quantity === null || quantity === "counts"))
    return { ...nothing, kind: "reflectance" };
  if (REFERENCE.test(words) && quantity !== "transmittance") return { ...nothing, kind: "reference" };
  if (READING_UNITS.test(plain) && READING_WORDS.test(words) && !OTHER.test(words))
    return { ...nothing, kind: "signal", quantity: "counts" };
  if (OTHER_UNITS.test(plain)) return { ...nothing, kind: "other" };

  const light = LIGHT.find(([, pattern]) => pattern.test(words))?.[0] ?? null;
  const strongSignal = quantity !== null && quantity !== "counts";
  if (light !== null && !strongSignal) return { ...nothing, kind: "axis", axis, light };
  if (quantity === "counts" && axis !== null && signalUnit === null)
    return { ...nothing, kind: "axis", axis, light };
  if (strongSignal) return { ...nothing, kind: "signal", quantity };
  // "Absorption" alone is any of several quantities; its unit tells.
  if (/absor[bp]/.test(words)) {
    const perLength = signalUnit !== null && signalUnit !== "percent" && signalUnit !== "fraction";
    return { ...nothing, kind: "signal", quantity: perLength ? "alpha" : null };
  }
  if (quantity === "counts" && !OTHER.test(words)) return { ...nothing, kind: "signal", quantity };
  if (axis !== null && (name === "" || signalUnit === null)) return { ...nothing, kind: "axis", axis, light };
  if (axis !== null && /^x$/.test(words)) return { ...nothing, kind: "axis", axis, light };
  if (signalUnit !== null)
    return { ...nothing, kind: "signal", quantity: signalUnit === "percent" ? "transmittance" : "alpha" };
  if (OTHER.test(words)) return { ...nothing, kind: "other" };
  return nothing;
}
