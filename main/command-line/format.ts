/** How results are written. */
export const FORMATS = ["json", "csv", "text", "latex"] as const;
export type Format = (typeof FORMATS)[number];
