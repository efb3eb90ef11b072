import type { FactKey } from "./types.ts";

/** Labels in small letters, without accents, brackets and punctuation, so that one pattern serves many spellings. */
export function plainLabel(label: string): string {
  return label
    .replace(/ß/g, "ss")
    .normalize("NFD")
    .replace(/[\u0300-\u036f]/g, "")
    .toLowerCase()
    .replace(/[[({<].*?[\])}>]/g, " ")
    .replace(/[_\-.’'"°]+/g, " ")
    .replace(/\s+/g, " ")
    .trim();
}

/** First match wins; English, German, French and Spanish. */
const PATTERNS: readonly (readonly [FactKey, RegExp, RegExp?])[] = [
  [
    "pump_energy",
    /^(pump|excitation|exciting|pump photon|pump laser|excitation laser) ?(photon )?(energy|wavelength)$|^(anregungs?|pump)( )?(photonen)?(energie|wellenlange)$|^(energie|longueur d onde) d(e|) ?(la )?(pompe|excitation)$|^(energia|longitud de onda) de(l)? (bombeo|excitacion)$/,
  ],
  [
    "centre_wavelength",
    /^(cent(er|re|ral)( |))wavelength$|^zentralwellenlange$|^zentrale wellenlange$|^longueur d onde centrale$|^longitud de onda central$/,
  ],
  [
    "scan_direction",
    /\b(scan|sweep|scanning) direction\b|^(scan|durchlauf|mess)richtung$|^sens (de |du )?(balayage|scan)$|^(direccion|sentido) de (barrido|escaneo)$/,
  ],
  [
    "scan_speed",
    /\b(scan|sweep|scanning|tuning) (speed|rate|velocity)\b|^scan ?(geschwindigkeit|rate)$|^durchstimmgeschwindigkeit$|^vitesse de (balayage|scan)$|^velocidad de (barrido|escaneo)$/,
  ],
  [
    "temperature",
    /\btemp(erature?)?\b|temperatur(a|e)?\b/,
    /\b(detector|ccd|camera|chip|sensor|laser|lamp|room|air|ambient|detektor|kamera|raum|labor|umgebung|umgebungs|raumtemperatur|umgebungstemperatur|detecteur|camara|color|colour)\b/,
  ],
  [
    "power",
    /\bpower\b|leistung$|\bleistung\b|\bpuissance\b|\bpotencia\b/,
    /\b(probe|lamp|supply|slope|meter|range|series|density|calibration|resolving|reference|lampen|netz)\b|leistungsdichte/,
  ],
  ["thickness", /\bthickness\b|(^| |proben|kristall|schicht)dicke\b|\bepaisseur\b|\bespesor\b|\bgrosor\b/],
  [
    "spot",
    /\bspot\b|\bbeam (diameter|waist|size|width|radius)\b|^(strahl|fleck|fokus|spot)( )?(durchmesser|grosse|radius)$|^diametre d(u|e la|e) (spot|faisceau|tache)$|^diametro del? (haz|punto|spot)$|\bfocus (diameter|size)\b/,
  ],
  [
    "batch",
    /^(batch|lot|charge|los|charge(n)?( )?nummer|lote)( (name|id|no|nr|number|nummer|numero|code))?$/,
  ],
  [
    "sample",
    /^(sample|specimen|crystal|probe|kristall|echantillon|cristal|muestra)( ?(name|id|no|nr|number|nummer|numero|code|label|description))?$|^(proben|kristall)( )?(name|nummer|bezeichnung|id)$|^nom (de l )?(d )?echantillon$|^nombre de (la )?muestra$|^(id|name|no) of (the )?(sample|crystal)$/,
  ],
  [
    "date",
    /^(date|datum|fecha|date time|date and time|time and date|datetime|timestamp|time stamp|measured on|measurement date|acquisition date|date of (measurement|acquisition)|messdatum|aufnahmedatum|datum uhrzeit|date de (la )?mesure|fecha de (la )?medida|fecha y hora|date heure|recorded|created on|collected)$/,
  ],
  [
    "exposure",
    /\bexposure\b|\b(integration|acquisition|dwell|accumulation) time\b|^(belichtungs|integrations|aufnahme|mess)( )?(zeit|dauer)$|^temps d (exposition|integration|acquisition)$|^tiempo de (exposicion|integracion|adquisicion)$/,
  ],
  [
    "accumulations",
    /\baccumulations?\b|^(number of |no of |n )?(averages|scans|sweeps|repeats|repetitions|frames|spectra averaged)$|^(scans|averages|averaging|co ?adds?|coadditions)( averaged)?$|^(akkumulationen|mittelungen|anzahl (der )?(akkumulationen|mittelungen|scans|messungen))$|^(nombre d )(accumulations|acquisitions)$|^(numero de )?acumulaciones$/,
  ],
  ["grating", /\bgrating\b|^(beugungs)?gitter\b|^reseau\b|^red de difraccion$|^rejilla\b/],
  ["slit", /\bslit\b|\bspalt|spalt$|spaltbreite$|\bfente\b|\brendija\b/],
  [
    "medium",
    /^(medium|axis medium|wavelength medium|wavelengths? (are )?in|refractive medium|umgebung|milieu|medio|wavelength type|wellenlangen? in)$/,
  ],
  ["gain", /\bgain\b|^verstarkung$|^ganancia$/],
  ["detector", /^(detector|camera|ccd|detektor|kamera|detecteur|capteur|camara)( (name|type|typ|model))?$/],
  [
    "polarisation",
    /\bpolari[sz]ation\b|\bpolari[sz]er\b|\bpolarisator\b|\bpolarizacion\b|\bpolarisationsrichtung\b|\bpolarisationswinkel\b/,
  ],
  [
    "field",
    /^(magnetic|electric|applied|external)( (magnetic|electric))? field\b|^field( strength)?$|^(magnet|elektrisches |magnetisches |e |b )feld(starke)?$|^feldstarke$|^champ (magnetique|electrique)$|^campo (magnetico|electrico)$|^(b|e) field$/,
  ],
  [
    "direction",
    /^(propagation |light |crystal )?(direction|orientation)$|^k vector$|^(ausbreitungs|kristall|licht)?(richtung|orientierung)$|^direction de propagation$|^(direccion|orientacion)( de propagacion)?$|^propagation$/,
  ],
];

/** Single letters are labels only together with a unit that fits: `T = 4.2 K`, `P: 5 µW`, `d = 34 µm`, `B = 2 T`. */
const LETTERS: readonly (readonly [FactKey, RegExp, RegExp])[] = [
  ["temperature", /^T$/, /^(m?K|°?C|°F)$/],
  ["power", /^P$/, /^[mµμunp]?W$/],
  ["thickness", /^[dLt]$/, /^([nµμum]m|Å)$/],
  ["field", /^B$/, /^m?T$/],
  ["field", /^[EF]$/, /^k?V\/c?m$/],
];

export function factKeyOf(label: string, unit: string | null): FactKey {
  const words = plainLabel(label);
  for (const [key, pattern, except] of PATTERNS)
    if (pattern.test(words) && !(except !== undefined && except.test(words))) return key;
  const bare = label.replace(/[[({<].*$/, "").trim();
  for (const [key, letter, unitPattern] of LETTERS)
    if (letter.test(bare) && unit !== null && unitPattern.test(unit)) return key;
  return "other";
}

/** Facts that are words even where they begin with a digit. */
export const WORDY: ReadonlySet<FactKey> = new Set<FactKey>([
  "sample",
  "batch",
  "date",
  "medium",
  "detector",
  "direction",
  "scan_direction",
]);
