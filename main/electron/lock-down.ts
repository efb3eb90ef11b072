import type { Session, WebContents } from "electron";
import { isPageAddress } from "./page-address.ts";

/** The page stays the page: no navigation, no new window, no embedded browser, whatever runs in it. */
export function lockDownContents(contents: WebContents): void {
  const refuse = (event: { preventDefault(): void }): void => event.preventDefault();
  contents.on("will-navigate", refuse);
  contents.on("will-frame-navigate", refuse);
  contents.on("will-redirect", refuse);
  contents.on("will-attach-webview", refuse);
  contents.setWindowOpenHandler(() => ({ action: "deny" }));
}

/** No permission is ever granted, and no request leaves for anywhere but the page's own files. */
export function lockDownSession(session: Session, devTools: boolean): void {
  session.setPermissionRequestHandler((_contents, _permission, decide) => decide(false));
  session.setPermissionCheckHandler(() => false);
  session.setDevicePermissionHandler(() => false);
  session.webRequest.onBeforeRequest(({ url }, decide) => decide({ cancel: !mayLoad(url, devTools) }));
}

function mayLoad(address: string, devTools: boolean): boolean {
  if (address.startsWith("data:")) return true;
  if (address.startsWith("blob:")) return isPageAddress(address.slice("blob:".length));
  if (devTools && address.startsWith("devtools:")) return true;
  return isPageAddress(address);
}
