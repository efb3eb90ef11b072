import type { ProtocolInput } from "./protocol-schema.ts";
import { mergeChoices } from "./resolve-protocol.ts";

/** `key=value` settings: dotted key, value JSON where it parses, else text. */
export function choicesFromSetting(setting: string): ProtocolInput | null {
  const at = setting.indexOf("=");
  if (at < 1) return null;
  const path = setting.slice(0, at).trim().split(".");
  const text = setting.slice(at + 1).trim();
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch {
    value = text;
  }
  // defineProperty, so that a key named __proto__ stays a key and is refused like any other unknown one.
  for (const key of path.reverse()) {
    const whole = {};
    Object.defineProperty(whole, key, { value, enumerable: true, configurable: true, writable: true });
    value = whole;
  }
  return value as ProtocolInput;
}

/**
 * What the user wrote, later over earlier: protocol file, then the material (which replaces the file's whole
 * `material` part), then single settings.
 */
export function composeChoices(
  protocol: unknown,
  material: string | null,
  settings: readonly ProtocolInput[],
): unknown {
  let choices: unknown = protocol ?? {};
  if (material !== null && typeof choices === "object" && choices !== null) {
    choices = { ...choices, material: { preset: material } };
  }
  for (const setting of settings) choices = mergeChoices(choices, setting);
  return choices;
}
