export const DRAWING_FILES: {
  readonly upright: readonly string[];
  readonly italic: readonly string[];
  readonly rasteriser: string;
};
