import * as fontkit from "fontkit";
import type { PDFName } from "@cantoo/pdf-lib";
import {
  beginText,
  clip,
  drawSvgPath,
  endPath,
  endText,
  LineJoinStyle,
  PDFDocument,
  PDFHexString,
  PDFString,
  popGraphicsState,
  pushGraphicsState,
  rectangle,
  rgb,
  setFillingColor,
  setFontAndSize,
  setLineJoin,
  setTextMatrix,
  showText,
  translate,
  type Color,
  type PDFFont,
  type PDFOperator,
  type PDFPage,
} from "@cantoo/pdf-lib";
import { signPath, type Drawing, type Drawn } from "./drawing.ts";
import { FEATURES, type Face, type Typefaces } from "./typefaces.ts";

/**
 * What      A drawing as a PDF of one page of its own size: vector graphics, texts as texts in the parts of the typefaces
 *           that they need, embedded. No date and no chance in it: the same drawing gives the same bytes.
 */
export async function drawingToPdf(drawing: Drawing, typefaces: Typefaces): Promise<Uint8Array> {
  const document = await PDFDocument.create({ updateMetadata: false });
  const { context } = document;
  context.trailerInfo.Info = context.register(
    context.obj({ Producer: PDFString.of("Rungline"), Title: PDFHexString.fromText(drawing.title) }),
  );
  document.registerFontkit(fontkit as unknown as Parameters<typeof document.registerFontkit>[0]);
  const page = document.addPage([drawing.width, drawing.height]);
  const writer = new PageWriter(document, page, drawing, typefaces);
  await writer.embedFaces();
  page.pushOperators(
    pushGraphicsState(),
    // Places count from the upper left corner; paths are turned over by the library.
    translate(0, drawing.height),
    setLineJoin(LineJoinStyle.Round),
    ...writer.all(drawing.drawn),
    popGraphicsState(),
  );
  return document.save({ useObjectStreams: false });
}

class PageWriter {
  readonly #document: PDFDocument;
  readonly #page: PDFPage;
  readonly #drawing: Drawing;
  readonly #typefaces: Typefaces;
  readonly #fonts = new Map<Face, { readonly font: PDFFont; readonly key: PDFName }>();
  readonly #opacities = new Map<number, PDFName>();

  constructor(document: PDFDocument, page: PDFPage, drawing: Drawing, typefaces: Typefaces) {
    this.#document = document;
    this.#page = page;
    this.#drawing = drawing;
    this.#typefaces = typefaces;
  }

  /** Only the faces that the drawing uses, in the order in which they are met. */
  async embedFaces(): Promise<void> {
    for (const text of textsOf(this.#drawing.drawn))
      for (const { face } of this.#typefaces.set(text)) {
        if (this.#fonts.has(face)) continue;
        const font = await this.#document.embedFont(face.bytes, {
          subset: true,
          features: { ...FEATURES },
          customName: `${subsetTag(this.#fonts.size)}+${face.font.postscriptName}`,
        });
        this.#fonts.set(face, { font, key: this.#page.node.newFontDictionary(font.name, font.ref) });
      }
  }

  all(drawn: readonly Drawn[]): PDFOperator[] {
    return drawn.flatMap((one) => {
      switch (one.kind) {
        case "path":
          return this.#path(one);
        case "sign":
          return this.#sign(one);
        case "text":
          return this.#text(one);
        case "clip": {
          const { left, top, right, bottom } = one.box;
          return [
            pushGraphicsState(),
            rectangle(left, -bottom, right - left, bottom - top),
            clip(),
            endPath(),
            ...this.all(one.within),
            popGraphicsState(),
          ];
        }
      }
    });
  }

  #path({ path, stroke, fill }: Drawn & { kind: "path" }): PDFOperator[] {
    const opacity = fill?.opacity;
    return drawSvgPath(path, {
      ...AT_ORIGIN,
      color: fill === undefined ? undefined : colourOf(fill.colour),
      borderColor: stroke === undefined ? undefined : colourOf(stroke.colour),
      borderWidth: stroke?.width ?? 0,
      ...(stroke?.dash !== undefined && { borderDashArray: stroke.dash.split(" ").map(Number) }),
      ...(opacity !== undefined && { graphicsState: this.#opacity(opacity) }),
    });
  }

  #sign({ shape, x, y, radius, colour, hollow }: Drawn & { kind: "sign" }): PDFOperator[] {
    const { path, strokes } = signPath(shape, x, y, radius);
    return drawSvgPath(path, {
      ...AT_ORIGIN,
      color: strokes !== null ? undefined : hollow ? rgb(1, 1, 1) : colourOf(colour),
      borderColor: colourOf(colour),
      borderWidth: strokes ?? 0.8,
    });
  }

  #text(text: Drawn & { kind: "text" }): PDFOperator[] {
    const { x, y, colour, turned } = text;
    const pieces = this.#typefaces.set(text);
    if (pieces.length === 0) return [];
    return [
      pushGraphicsState(),
      setFillingColor(colourOf(colour)),
      beginText(),
      ...pieces.flatMap(({ face, text: words, along, below, size }) => {
        const { font, key } = this.#fonts.get(face)!;
        return [
          setFontAndSize(key, size),
          turned === true
            ? setTextMatrix(0, 1, -1, 0, x + below, -y + along)
            : setTextMatrix(1, 0, 0, 1, x + along, -y - below),
          showText(font.encodeText(words)),
        ];
      }),
      endText(),
      popGraphicsState(),
    ];
  }

  #opacity(opacity: number): PDFName {
    const known = this.#opacities.get(opacity);
    if (known !== undefined) return known;
    const state = this.#document.context.obj({ Type: "ExtGState", ca: opacity });
    const key = this.#page.node.newExtGState("GS", state);
    this.#opacities.set(opacity, key);
    return key;
  }
}

const AT_ORIGIN = { x: 0, y: 0, scale: undefined } as const;

function textsOf(drawn: readonly Drawn[]): (Drawn & { kind: "text" })[] {
  return drawn.flatMap((one) =>
    one.kind === "text" ? [one] : one.kind === "clip" ? textsOf(one.within) : [],
  );
}

/** Six capitals before the name of a typeface say that it is a part of one (ISO 32000-1, 9.6.4). */
function subsetTag(i: number): string {
  return `RUNGL${String.fromCharCode(65 + (i % 26))}`;
}

function colourOf(hex: string): Color {
  const channel = (from: number): number => parseInt(hex.slice(from, from + 2), 16) / 255;
  return rgb(channel(1), channel(3), channel(5));
}
