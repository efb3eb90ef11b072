/** What the window asks of the shell around it; Electron answers over its bridge, the loopback shell over HTTP. */
export interface Host {
  readonly shell: "electron" | "loopback";
  about(): Promise<HostFacts>;
  /** Files and choices named when the window was opened; empty where none were. */
  startFiles(): Promise<StartFiles>;
  /** The demo run that ships with the application. */
  demoFiles(): Promise<readonly NamedBytes[]>;
  /** The demo power series; empty where a shell does not bring one. */
  demoSeries(): Promise<readonly NamedBytes[]>;
  /** Ask the user for spectra; empty when they change their mind. */
  openFiles(): Promise<readonly NamedBytes[]>;
  /** Offer a file to keep; returns the name it was kept under, or null when the user changed their mind. */
  saveFile(suggestedName: string, bytes: Uint8Array): Promise<string | null>;
}

export interface HostFacts {
  readonly version: string;
  /** Runtime in words, for the provenance of a result, e.g. `v20.20.2`. */
  readonly node: string;
}

export interface NamedBytes {
  readonly name: string;
  readonly bytes: Uint8Array;
}

export interface StartFiles {
  readonly files: readonly NamedBytes[];
  /** Protocol choices as written, `{}` where none were. */
  readonly choices: unknown;
}
