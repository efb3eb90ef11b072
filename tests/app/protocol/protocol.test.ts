import { describe, expect, it } from "vitest";
import { nearestWord } from "../../../app/base/index.ts";
import {
  choicesFromSetting,
  composeChoices,
  DEFAULT_PROTOCOL,
  findPreset,
  mergeChoices,
  PRESETS,
  protocolJsonSchema,
  protocolSchema,
  resolveProtocol,
  wordProtocolIssue,
  type Protocol,
  type ProtocolIssue,
} from "../../../app/protocol/index.ts";

const resolved = (input: unknown): Protocol => {
  const outcome = resolveProtocol(input);
  if (!outcome.ok) throw new Error(JSON.stringify(outcome.issues));
  return outcome.value;
};
const refused = (input: unknown): readonly ProtocolIssue[] => {
  const outcome = resolveProtocol(input);
  if (outcome.ok) throw new Error("was not refused");
  return outcome.issues;
};

describe("a protocol", () => {
  it("is the defaults where nothing is said", () => {
    expect(resolved({})).toStrictEqual(DEFAULT_PROTOCOL);
    expect(protocolSchema.safeParse(DEFAULT_PROTOCOL).success).toBe(true);
  });

  it("takes the preset over the defaults and the user over the preset, also in lists", () => {
    const protocol = resolved({
      material: { preset: "cuprous-oxide-yellow-p", gap_eV: 2.17 },
      background: [{ term: "polynomial", order: 1 }],
    });
    expect(protocol.material).toMatchObject({ gap_eV: 2.17, rydberg_eV: 0.092, envelope: "P" });
    expect(protocol.width.exponent).toBe(3);
    expect(protocol.background).toStrictEqual([{ term: "polynomial", order: 1 }]);
  });

  it.each(PRESETS.map((preset) => [preset.id]))("resolves with the preset %s, and to itself again", (id) => {
    const protocol = resolved({ material: { preset: id } });
    expect(protocol.material.preset).toBe(id);
    expect(resolved(JSON.parse(JSON.stringify(protocol)))).toStrictEqual(protocol);
    expect(findPreset(id)?.source).not.toBe("");
  });

  it("refuses every unknown key at once, each with the nearest known one", () => {
    const issues = refused({ axis: { medum: "air" }, signal: { surface: { modell: "all" } }, xyzzyplugh: 1 });
    expect(issues.map((issue) => issue.facts)).toMatchObject([
      { key: "axis.medum", nearest: "axis.medium" },
      { key: "signal.surface.modell", nearest: "signal.surface.model" },
      { key: "xyzzyplugh", nearest: null },
    ]);
    expect(wordProtocolIssue(issues[2]!).remedy).toContain("axis, signal, window_eV");
  });

  it("refuses a value out of its range with key, value found and what is expected", () => {
    const [issue] = refused({ axis: { air: { humidity: 40 } } });
    expect(issue).toMatchObject({
      code: "protocol/bad-value",
      facts: { key: "axis.air.humidity", found: "40" },
    });
    expect(refused({ window_eV: [2.2, 2.1] })[0]?.code).toBe("protocol/bad-value");
    expect(refused({ uncertainty: { level: 1 } })[0]?.facts).toMatchObject({ key: "uncertainty.level" });
    expect(refused({ background: [{ term: "cubic" }] })[0]?.code).toBe("protocol/bad-value");
    expect(refused({ background: [{ term: "polynomial", order: 2, extra: 1 }] })[0]?.code).toBe(
      "protocol/bad-value",
    );
  });

  it("says what a key takes, with an example where it takes a list", () => {
    const remedies = (input: unknown) => refused(input).map((issue) => wordProtocolIssue(issue).remedy);
    expect(remedies({ lines: { n: "5-9" } })).toEqual(["expected auto or a list, for example [2, 3, 4]"]);
    expect(remedies({ series: { fit_n: [9, 5] } })).toEqual(["the lowest n first, then a higher one"]);
    expect(remedies({ width: { exponent: "x" } })).toEqual(["expected a number or free"]);
    expect(remedies({ noise: { sigma: 0 } })).toEqual(["expected a number above 0"]);
    expect(remedies({ table: { delimiter: "|" } })).toEqual(['expected ",", ";", "\\t" or " "']);
  });

  it("tells another kind of file from a protocol with a slip", () => {
    const issues = refused({ name: "x", version: "1", scripts: {}, dependencies: {} });
    expect(issues.map((issue) => issue.code)).toEqual(["protocol/not-a-protocol"]);
    expect(wordProtocolIssue(issues[0]!).message).toContain("name, version, scripts, ...");
  });

  it("refuses another schema, an unknown preset and what is no object", () => {
    expect(refused({ schema: "rungline-protocol/9" })[0]?.code).toBe("protocol/schema");
    expect(refused({ material: { preset: "allowed3d" } })[0]?.facts).toMatchObject({ nearest: "allowed-3d" });
    for (const input of [null, 3, "text", [], undefined])
      expect(refused(input)[0]?.code).toBe("protocol/schema");
  });

  it("words every refusal with a remedy that names what would do", () => {
    const issues = [
      ...refused({ axis: { medum: 1 } }),
      ...refused({ zzzzzzzz: 1 }),
      ...refused({ axis: { medium: "water" } }),
      ...refused({ material: { preset: "nothing-like-it" } }),
      ...refused({ schema: "x" }),
    ];
    for (const issue of issues) {
      const { message, remedy } = wordProtocolIssue(issue);
      expect(message).toMatch(/^protocol: /);
      expect(remedy).not.toBe("");
      expect(`${message}${remedy}`).not.toMatch(/undefined|null/);
    }
  });

  it("is described by a JSON Schema with the same keys", () => {
    const schema = protocolJsonSchema() as { properties: Record<string, unknown> };
    expect(Object.keys(schema.properties)).toStrictEqual(Object.keys(DEFAULT_PROTOCOL));
  });
});

describe("settings", () => {
  it("take dotted keys; values are JSON where they parse, else text", () => {
    expect(choicesFromSetting("axis.air.pressure_Pa=9.9e4")).toStrictEqual({
      axis: { air: { pressure_Pa: 9.9e4 } },
    });
    expect(choicesFromSetting("axis.unit=cm-1")).toStrictEqual({ axis: { unit: "cm-1" } });
    expect(choicesFromSetting("lines.n=[2, 3]")).toStrictEqual({ lines: { n: [2, 3] } });
    expect(choicesFromSetting("signal.column=a=b")).toStrictEqual({ signal: { column: "a=b" } });
    expect(choicesFromSetting("window_eV=null")).toStrictEqual({ window_eV: null });
    expect(choicesFromSetting("axis.unit")).toBeNull();
    expect(choicesFromSetting("=1")).toBeNull();
  });

  it("win over the material, which wins over the protocol file; later ones over earlier ones", () => {
    const choices = composeChoices({ material: { preset: "a", gap_eV: 1 }, lines: { max_n: 9 } }, "b", [
      { lines: { max_n: 10 } },
      { lines: { max_n: 11 } },
    ]);
    expect(choices).toStrictEqual({ material: { preset: "b" }, lines: { max_n: 11 } });
    expect(composeChoices(null, null, [])).toStrictEqual({});
  });

  it("cannot reach what every object inherits", () => {
    const polluting = choicesFromSetting("__proto__.polluted=1");
    const outcome = resolveProtocol(composeChoices(null, null, [polluting!]));
    if (outcome.ok) expect(outcome.value).toStrictEqual(DEFAULT_PROTOCOL);
    expect(({} as Record<string, unknown>)["polluted"]).toBeUndefined();
  });
});

describe("merging", () => {
  it("merges objects, replaces lists and bare values, and leaves both sides as they were", () => {
    const earlier = { a: { x: 1, y: [1, 2] }, b: 1 };
    const later = { a: { y: [3] }, c: null };
    expect(mergeChoices(earlier, later)).toStrictEqual({ a: { x: 1, y: [3] }, b: 1, c: null });
    expect(earlier).toStrictEqual({ a: { x: 1, y: [1, 2] }, b: 1 });
    expect(mergeChoices(earlier, undefined)).toBe(earlier);
  });
});

describe("the nearest word", () => {
  it("is the one with the fewest changes of a letter, and none where nothing is near", () => {
    expect(nearestWord("thicknes_um", ["thickness_um", "quantity", "unit"])).toBe("thickness_um");
    expect(nearestWord("QUANTITY", ["quantity"])).toBe("quantity");
    expect(nearestWord("abcdefgh", ["zzzzzzzz"])).toBeNull();
  });
});
