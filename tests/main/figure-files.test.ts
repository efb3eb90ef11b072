import { crc32, inflateSync } from "node:zlib";
import {
  decodePDFRawStream,
  PDFArray,
  PDFDict,
  PDFDocument,
  PDFName,
  type PDFObject,
  type PDFRawStream,
} from "@cantoo/pdf-lib";
import { beforeAll, describe, expect, it } from "vitest";
import {
  makeFigurePress,
  NARROWEST_MM,
  ONE_COLUMN_MM,
  OWN_SIZE,
  reportContents,
  WIDEST_MM,
  type DrawingTools,
  type Figure,
  type FigurePress,
} from "../../app/report/index.ts";
import type { Drawn } from "../../app/report/figures/drawing.ts";
import { layOut } from "../../app/report/figures/lay-out.ts";
import { resizeFigure } from "../../app/report/figures/resize-figure.ts";
import { Typefaces } from "../../app/report/figures/typefaces.ts";
import { compareSamples } from "../../app/tasks/index.ts";
import { drawingTools } from "../../main/services/drawing-tools.ts";
import { reportCurves, reportSamples } from "../support/report-samples.ts";

const RUN = { version: "0.1.0", node: "v20.0.0", started: "2026-01-02T03:04:05.000Z" };
let tools: DrawingTools;
let press: FigurePress;
let figures: readonly Figure[];
const named = (name: string): Figure => figures.find((figure) => figure.name === name)!;

beforeAll(async () => {
  tools = await drawingTools();
  press = await makeFigurePress(tools);
  const results = reportSamples(3);
  const compared = compareSamples(results, {}, RUN);
  const { samples, comparison } = reportContents({
    results,
    curves: results.map((result) => reportCurves(result, 600)),
    comparison: compared.ok ? compared.value : null,
    run: RUN,
  });
  figures = [...samples[0]!.figures, ...comparison!.figures];
});

/** The texts of a one-page PDF as a reader of the screen gets them: codes through the tables of their typefaces. */
async function textsOf(bytes: Uint8Array): Promise<string[]> {
  const document = await PDFDocument.load(bytes, { updateMetadata: false });
  const { node } = document.getPage(0);
  const plain = (object: PDFObject | undefined): string =>
    new TextDecoder("latin1").decode(decodePDFRawStream(object as PDFRawStream).decode());
  const fonts = new Map<string, Map<string, string>>();
  for (const [key, of] of node.Resources()!.lookup(PDFName.of("Font"), PDFDict).entries()) {
    const table = plain(document.context.lookup(of, PDFDict).lookup(PDFName.of("ToUnicode")));
    const codes = [...table.matchAll(/<([0-9A-F]{4})> <((?:[0-9A-F]{4})+)>/gi)];
    fonts.set(
      key.toString(),
      new Map(
        codes.map(([, code, text]) => [
          code!.toUpperCase(),
          String.fromCharCode(...text!.match(/.{4}/g)!.map((unit) => parseInt(unit, 16))),
        ]),
      ),
    );
  }
  const contents = node.Contents()!;
  const streams =
    contents instanceof PDFArray ? contents.asArray().map((one) => document.context.lookup(one)) : [contents];
  return streams
    .map(plain)
    .join("\n")
    .split("BT")
    .slice(1)
    .map((text) =>
      [...text.split("ET")[0]!.matchAll(/(\/\S+) [\d.]+ Tf[\s\S]*?<([0-9A-F]*)> Tj/gi)]
        .flatMap(([, key, hex]) =>
          hex!.match(/.{4}/g)!.map((code) => fonts.get(key!)!.get(code.toUpperCase())!),
        )
        .join(""),
    );
}

describe("a figure as PDF", () => {
  it("is one page of the figure's own size, without a date, the same to the byte", async () => {
    const bytes = await press.make(named("levels"), "pdf", OWN_SIZE);
    const again = await (await makeFigurePress(tools)).make(named("levels"), "pdf", OWN_SIZE);
    expect(Buffer.from(again).equals(Buffer.from(bytes))).toBe(true);
    const text = Buffer.from(bytes).toString("latin1");
    expect(text.startsWith("%PDF-1.7")).toBe(true);
    expect(text).not.toMatch(/CreationDate|ModDate/);
    const { width, height } = (await PDFDocument.load(bytes, { updateMetadata: false }))
      .getPage(0)
      .getMediaBox();
    // Derived: mm to points of 1/72 inch; a point is 0.353 mm
    expect([width, height]).toEqual(
      [(85 * 72) / 25.4, (78 * 72) / 25.4].map((one) => expect.closeTo(one, 2)),
    );
  });

  it("embeds the parts of the typefaces that it needs, and keeps its texts as texts", async () => {
    const bytes = await press.make(named("levels"), "pdf", OWN_SIZE);
    const raw = Buffer.from(bytes).toString("latin1");
    // Upright, italic, and the Greek letter of the defect in its own face.
    expect(raw.match(/\/FontFile2/g)!.length).toBeGreaterThanOrEqual(3);
    expect(raw).toMatch(/\/BaseFont \/[A-Z]{6}\+IBMPlexSans-Italic/);
    const texts = await textsOf(bytes);
    expect(texts).toContain("1/(n − δ)2");
    expect(texts).toContain("(En − law) / µeV");
    const widths = await textsOf(await press.make(named("widths"), "pdf", OWN_SIZE));
    expect(widths).toContain("Γn / µeV");
    expect(widths).toContain("n−3 through the first");
  });
});

/** Chunks of a PNG, each with its check proved. */
function chunksOf(png: Uint8Array): { name: string; data: Buffer }[] {
  const bytes = Buffer.from(png);
  expect(bytes.subarray(0, 8).toString("latin1")).toBe("\x89PNG\r\n\x1a\n");
  const chunks: { name: string; data: Buffer }[] = [];
  for (let at = 8; at < bytes.length;) {
    const length = bytes.readUInt32BE(at);
    const data = bytes.subarray(at + 8, at + 8 + length);
    expect(bytes.readUInt32BE(at + 8 + length)).toBe(crc32(bytes.subarray(at + 4, at + 8 + length)));
    chunks.push({ name: bytes.toString("latin1", at + 4, at + 8), data });
    at += 12 + length;
  }
  return chunks;
}

describe("a figure as PNG", () => {
  it.each([
    // Derived: 85 mm are 85/25.4 inches; whole dots a metre are dots an inch over 0.0254
    [300, 1004, 11811],
    [600, 2008, 23622],
  ])("has %i dots an inch, said in it, and the same bytes again", async (dpi, dots, perMetre) => {
    const choices = { width_mm: ONE_COLUMN_MM, dpi };
    const png = await press.make(named("levels"), "png", choices);
    const chunks = chunksOf(png);
    const of = (name: string): Buffer => chunks.find((one) => one.name === name)!.data;
    expect(of("IHDR").readUInt32BE(0)).toBe(dots);
    expect([of("pHYs").readUInt32BE(0), of("pHYs").readUInt32BE(4), of("pHYs")[8]]).toEqual([
      perMetre,
      perMetre,
      1,
    ]);
    expect(Buffer.from(await press.make(named("levels"), "png", choices)).equals(Buffer.from(png))).toBe(
      true,
    );
  });

  it("has its texts drawn: a figure without them is another picture", async () => {
    const figure = named("levels");
    const bare: Figure = {
      ...figure,
      panels: figure.panels.map((panel) => ({ ...panel, x: { ...panel.x, title: panel.x.title && " " } })),
    };
    const data = async (one: Figure): Promise<Buffer> =>
      inflateSync(
        Buffer.concat(
          chunksOf(await press.make(one, "png", { width_mm: null, dpi: 300 }))
            .filter(({ name }) => name === "IDAT")
            .map(({ data: part }) => part),
        ),
      );
    const [full, less] = [await data(figure), await data(bare)];
    expect(full.length).toBe(less.length);
    expect(full.equals(less)).toBe(false);
  });
});

describe("any figure", () => {
  it("is set in signs that the typefaces have; one that they lack is named once it was met", async () => {
    for (const figure of figures) await press.make(figure, "pdf", OWN_SIZE);
    expect(press.takeMissing()).toEqual([]);
    const figure = named("levels");
    await press.make({ ...figure, legend: [{ text: "晶 Ωő Щ", colour: "#000000" }] }, "pdf", OWN_SIZE);
    expect(press.takeMissing()).toEqual(["晶"]);
    expect(press.takeMissing()).toEqual([]);
  });

  it("keeps its type and its texts apart at every width", () => {
    const typefaces = new Typefaces(tools.fonts);
    for (const figure of figures)
      for (const width of [NARROWEST_MM, ONE_COLUMN_MM, 120, WIDEST_MM]) {
        const sized = resizeFigure(figure, width);
        expect(sized.width_mm).toBe(width);
        const texts = layOut(sized).drawn.filter(
          (one): one is Drawn & { kind: "text" } => one.kind === "text" && one.turned !== true,
        );
        expect(Math.min(...texts.map(({ size }) => size))).toBeGreaterThanOrEqual(6);
        const spans = texts.map((text) => {
          const pieces = typefaces.set(text);
          const { along = 0 } = pieces[0] ?? {};
          const last = pieces.at(-1);
          const end =
            last === undefined
              ? 0
              : last.along +
                (last.size *
                  last.face.font.layout(last.text).glyphs.reduce((sum, one) => sum + one.advanceWidth, 0)) /
                  last.face.font.unitsPerEm;
          return { ...text, from: text.x + along, to: text.x + end };
        });
        for (const [i, one] of spans.entries())
          for (const other of spans.slice(i + 1))
            if (Math.abs(one.y - other.y) < 0.5 * one.size)
              expect(
                one.to <= other.from || other.to <= one.from,
                `${figure.name} at ${width} mm: "${one.marked}" runs into "${other.marked}"`,
              ).toBe(true);
        expect(Math.min(...spans.map(({ from }) => from))).toBeGreaterThanOrEqual(0);
      }
  });
});
