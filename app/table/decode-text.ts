import type { EncodingName } from "./types.ts";

export interface DecodedText {
  readonly text: string;
  readonly encoding: EncodingName;
  readonly byteOrderMark: boolean;
  readonly reason: string;
}

/** Characters of Windows-1252 in 0x80-0x9F (WHATWG Encoding Standard, index windows-1252). */
const WINDOWS_1252_HIGH =
  "\u20ac\u0081\u201a\u0192\u201e\u2026\u2020\u2021\u02c6\u2030\u0160\u2039\u0152\u008d\u017d\u008f" +
  "\u0090\u2018\u2019\u201c\u201d\u2022\u2013\u2014\u02dc\u2122\u0161\u203a\u0153\u009d\u017e\u0178";

/** One byte, one character; done here because decoders differ in how they treat 0x80-0x9F. */
function decodeSingleByte(bytes: Uint8Array, windows: boolean): string {
  const parts: string[] = [];
  const block = new Uint16Array(8192);
  for (let from = 0; from < bytes.length; from += block.length) {
    const n = Math.min(block.length, bytes.length - from);
    for (let i = 0; i < n; i++) {
      const byte = bytes[from + i]!;
      block[i] = windows && byte >= 0x80 && byte < 0xa0 ? WINDOWS_1252_HIGH.charCodeAt(byte - 0x80) : byte;
    }
    parts.push(String.fromCharCode(...block.subarray(0, n)));
  }
  return parts.join("");
}

function decodeUtf8(bytes: Uint8Array): string | null {
  try {
    return new TextDecoder("utf-8", { fatal: true, ignoreBOM: true }).decode(bytes);
  } catch {
    return null;
  }
}

/** Number of bytes at the end that begin a UTF-8 character without finishing it. */
function unfinishedTail(bytes: Uint8Array): number {
  for (let back = 1; back <= Math.min(3, bytes.length); back++) {
    const byte = bytes[bytes.length - back]!;
    if (byte >= 0xc0) {
      const length = byte >= 0xf0 ? 4 : byte >= 0xe0 ? 3 : 2;
      return back < length ? back : 0;
    }
    if (byte < 0x80) return 0;
  }
  return 0;
}

function decodeAs(bytes: Uint8Array, encoding: EncodingName): string {
  if (encoding === "windows-1252") return decodeSingleByte(bytes, true);
  if (encoding === "iso-8859-1") return decodeSingleByte(bytes, false);
  return new TextDecoder(encoding, { ignoreBOM: true }).decode(bytes);
}

function markOf(bytes: Uint8Array): { encoding: EncodingName; length: number } | null {
  if (bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf) return { encoding: "utf-8", length: 3 };
  if (bytes[0] === 0xff && bytes[1] === 0xfe) return { encoding: "utf-16le", length: 2 };
  if (bytes[0] === 0xfe && bytes[1] === 0xff) return { encoding: "utf-16be", length: 2 };
  return null;
}

/** Latin text in UTF-16 has a zero in almost every second byte, and always in the same place. */
function wideByZeros(bytes: Uint8Array): EncodingName | null {
  const n = Math.min(bytes.length - (bytes.length % 2), 4096);
  if (n < 8) return null;
  let even = 0;
  let odd = 0;
  for (let i = 0; i < n; i += 2) {
    if (bytes[i] === 0) even++;
    if (bytes[i + 1] === 0) odd++;
  }
  const half = n / 2;
  if (odd > 0.7 * half && even < 0.05 * half) return "utf-16le";
  if (even > 0.7 * half && odd < 0.05 * half) return "utf-16be";
  return null;
}

/** Bytes to text. Undecodable bytes become U+FFFD, never an exception. */
export function decodeText(bytes: Uint8Array, wanted?: EncodingName): DecodedText {
  const mark = markOf(bytes);
  if (wanted !== undefined) {
    const own = mark !== null && mark.encoding === wanted;
    const text = decodeAs(own ? bytes.subarray(mark.length) : bytes, wanted);
    return { text, encoding: wanted, byteOrderMark: own, reason: "chosen by the user" };
  }
  if (mark !== null) {
    const text = decodeAs(bytes.subarray(mark.length), mark.encoding);
    return {
      text,
      encoding: mark.encoding,
      byteOrderMark: true,
      reason: "the file begins with a byte-order mark",
    };
  }
  const wide = wideByZeros(bytes);
  if (wide !== null)
    return {
      text: decodeAs(bytes, wide),
      encoding: wide,
      byteOrderMark: false,
      reason: "no byte-order mark, but every second byte is zero",
    };
  const plain = decodeUtf8(bytes);
  if (plain !== null) {
    const ascii = plain.length === bytes.length;
    const reason = ascii ? "only plain characters, the same in every encoding" : "every byte is valid UTF-8";
    return { text: plain, encoding: "utf-8", byteOrderMark: false, reason };
  }
  const tail = unfinishedTail(bytes);
  const cut = tail === 0 ? null : decodeUtf8(bytes.subarray(0, bytes.length - tail));
  // A lone high byte at the very end of otherwise plain text is a Latin-1 character, not a cut UTF-8 one.
  if (cut !== null && cut.length < bytes.length - tail)
    return {
      text: cut + "\ufffd",
      encoding: "utf-8",
      byteOrderMark: false,
      reason: "valid UTF-8 up to the last character, which is cut off",
    };
  let windows = false;
  for (const byte of bytes) {
    if (byte >= 0x80 && byte < 0xa0) {
      windows = true;
      break;
    }
  }
  return {
    text: decodeSingleByte(bytes, windows),
    encoding: windows ? "windows-1252" : "iso-8859-1",
    byteOrderMark: false,
    reason: windows
      ? "not valid UTF-8, and bytes between 0x80 and 0x9F occur, which Windows-1252 uses for characters"
      : "not valid UTF-8; the high bytes are characters of Latin-1",
  };
}
