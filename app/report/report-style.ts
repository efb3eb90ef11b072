/** The look of a report: one sheet for screen and A4 print, fonts of the system. */
export const REPORT_STYLE = `
:root { --ink: #1c2126; --muted: #5a636c; --line: #c9cdd0; --accent: #b23a1e; color-scheme: light; }
* { box-sizing: border-box; }
html { background: #f3f4f3; }
body { margin: 0 auto; max-width: 66rem; padding: 2.5rem 3rem 4rem; background: #fff; color: var(--ink);
  font: 15px/1.5 "IBM Plex Sans", "Helvetica Neue", Arial, "Liberation Sans", "DejaVu Sans", sans-serif;
  font-variant-numeric: tabular-nums; }
h1 { font-size: 1.75rem; line-height: 1.2; margin: 0 0 .4rem; font-weight: 600; }
h2 { font-size: 1.3rem; margin: 3rem 0 .8rem; padding-top: .8rem; border-top: 2px solid var(--ink); font-weight: 600; }
h3 { font-size: 1rem; margin: 1.8rem 0 .5rem; font-weight: 600; }
p { margin: .4rem 0 .8rem; max-width: 46rem; }
.lead { color: var(--muted); }
.banner { border-left: 3px solid var(--accent); padding: .3rem .8rem; font-weight: 600; }
nav ol { columns: 3 14rem; padding-left: 1.4rem; margin: .6rem 0; }
a { color: inherit; text-decoration-color: var(--line); }
dl { display: grid; grid-template-columns: 9rem 1fr; gap: .15rem 1rem; margin: .6rem 0 1rem; }
dt { color: var(--muted); }
dd { margin: 0; overflow-wrap: anywhere; }
.key { display: grid; grid-template-columns: repeat(auto-fit, minmax(12rem, 1fr)); gap: .8rem 1.5rem; margin: 1rem 0 1.4rem; }
.key div { border-top: 1px solid var(--line); padding-top: .3rem; }
.key span { display: block; color: var(--muted); font-size: .85rem; }
.key b { font-size: 1.1rem; font-weight: 600; white-space: nowrap; }
.figures { display: flex; flex-wrap: wrap; gap: 1.2rem 1.5rem; align-items: flex-start; }
figure { margin: 0; break-inside: avoid; max-width: 100%; }
figure svg { display: block; max-width: 100%; height: auto; }
figure.column { width: calc(50% - .75rem); }
figure.wide { width: 100%; }
figure svg { width: 100%; }
figcaption { font-size: .82rem; line-height: 1.4; color: var(--muted); margin-top: .3rem; }
figcaption b { color: var(--ink); font-weight: 600; }
.table { overflow-x: auto; margin: 1rem 0 1.4rem; }
table { border-collapse: collapse; font-size: .82rem; line-height: 1.35; }
caption { text-align: left; font-weight: 600; padding-bottom: .35rem; font-size: .9rem; }
thead th { border-top: 1.5px solid var(--ink); border-bottom: .75px solid var(--ink); font-weight: 400; vertical-align: bottom; text-align: left; }
th, td { padding: .18rem .9rem .18rem 0; vertical-align: top; }
th:last-child, td:last-child { padding-right: 0; }
tbody tr:last-child td { border-bottom: 1.5px solid var(--ink); }
td.n, th.n { text-align: right; }
td.n, td.q { white-space: nowrap; }
.remark { font-size: .8rem; color: var(--muted); margin: .3rem 0; }
ul.notes { list-style: none; padding: 0; margin: .5rem 0; columns: 2 24rem; column-gap: 2rem; }
ul.notes li { break-inside: avoid; margin-bottom: .7rem; font-size: .85rem; line-height: 1.4; padding-left: .7rem; border-left: 2px solid var(--line); }
ul.notes li.doubt { border-left-color: var(--accent); }
ul.notes b { font-weight: 600; }
code, pre { font-family: "IBM Plex Mono", Menlo, Consolas, "Liberation Mono", "DejaVu Sans Mono", monospace; font-size: .78rem; }
pre { columns: 3 16rem; white-space: pre-wrap; overflow-wrap: anywhere; margin: .6rem 0; line-height: 1.35; }
.hash { font-size: .72rem; overflow-wrap: anywhere; }
.caution { border: 1px solid var(--accent); padding: .5rem .8rem; max-width: 46rem; }
@media (max-width: 46rem) { figure.column { width: 100%; } body { padding: 1.2rem; } dl { grid-template-columns: 1fr; } dd { margin-bottom: .4rem; } }
@page { size: A4; margin: 15mm 14mm 16mm;
  @bottom-right { content: counter(page); font: 8pt "IBM Plex Sans", Arial, "DejaVu Sans", sans-serif; color: #5a636c; } }
@media print {
  html { background: none; }
  body { max-width: none; padding: 0; font-size: 9.5pt; line-height: 1.4; }
  h1 { font-size: 17pt; } h2 { font-size: 13pt; } h3 { font-size: 10.5pt; }
  h2, h3, caption { break-after: avoid; }
  section.sample { break-before: page; }
  section.sample h2 { margin-top: 0; }
  figure.column { width: 85mm; } figure.wide { width: 178mm; }
  .figures { gap: 5mm 9mm; }
  .table { overflow: visible; }
  figcaption, .remark { font-size: 8pt; }
  table { font-size: 7.2pt; }
  caption { font-size: 8.5pt; }
  th, td { padding-right: .55rem; }
  thead { display: table-header-group; }
  tr { break-inside: avoid; }
  code, pre { font-size: 7pt; }
  ul.notes li { font-size: 8.5pt; }
  a { text-decoration: none; }
}
`;
