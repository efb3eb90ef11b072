/** What crosses the bridge: data in either case, since an Error would lose all but its message on the way. */
export type Answer<T> =
  { readonly ok: true; readonly value: T } | { readonly ok: false; readonly message: string };

/** The channel of a host call; the preload script derives the same name from the same method. */
export function channelOf(method: string): string {
  return `rungline:${method}`;
}

/** Commands of the native menu, sent to the page. */
export const COMMAND_CHANNEL = "rungline:command";
