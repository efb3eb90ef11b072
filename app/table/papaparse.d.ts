/** The subset of papaparse used here; its published types would pull Node's types into app/ (DEVELOPERS.md). */
declare module "papaparse" {
  export interface ParseConfig {
    /** One or more characters between fields; always handed in, never guessed by the library. */
    readonly delimiter: string;
    readonly newline: "\n";
    readonly quoteChar?: string;
    /** Split without looking at quotes; only for text that holds none. */
    readonly fastMode?: boolean;
  }
  export interface ParseError {
    readonly type: string;
    readonly code: string;
    readonly message: string;
    readonly row?: number;
  }
  export interface ParseResult {
    readonly data: string[][];
    readonly errors: readonly ParseError[];
  }
  const Papa: { parse(text: string, config: ParseConfig): ParseResult };
  export default Papa;
}
