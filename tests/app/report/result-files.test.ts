import { describe, expect, it } from "vitest";
import { resolveProtocol, resultSchema } from "../../../app/protocol/index.ts";
import {
  cautionsFor,
  CRYOGEN_CAUTION,
  csvLine,
  LASER_CAUTION,
  protocolToJson,
  resultsToJson,
  resultToCsv,
  resultToJson,
  resultToText,
  summaryRow,
  summaryToCsv,
} from "../../../app/report/index.ts";
import { makeResult } from "../../main/make-result.ts";

/** A reader of RFC 4180 that shares nothing with the writer. */
function readCsv(text: string): string[][] {
  const rows: string[][] = [[]];
  let field = "";
  let quoted = false;
  for (let i = 0; i < text.length; i++) {
    const c = text[i]!;
    if (quoted) {
      if (c !== '"') field += c;
      else if (text[i + 1] === '"') field += text[i++]!;
      else quoted = false;
    } else if (c === '"') quoted = true;
    else if (c === "," || c === "\n") {
      rows[rows.length - 1]!.push(field.replace(/\r$/, ""));
      field = "";
      if (c === "\n") rows.push([]);
    } else field += c;
  }
  rows.pop();
  return rows;
}

describe("a result as JSON", () => {
  it("reads back to the same bits, with the keys in the order of the schema", () => {
    const result = makeResult();
    const shuffled = JSON.parse(
      JSON.stringify({ ...result, source: Object.fromEntries(Object.entries(result.source).reverse()) }),
    ) as typeof result;
    const text = resultToJson(result);
    expect(resultToJson(shuffled)).toBe(text);
    expect(JSON.parse(text)).toStrictEqual(result);
    const written = Object.keys(JSON.parse(text) as object);
    expect(written).toStrictEqual(Object.keys(resultSchema.shape).filter((key) => written.includes(key)));
  });

  it("is never written where it breaks its own schema", () => {
    const result = makeResult();
    expect(() => resultToJson({ ...result, status: "perfect" } as unknown as typeof result)).toThrow();
    expect(() => resultToJson(makeResult({ tail: { ...result.tail!, from_n: Number.NaN } }))).toThrow();
    expect(() => resultToJson({ ...result, extra: 1 } as unknown as typeof result)).toThrow();
  });

  it("becomes a list where there are several", () => {
    expect(JSON.parse(resultsToJson([makeResult(), makeResult()]))).toHaveLength(2);
  });
});

describe("a protocol as JSON", () => {
  it("resolves to itself", () => {
    const { protocol } = makeResult();
    const again = resolveProtocol(JSON.parse(protocolToJson(protocol)));
    expect(again).toStrictEqual({ ok: true, value: protocol });
  });
});

describe("a result as CSV", () => {
  const rows = readCsv(resultToCsv(makeResult()));
  const [head, ...body] = rows;
  const find = (section: string, name: string, n = ""): Record<string, string> => {
    const row = body.find((one) => one[1] === section && one[2] === name && one[3] === n);
    expect(row, `${section} ${name}`).toBeDefined();
    return Object.fromEntries(head!.map((key, j) => [key, row![j]!]));
  };

  it("is one tidy table: the same columns in every row", () => {
    expect(head).toStrictEqual([
      "file",
      "section",
      "name",
      "n",
      "value",
      "sigma",
      "low",
      "high",
      "unit",
      "text",
    ]);
    for (const row of body) expect(row).toHaveLength(head!.length);
  });

  it("holds every number in full precision with its unit", () => {
    expect(find("series", "gap")).toMatchObject({ value: "2.172083", sigma: "0.0000123", unit: "eV" });
    expect(Number(find("series", "gap")["high"])).toBe(2.172083 + 0.0000123);
    expect(find("line", "area", "5")).toMatchObject({ value: String(1.2 / 125), unit: "eV/cm" });
    expect(find("series", "defect2")).toMatchObject({ value: "", sigma: "", low: "", high: "" });
    expect(find("systematic", "gap")).toMatchObject({ value: "", sigma: "0.00002", unit: "eV" });
  });

  it("quotes what holds commas and quotation marks", () => {
    expect(find("reading", "sample")["text"]).toBe('Sample: crystal 7, "upper half"');
    // Source: RFC 4180 (2005), section 2, rules 5 to 7
    expect(csvLine(["a,b", 'c"d', "e\nf", 1e-7, null, true])).toBe('"a,b","c""d","e\nf",1e-7,,true\r\n');
  });

  it("holds several results in the same table", () => {
    const two = readCsv(resultToCsv(makeResult(), makeResult({ lines: [] })));
    expect(two.length).toBeLessThan(2 * rows.length);
    expect(two.filter((row) => row[0] === "file")).toHaveLength(1);
  });

  it("has a summary of one row a spectrum, doubts named", () => {
    const [names, first, second] = readCsv(
      summaryToCsv([makeResult(), makeResult({ series: null, fit: null })].map(summaryRow)),
    );
    expect(first).toHaveLength(names!.length);
    expect(first![names!.indexOf("doubts")]).toBe("law-rejected");
    expect(second![names!.indexOf("gap_eV")]).toBe("");
  });
});

describe("a result as text", () => {
  const text = resultToText(makeResult());

  it("gives value(uncertainty) unit, the systematic part beside and never inside it", () => {
    expect(text).toMatch(/gap E_g +2\.172 083\(12\) eV +±20 µeV +2\.172071 to 2\.172095 eV/);
    expect(text).toMatch(/Rydberg energy Ry +92\.13\(31\) meV +±0\.4 meV/);
    expect(text).toMatch(/quantum defect delta +0\.231\(18\) +±0\.02/);
    // Derived: three lines share one asymmetry, which then stands once
    expect(text).toContain("Asymmetry q = -0.210(13), shared by all lines.");
    expect(text).toContain("(hbar/G_n)/ps");
    expect(text).toMatch(/exponent k +3 \(held\)/);
  });

  it("states a preset as starting values only", () => {
    expect(text.replace(/\s+/g, " ")).toContain(
      "material cuprous-oxide-yellow-p (Cuprous oxide, yellow P series): starting values only",
    );
  });

  it("gives the gravest notes first, each with its remedy", () => {
    const doubt = text.indexOf("DOUBT law-rejected");
    const assumed = text.indexOf("assumed energy-may-come-from-air");
    expect(doubt).toBeGreaterThan(0);
    expect(assumed).toBeGreaterThan(doubt);
    expect(text).toContain("Remedy: Narrow series.fit_n.");
  });

  it("says not determined where there is no number, and marks lines outside the law's fit", () => {
    expect(text).toMatch(/square-root +height +not determined/);
    expect(text).toContain("* not in the fit of the level law");
    const bare = resultToText(
      makeResult({
        status: "no-series",
        fit: null,
        lines: [],
        series: null,
        systematic: null,
        width_law: null,
        strength_law: null,
        tail: null,
        derived: null,
        background: [],
        notes: [],
      }),
    );
    expect(bare).toContain("NO SERIES SEEN");
    expect(bare).toContain("gap, Rydberg energy and quantum defect not determined");
    expect(bare).not.toMatch(/null|undefined|NaN/);
  });

  it("has no hole where the fit did not converge or the law is rejected", () => {
    const result = makeResult();
    const { gap_eV, rydberg_eV, defect0 } = result.series!;
    const doubtful = resultToText(
      makeResult({
        status: "not-converged",
        fit: { ...result.fit!, termination: "iterationLimit" },
        series: { ...result.series!, scaled: { gap_eV: { ...gap_eV, sigma: 0.01 }, rydberg_eV, defect0 } },
        systematic: null,
      }),
    );
    expect(doubtful).toContain("NOT CONVERGED (stopped by the limit of iterations)");
    expect(doubtful).toContain("value(scaled error)");
    expect(doubtful).toMatch(/gap E_g +2\.172\(10\) eV/);
    expect(doubtful).toContain("Unscaled (too small): E_g = ");
    expect(doubtful).not.toMatch(/null|undefined|NaN/);
  });
});

describe("cautions", () => {
  const reading = (key: string, text: string): Pick<ReturnType<typeof makeResult>["reading"], "facts"> => ({
    facts: [{ key, label: key, text }],
  });

  it("stand in the result where power and low temperature are discussed", () => {
    const words = resultToText(makeResult()).replace(/\s+/g, " ");
    expect(words).toContain(LASER_CAUTION);
    expect(words).toContain(CRYOGEN_CAUTION);
  });

  it("are one sentence each and defer to local rules and licensed practice", () => {
    for (const caution of [LASER_CAUTION, CRYOGEN_CAUTION]) {
      expect(caution.match(/\./g)).toHaveLength(1);
      expect(caution).toMatch(/rules of your laboratory/);
    }
  });

  it("are left out where there is nothing to be careful of", () => {
    expect(cautionsFor({ notes: [], reading: reading("sample", "7") })).toStrictEqual([]);
    expect(cautionsFor({ notes: [], reading: reading("temperature", "295 K") })).toStrictEqual([]);
    expect(cautionsFor({ notes: [], reading: reading("temperature", "22 °C") })).toStrictEqual([]);
    expect(cautionsFor({ notes: [], reading: reading("temperature", "1,8 K") })).toStrictEqual([
      CRYOGEN_CAUTION,
    ]);
    expect(cautionsFor({ notes: [], reading: reading("power", "3 uW") })).toStrictEqual([LASER_CAUTION]);
  });
});
