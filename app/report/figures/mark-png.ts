import { FIGURE_PNG_MARK } from "./figure-files.ts";

const SIGNATURE = 8;
/** Length, name, check and thirteen bytes of data. */
const HEADER = 25;

/**
 * What      A PNG with its resolution and the program that made it said in it: chunks pHYs and tEXt right after the header.
 * Units     Points an inch; the file holds whole points a metre.
 * Source    Portable Network Graphics (PNG) Specification, second edition, 11.3.4.3 and 11.3.5.3.
 */
export function markPng(png: Uint8Array, dotsPerInch: number): Uint8Array<ArrayBuffer> {
  const physical = new Uint8Array(9);
  const view = new DataView(physical.buffer);
  const perMetre = Math.round(dotsPerInch / 0.0254);
  view.setUint32(0, perMetre);
  view.setUint32(4, perMetre);
  physical[8] = 1;
  const parts = [
    png.subarray(0, SIGNATURE + HEADER),
    chunk("pHYs", physical),
    chunk(
      "tEXt",
      Uint8Array.from(FIGURE_PNG_MARK, (character) => character.charCodeAt(0)),
    ),
    png.subarray(SIGNATURE + HEADER),
  ];
  const out = new Uint8Array(parts.reduce((sum, { length }) => sum + length, 0));
  let at = 0;
  for (const part of parts) {
    out.set(part, at);
    at += part.length;
  }
  return out;
}

function chunk(name: string, data: Uint8Array): Uint8Array {
  const out = new Uint8Array(12 + data.length);
  const view = new DataView(out.buffer);
  view.setUint32(0, data.length);
  for (let i = 0; i < 4; i++) out[4 + i] = name.charCodeAt(i);
  out.set(data, 8);
  view.setUint32(8 + data.length, checkOf(out.subarray(4, 8 + data.length)));
  return out;
}

/** The cyclic redundancy check of ISO 3309, as PNG wants it. */
function checkOf(bytes: Uint8Array): number {
  let check = 0xffffffff;
  for (const byte of bytes) {
    check ^= byte;
    for (let bit = 0; bit < 8; bit++) check = check & 1 ? (check >>> 1) ^ 0xedb88320 : check >>> 1;
  }
  return (check ^ 0xffffffff) >>> 0;
}
