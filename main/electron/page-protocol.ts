import { answerPage, plainAnswer, type PageAnswer, type PageFiles } from "../page/index.ts";
import type { ElectronApi } from "./electron-api.ts";
import { isPageAddress, PAGE_SCHEME } from "./page-address.ts";

/** Must run before the application is ready: only a standard, secure scheme may hold module workers and shared memory. */
export function registerPageScheme(protocol: ElectronApi["protocol"]): void {
  protocol.registerSchemesAsPrivileged([
    { scheme: PAGE_SCHEME, privileges: { standard: true, secure: true, supportFetchAPI: true } },
  ]);
}

export function servePage(protocol: ElectronApi["protocol"], files: PageFiles): void {
  protocol.handle(PAGE_SCHEME, async (request) => {
    const answer = await answerRequest(request, files);
    return new Response(new Uint8Array(answer.body), {
      status: answer.status,
      headers: { ...answer.headers },
    });
  });
}

async function answerRequest(request: Request, files: PageFiles): Promise<PageAnswer> {
  if (request.method !== "GET") return plainAnswer(405, "Only reading is offered here.");
  if (!isPageAddress(request.url)) return plainAnswer(404, "There is nothing at this address.");
  return answerPage(files, new URL(request.url).pathname).catch(() =>
    plainAnswer(500, "Rungline could not read what was asked for."),
  );
}
