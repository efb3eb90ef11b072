/** The subset of fontkit used here; it publishes no types of its own. */
declare module "fontkit" {
  export interface Glyph {
    readonly id: number;
    readonly advanceWidth: number;
    /** In units of the typeface, y upwards. */
    readonly path: {
      scale(x: number, y?: number): Glyph["path"];
      translate(x: number, y: number): Glyph["path"];
      toSVG(): string;
    };
  }
  export interface Font {
    readonly postscriptName: string;
    readonly unitsPerEm: number;
    hasGlyphForCodePoint(codePoint: number): boolean;
    layout(text: string, features?: Readonly<Record<string, boolean>>): { readonly glyphs: readonly Glyph[] };
  }
  export function create(bytes: Uint8Array): Font;
}
