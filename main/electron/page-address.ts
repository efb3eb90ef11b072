export const PAGE_SCHEME = "app";
export const PAGE_HOST = "rungline";
export const PAGE_ADDRESS = `${PAGE_SCHEME}://${PAGE_HOST}/index.html`;

/** Whether an address is the page's own. Node gives every address of an own scheme the origin "null", so its parts are compared. */
export function isPageAddress(address: string): boolean {
  try {
    const { protocol, host, username, password } = new URL(address);
    return protocol === `${PAGE_SCHEME}:` && host === PAGE_HOST && username === "" && password === "";
  } catch {
    return false;
  }
}
