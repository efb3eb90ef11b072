import { create } from "fontkit";
import { richText } from "../rich-text.ts";
import { SCRIPT_SIZE, scriptShift, type Drawn } from "./drawing.ts";

/** Font files (TrueType, OpenType or WOFF), the first that has a character is the one that draws it. */
export interface FontFiles {
  readonly upright: readonly Uint8Array[];
  readonly italic: readonly Uint8Array[];
}

/** What is used of an opened typeface. */
export interface OpenFont {
  readonly postscriptName: string;
  readonly unitsPerEm: number;
  hasGlyphForCodePoint(codePoint: number): boolean;
  layout(text: string, features?: Readonly<Record<string, boolean>>): { readonly glyphs: readonly Glyph[] };
}

interface Glyph {
  readonly advanceWidth: number;
  /** In units of the typeface, y upwards. */
  readonly path: GlyphPath;
}

interface GlyphPath {
  scale(x: number, y: number): GlyphPath;
  translate(x: number, y: number): GlyphPath;
  toSVG(): string;
}

export interface Face {
  readonly font: OpenFont;
  readonly bytes: Uint8Array;
}

/** Characters that one face draws in one go. */
export interface Piece {
  readonly face: Face;
  readonly text: string;
  /** From the anchor of the whole text, along it. */
  readonly along: number;
  /** Below the line; a superscript has less than nothing. */
  readonly below: number;
  readonly size: number;
}

/** Each sign stands for itself: no two letters in one, so that text and drawing agree letter by letter. */
export const FEATURES = { liga: false, clig: false, dlig: false, calt: false, kern: false } as const;

/** Stands for a character that no face has. */
const MISSING = "\uFFFD";

/** The faces that a figure is set in, and what they could not draw. */
export class Typefaces {
  readonly #upright: readonly Face[];
  readonly #italic: readonly Face[];
  readonly #missing = new Set<string>();

  constructor({ upright, italic }: FontFiles) {
    const open = (bytes: Uint8Array): Face => ({ font: create(bytes) as OpenFont, bytes });
    this.#upright = upright.map(open);
    // A name of a sample in an alphabet that has no italic here is still written.
    this.#italic = [...italic.map(open), ...this.#upright];
  }

  /** Characters that no face has, met since this was asked last, in the order met. */
  takeMissing(): readonly string[] {
    const met = [...this.#missing];
    this.#missing.clear();
    return met;
  }

  /** A text cut into pieces by style and face, measured and put in its place around the anchor. */
  set({
    marked,
    size,
    anchor,
  }: Pick<Drawn & { kind: "text" }, "marked" | "size" | "anchor">): readonly Piece[] {
    const pieces: Piece[] = [];
    let along = 0;
    for (const { text, style } of richText(marked)) {
      const faces = style === "italic" ? this.#italic : this.#upright;
      const runSize = style === "sub" || style === "sup" ? SCRIPT_SIZE * size : size;
      for (const { face, characters } of this.#byFace(text.normalize("NFC"), faces)) {
        pieces.push({ face, text: characters, along, below: scriptShift(style) * size, size: runSize });
        along += advance(face, characters) * runSize;
      }
    }
    const shift = anchor === "start" ? 0 : anchor === "middle" ? -along / 2 : -along;
    return pieces.map((piece) => ({ ...piece, along: piece.along + shift }));
  }

  #byFace(text: string, faces: readonly Face[]): { face: Face; characters: string }[] {
    const out: { face: Face; characters: string }[] = [];
    for (const character of text) {
      const found = this.#faceOf(character, faces);
      const [face, written] = found ?? [this.#faceOf(MISSING, faces)?.[0] ?? faces[0]!, MISSING];
      if (found === null) this.#missing.add(character);
      const last = out.at(-1);
      if (last?.face === face) last.characters += written;
      else out.push({ face, characters: written });
    }
    return out;
  }

  #faceOf(character: string, faces: readonly Face[]): [Face, string] | null {
    // The thin spaces of numbers are spaces here.
    const written = /\s/.test(character) ? " " : character;
    const face = faces.find(({ font }) => font.hasGlyphForCodePoint(written.codePointAt(0)!));
    return face === undefined ? null : [face, written];
  }
}

/** Over the size of the text. */
function advance({ font }: Face, text: string): number {
  return (
    font.layout(text, FEATURES).glyphs.reduce((sum, glyph) => sum + glyph.advanceWidth, 0) / font.unitsPerEm
  );
}

/** A piece as path data, its first letter at a place; y downwards. */
export function outline({ face, text, size }: Piece, x: number, y: number): string {
  const scale = size / face.font.unitsPerEm;
  let at = x;
  return face.font
    .layout(text, FEATURES)
    .glyphs.map((glyph) => {
      const path = glyph.path.scale(scale, -scale).translate(at, y).toSVG();
      at += glyph.advanceWidth * scale;
      return path;
    })
    .join("");
}
