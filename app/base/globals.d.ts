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
/** The part of WebAssembly that the compiled loops need; absent or forbidden in some pages, which is met by plain loops. */
declare namespace WebAssembly {
  /** Compiled code, of which nothing is read here. */
  class Module {
    constructor(bytes: Uint8Array<ArrayBuffer>);
    private readonly compiled;
  }
  class Instance {
    constructor(module: Module);
    readonly exports: Readonly<Record<string, unknown>>;
  }
  interface Memory {
    readonly buffer: ArrayBuffer;
    grow(pages: number): number;
  }
}
