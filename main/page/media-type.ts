const TYPES: Readonly<Record<string, string>> = {
  html: "text/html; charset=utf-8",
  js: "text/javascript; charset=utf-8",
  mjs: "text/javascript; charset=utf-8",
  css: "text/css; charset=utf-8",
  json: "application/json; charset=utf-8",
  svg: "image/svg+xml",
  png: "image/png",
  ico: "image/x-icon",
  woff: "font/woff",
  woff2: "font/woff2",
  wasm: "application/wasm",
  txt: "text/plain; charset=utf-8",
  map: "application/json; charset=utf-8",
};

/** Media type by file name; what is not known is handed out as bytes, never guessed. */
export function mediaType(name: string): string {
  const dot = name.lastIndexOf(".");
  return TYPES[name.slice(dot + 1).toLowerCase()] ?? "application/octet-stream";
}
