/** The few globals that every shell shares (window, worker, Node) and that the ECMAScript library does not declare. */
declare class TextDecoder {
  constructor(label?: string, options?: { fatal?: boolean; ignoreBOM?: boolean });
  decode(input?: ArrayBufferView | ArrayBuffer, options?: { stream?: boolean }): string;
}
declare class TextEncoder {
  encode(input?: string): Uint8Array;
}
declare class URL {
  constructor(url: string, base?: string);
  href: string;
}
declare interface AbortSignal {
  readonly aborted: boolean;
}
declare interface File {
  readonly name: string;
}
