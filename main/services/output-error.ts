/** A file could not be written; `message` names it and says why. */
export class OutputError extends Error {
  readonly file: string;

  constructor(file: string, cause: unknown) {
    super(`${file}: ${reasonInWords(cause)}`);
    this.name = "OutputError";
    this.file = file;
  }
}

/** What the operating system said, in plain words. */
export function reasonInWords(cause: unknown): string {
  const code = typeof cause === "object" && cause !== null && "code" in cause ? String(cause.code) : "";
  switch (code) {
    case "ENOENT":
      return "no such file or folder";
    case "EACCES":
    case "EPERM":
      return "no permission";
    case "EISDIR":
      return "is a folder";
    case "ENOTDIR":
      return "a part of the path is not a folder";
    case "ENOSPC":
      return "no space left on the disk";
    case "EROFS":
      return "the disk is read-only";
    case "EPIPE":
      return "the reader has gone away";
    case "ENAMETOOLONG":
      return "the name is too long";
    default:
      return cause instanceof Error ? cause.message : String(cause);
  }
}
