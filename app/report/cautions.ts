import type { RunglineResult } from "../protocol/index.ts";

/** Said wherever the power of a light source is discussed. */
export const LASER_CAUTION =
  "Lasers can injure eyes and skin and start fires: follow the laser safety rules of your laboratory and work only under its licensed or appointed laser safety officer.";

/** Said wherever work at low temperature is discussed. */
export const CRYOGEN_CAUTION =
  "Liquid helium and nitrogen freeze tissue, displace the air to breathe and can burst closed vessels: follow the cryogen rules of your laboratory and leave their handling to trained and authorised persons.";

const POWER_FACTS = ["power", "pump_energy"];
const POWER_WORDS = /\b(power|laser|pump(ed|ing)?)\b/i;
const COLD_WORDS = /\b(cryo\w*|helium|nitrogen|cool(ed|ing)?)\b/i;

/** The sentences of caution that a result calls for: by its header facts and by what its notes talk about. */
export function cautionsFor(
  result: Pick<RunglineResult, "notes"> & { readonly reading: Pick<RunglineResult["reading"], "facts"> },
): readonly string[] {
  const { facts } = result.reading;
  const words = result.notes.map((note) => `${note.text} ${note.remedy}`).join(" ");
  const power = facts.some(({ key }) => POWER_FACTS.includes(key)) || POWER_WORDS.test(words);
  const cold =
    facts.some(({ key, text }) => key === "temperature" && !isWarm(text)) || COLD_WORDS.test(words);
  return [...(power ? [LASER_CAUTION] : []), ...(cold ? [CRYOGEN_CAUTION] : [])];
}

/** Water's freezing point in kelvin: above it nothing cold is handled. What cannot be read counts as cold. */
const WARM_K = 273.15;

function isWarm(text: string): boolean {
  const found = /(-?\d+(?:[.,]\d+)?)\s*(m?K|°?C)\b/.exec(text);
  if (found === null) return false;
  const value = Number(found[1]!.replace(",", "."));
  return found[2]!.endsWith("C") ? value >= 0 : found[2] === "K" && value >= WARM_K;
}
