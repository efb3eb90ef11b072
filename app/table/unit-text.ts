/** Spellings by which a text is known as a unit; nothing is converted here. */
const STRONG = new Set(
  (
    "ev mev uev kev nev nm um pm angstrom angstroms ångström ångstrom å cm-1 1/cm /cm percm m-1 mm-1 um-1 1/mm 1/um 1/m " +
    "thz ghz %"
  ).split(" "),
);
const KNOWN = new Set(
  (
    "hz mhz khz percent pct prozent a.u. a.u arb.u. arb.units arb. au w.e. k mk °c w mw uw nw pw kw mm cm m s sec ms us ns ps fs " +
    "min h l/mm lines/mm grooves/mm gr/mm g/mm lpmm lmm-1 px pixel pixels count counts cts cps counts/s v mv kv ma ua na mt " +
    "v/cm kv/cm v/m kv/m nm/s mev/s uev/s ghz/s thz/s ev/s mhz/s cm-1/s db od e-/count e-/adu e/adu e/count e-/cts mbar hpa pa bar " +
    "torr w/cm2 w/m2 mw/cm2 deg ° rad cm-3 ppm um2 um3 nm/mm dimensionless"
  ).split(" "),
);
/** Single letters are units only where capital and small are as they should be. */
const CASED = new Set(["K", "T", "C", "F", "W", "V", "A", "m", "s", "h", "G", "1"]);
const SUPERSCRIPTS: Readonly<Record<string, string>> = {
  "⁻": "-",
  "¹": "1",
  "²": "2",
  "³": "3",
  "−": "-",
  "–": "-",
  μ: "u",
  µ: "u",
  Å: "å",
  "\u212b": "å",
};

function plain(unit: string): string {
  return unit
    .trim()
    .replace(/[⁻¹²³−–μµÅ\u212b]/g, (c) => SUPERSCRIPTS[c] ?? c)
    .replace(/\*\*|[\s^{}$]|\\mathrm|\\mu/g, (part) => (part === "\\mu" ? "u" : ""))
    .replace(/[.,;]$/, (end) => (end === "." ? "." : ""));
}

/** A unit that cannot be taken for a name: eV, nm, cm-1, % ... */
export function isStrongUnit(text: string): boolean {
  return STRONG.has(plain(text).toLowerCase());
}

export function isKnownUnit(text: string): boolean {
  const unit = plain(text);
  const small = unit.toLowerCase();
  return CASED.has(unit) || STRONG.has(small) || KNOWN.has(small) || KNOWN.has(small.replace(/\.$/, ""));
}

export function unbracketed(text: string): string {
  const match = /^\s*[[({<]\s*(.*?)\s*[\])}>]\s*$/.exec(text);
  return match === null ? text.trim() : match[1]!;
}
