/** The subset of fontkit used here; it publishes no types of its own. */
declare module "fontkit" {
  /** A typeface as `OpenFont` in typefaces.ts describes it. */
  export function create(bytes: Uint8Array): unknown;
}
