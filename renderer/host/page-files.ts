import type { NamedBytes } from "../../app/tasks/index.ts";

/** Ask for files with the page's own file input; empty when the user changes their mind. */
export function askForFiles(page: Document): Promise<readonly NamedBytes[]> {
  return new Promise((resolve) => {
    const input = page.createElement("input");
    input.type = "file";
    input.multiple = true;
    input.hidden = true;
    input.addEventListener("change", () => {
      input.remove();
      void readFiles(input.files ?? []).then(resolve);
    });
    input.addEventListener("cancel", () => {
      input.remove();
      resolve([]);
    });
    page.body.append(input);
    input.click();
  });
}

export async function readFiles(files: Iterable<File> | ArrayLike<File>): Promise<readonly NamedBytes[]> {
  return Promise.all(
    Array.from(files).map(async (file) => ({
      name: file.name,
      bytes: new Uint8Array(await file.arrayBuffer()),
    })),
  );
}

/** Offer a file as a download of the page. */
export function offerDownload(page: Document, name: string, bytes: Uint8Array): void {
  const link = page.createElement("a");
  const address = URL.createObjectURL(new Blob([new Uint8Array(bytes)]));
  link.href = address;
  link.download = name;
  link.hidden = true;
  page.body.append(link);
  link.click();
  link.remove();
  setTimeout(() => URL.revokeObjectURL(address), 10_000);
}
