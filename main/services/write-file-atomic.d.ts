/** The part of write-file-atomic that is used; the package has no types of its own. */
declare module "write-file-atomic" {
  export default function writeFileAtomic(file: string, data: string | Uint8Array): Promise<void>;
}
