import { useEffect, useRef } from "react";

/**
 * The report as it will be kept, in a tree of its own: its style reaches nothing else, and the content policy of the
 * page, which refuses styles in a frame's text, lets a sheet that is made by the page stand.
 */
export function ReportPreview({ html }: { readonly html: string }) {
  const host = useRef<HTMLDivElement>(null);
  useEffect(() => {
    const root = host.current!.shadowRoot ?? host.current!.attachShadow({ mode: "open" });
    // Taken out before parsing, or the policy would refuse it aloud.
    const style = /<style>([\s\S]*?)<\/style>/.exec(html);
    const report = new DOMParser().parseFromString(html.replace(style?.[0] ?? "", ""), "text/html");
    const sheet = new CSSStyleSheet();
    sheet.replaceSync(inOwnTree(style?.[1] ?? ""));
    root.adoptedStyleSheets = [sheet];
    const body = document.createElement("div");
    body.className = "report-body";
    for (const node of report.body.childNodes)
      if (node.nodeName !== "SCRIPT") body.append(document.importNode(node, true));
    // What scrolls must be reached by keys.
    for (const table of body.querySelectorAll<HTMLElement>(".table")) table.tabIndex = 0;
    body.addEventListener("click", (event) => {
      const link = (event.target as Element).closest('a[href^="#"]');
      if (link === null) return;
      event.preventDefault();
      root.getElementById(link.getAttribute("href")!.slice(1))?.scrollIntoView();
    });
    root.replaceChildren(body);
  }, [html]);
  return <div ref={host} className="report-host" />;
}

/** Rules for page and body to rules for the tree. */
function inOwnTree(style: string): string {
  return style
    .replaceAll(":root", ":host")
    .replace(/(^|[\s{}])html\s*\{/g, "$1:host {")
    .replace(/(^|[\s{}])body\s*\{/g, "$1.report-body {");
}
