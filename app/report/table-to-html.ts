import type { Cell, DataColumn, DataTable } from "./data-table.ts";
import { formatNumber, formatQuantity, withoutError } from "./format-quantity.ts";
import { escapeMarkup, richToHtml } from "./rich-text.ts";

/** A no-break thin space between groups of digits. */
const GROUP_SPACE = "\u202f";

export function tableToHtml(table: DataTable): string {
  const head = table.columns
    .map((column) => `<th scope="col"${sideOf(column)}>${headOf(column)}</th>`)
    .join("");
  const rows = table.rows
    .map(
      (row) =>
        `<tr>${row.map((cell, i) => `<td${sideOf(table.columns[i]!, cell)}>${cellToHtml(cell)}</td>`).join("")}</tr>`,
    )
    .join("\n");
  const remarks = table.remarks.map((remark) => `<p class="remark">${richToHtml(remark)}</p>`).join("");
  return (
    `<div class="table"><table><caption>${richToHtml(table.title)}</caption>` +
    `<thead><tr>${head}</tr></thead>\n<tbody>${rows}</tbody></table>${remarks}</div>`
  );
}

function sideOf(column: DataColumn, cell?: Cell): string {
  return column.kind === "numbers" ? ' class="n"' : cell?.kind === "quantity" ? ' class="q"' : "";
}

function headOf({ head, unit }: DataColumn): string {
  return unit === "" ? richToHtml(head) : `${richToHtml(head)} / ${richToHtml(unit)}`;
}

export function cellToHtml(cell: Cell): string {
  switch (cell.kind) {
    case "text":
      // A power of ten stays with its number.
      return escapeMarkup(cell.text.replaceAll(" × 10", "\u00a0×\u00a010"));
    case "number":
      return escapeMarkup(formatNumber(cell.value, cell.digits).replace(/^-/, "−"));
    case "quantity":
      return quantityToHtml(cell);
  }
}

function quantityToHtml({ quantity, unit, mark }: Cell & { kind: "quantity" }): string {
  const { value, sigma, low, high } = quantity;
  // In a column the words for an unknown error would be longer than the number.
  const text =
    unit === null && value !== null && sigma === null
      ? `${withoutError(value)}(?)`
      : formatQuantity(value, sigma, unit ?? "", {
          low,
          high,
          groupSpace: GROUP_SPACE,
          exactWord: "held",
        });
  return escapeMarkup(text.replace(/^-/, "−") + mark);
}
