/** What a file is that is no text table, told by its first bytes. */
export interface Signature {
  readonly code: "table/not-text" | "table/markup" | "table/other-format";
  /** In plain words with its article. */
  readonly found: string;
  readonly kind:
    "image" | "spreadsheet" | "document" | "archive" | "data" | "web-page" | "markup" | "jcamp" | "json";
}

function latin(bytes: Uint8Array, from: number, to: number): string {
  let text = "";
  for (let i = from; i < Math.min(to, bytes.length); i++) text += String.fromCharCode(bytes[i]!);
  return text;
}

function zipKind(bytes: Uint8Array): Signature {
  const head = latin(bytes, 0, 8192);
  if (
    /\bxl\/|opendocument\.spreadsheet/.test(head) ||
    (head.includes("[Content_Types].xml") && !/word\//.test(head))
  )
    return { code: "table/not-text", kind: "spreadsheet", found: "a spreadsheet workbook (a zip container)" };
  if (/word\/|opendocument\.text/.test(head))
    return { code: "table/not-text", kind: "document", found: "a word-processor document (a zip container)" };
  return { code: "table/not-text", kind: "archive", found: "a zip archive" };
}

const STARTS: readonly (readonly [string, Signature["kind"], string])[] = [
  ["\x89PNG\r\n", "image", "a PNG image"],
  ["\xff\xd8\xff", "image", "a JPEG image"],
  ["GIF8", "image", "a GIF image"],
  ["II*\0", "image", "a TIFF image"],
  ["MM\0*", "image", "a TIFF image"],
  ["%PDF-", "document", "a PDF document"],
  ["%!PS", "document", "a PostScript document"],
  ["{\\rtf", "document", "a rich-text document"],
  ["\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "spreadsheet", "an old binary spreadsheet or office file"],
  ["\x1f\x8b", "archive", "a gzip archive"],
  ["BZh", "archive", "a bzip2 archive"],
  ["\xfd7zXZ\0", "archive", "an xz archive"],
  ["7z\xbc\xaf\x27\x1c", "archive", "a 7z archive"],
  ["Rar!\x1a", "archive", "a rar archive"],
  ["\x89HDF\r\n", "data", "an HDF5 file"],
  ["CDF\x01", "data", "a NetCDF file"],
  ["CDF\x02", "data", "a NetCDF file"],
  ["SIMPLE  =", "data", "a FITS file"],
];

export function signatureOf(bytes: Uint8Array): Signature | null {
  const head = latin(bytes, 0, 16);
  if (head.startsWith("PK\x03\x04") || head.startsWith("PK\x05\x06")) return zipKind(bytes);
  if (head.startsWith("BM") && bytes.length > 54 && bytes[6] === 0 && bytes[7] === 0)
    return { code: "table/not-text", kind: "image", found: "a BMP image" };
  for (const [start, kind, found] of STARTS)
    if (head.startsWith(start)) return { code: "table/not-text", kind, found };
  return null;
}

/** The same for decoded text: pages, markup and formats that only look like a table. */
export function textSignatureOf(text: string): Signature | null {
  const head = text.slice(0, 2048).trimStart();
  if (
    /^(<!doctype\s+html|<html|<head|<body)/i.test(head) ||
    (/^<(\?xml|!--)/.test(head) && /<html/i.test(head))
  )
    return { code: "table/markup", kind: "web-page", found: "a web page (HTML)" };
  if (/^<(\?xml|[a-z][\w:-]*[\s>/])/i.test(head))
    return { code: "table/markup", kind: "markup", found: "an XML file" };
  if (/^##\s*(TITLE|JCAMP-?DX)\s*=/i.test(head))
    return { code: "table/other-format", kind: "jcamp", found: "a JCAMP-DX file" };
  if (/^(\{\s*"|\[\s*[{["])/.test(head) && /[}\]]\s*$/.test(text.slice(-64)))
    return { code: "table/markup", kind: "json", found: "a JSON file" };
  return null;
}
