/**
 * The content policy and the headers of every answer, the same in both shells: nothing from elsewhere, no script or
 * style made from text, no frame around the page, and isolation that lets the page share memory with its worker.
 * Both isolation headers must also stand on the worker's own script, so they stand on everything.
 */
export function contentPolicy(nonce: string | null): string {
  return [
    "default-src 'none'",
    // Compiled loops (app/solve/vectorKernels.ts) are made in the page's worker; script from text stays forbidden.
    "script-src 'self' 'wasm-unsafe-eval'",
    nonce === null ? "style-src 'self'" : `style-src 'self' 'nonce-${nonce}'`,
    "img-src 'self' data: blob:",
    "font-src 'self'",
    "connect-src 'self'",
    "worker-src 'self'",
    "base-uri 'none'",
    "form-action 'none'",
    "frame-ancestors 'none'",
    "object-src 'none'",
  ].join("; ");
}

export function pageHeaders(nonce: string | null): Record<string, string> {
  return {
    "Content-Security-Policy": contentPolicy(nonce),
    "Cross-Origin-Opener-Policy": "same-origin",
    "Cross-Origin-Embedder-Policy": "require-corp",
    "Cross-Origin-Resource-Policy": "same-origin",
    "Permissions-Policy": "camera=(), microphone=(), geolocation=(), usb=(), serial=(), hid=()",
    "Referrer-Policy": "no-referrer",
    "X-Content-Type-Options": "nosniff",
    // Asset names carry their own hash, but a browser that asks again costs nothing on this machine.
    "Cache-Control": "no-store",
  };
}
