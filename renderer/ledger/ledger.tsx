import { Button, Dialog, DialogTrigger, Popover } from "react-aria-components";
import { roundSigma, scaleQuantity } from "../../app/report/index.ts";
import { plainText, valueText, withMinus } from "./value-text.ts";
import type { LedgerEntry, LedgerSection, LedgerSymbol } from "./ledger-entry.ts";

/** The numbers of a stage in the order a paper would give them; each opens its card. */
export function Ledger({ sections }: { readonly sections: readonly LedgerSection[] }) {
  return (
    <div className="ledger">
      {sections.map(({ title, entries, remark }) => (
        <section key={title} className="ledger-section" aria-label={title}>
          <h3>{title}</h3>
          {entries.map((entry) => (
            <Row key={entry.id} entry={entry} />
          ))}
          {remark !== undefined && <p className="small ledger-remark">{remark}</p>}
        </section>
      ))}
    </div>
  );
}

function Row({ entry }: { readonly entry: LedgerEntry }) {
  const text = valueText(entry);
  const doubt = entry.notes.some((note) => note.level === "doubt");
  return (
    <DialogTrigger>
      <Button className="ledger-row" data-main={entry.main || undefined} data-entry={entry.id}>
        <Symbol symbol={entry.symbol} />
        <span className="ledger-name">{entry.name}</span>
        <span className="ledger-value">
          {text.value}
          {text.unit !== "" && <span className="ledger-unit"> {text.unit}</span>}
        </span>
        <span className="ledger-mark">
          {doubt && (
            <span className="mark-doubt" role="img" aria-label="in doubt">
              ▲
            </span>
          )}
        </span>
      </Button>
      <Popover className="card" placement="left top" offset={6}>
        <Dialog className="card-dialog" aria-label={entry.name}>
          <Card entry={entry} />
        </Dialog>
      </Popover>
    </DialogTrigger>
  );
}

function Card({ entry }: { readonly entry: LedgerEntry }) {
  const { value, unit } = valueText(entry);
  const whole = unit === "" ? value : `${value} ${unit}`;
  const { low, high } = scaleQuantity(entry.quantity, entry.scale);
  return (
    <>
      <header>
        <Symbol symbol={entry.symbol} />
        <strong>{entry.name}</strong>
      </header>
      <p className="card-value">{whole}</p>
      {entry.plain === undefined && entry.quantity.value !== null && entry.quantity.sigma === null && (
        <p className="small">its uncertainty is not known</p>
      )}
      {entry.plain === undefined && entry.quantity.sigma !== 0 && low !== null && high !== null && (
        <p className="small">
          interval {withMinus(endText(low, entry))} to {withMinus(endText(high, entry))} {unit}
        </p>
      )}
      <dl>
        <dt>What it is</dt>
        <dd>{entry.card.definition}</dd>
        <dt>From</dt>
        <dd className="card-formula">
          <Formula text={entry.card.formula} />
        </dd>
        <dt>Source</dt>
        <dd>{entry.card.source}</dd>
        {entry.correlations.length > 0 && (
          <>
            <dt>Correlation</dt>
            <dd className="tabular">
              {entry.correlations.map((one) => `${one.with} ${withMinus(one.value.toFixed(2))}`).join(", ")}
            </dd>
          </>
        )}
        {entry.table !== undefined && (
          <>
            <dt>{entry.table.caption}</dt>
            <dd>
              <table className="card-table">
                <thead>
                  <tr>
                    {entry.table.head.map((word) => (
                      <th key={word} scope="col">
                        {word}
                      </th>
                    ))}
                  </tr>
                </thead>
                <tbody>
                  {entry.table.rows.map((row, i) => (
                    <tr key={i}>
                      {row.map((cell, k) => (
                        <td key={k}>{cell}</td>
                      ))}
                    </tr>
                  ))}
                </tbody>
              </table>
            </dd>
          </>
        )}
        {entry.notes.map((note) => (
          <div key={note.code + note.about}>
            <dt>{note.level === "doubt" ? "▲ Doubt" : "Assumed"}</dt>
            <dd>
              {note.text.replace(/\.$/, "")}.
              {note.remedy !== "" && <> Remedy: {note.remedy.replace(/\.$/, "")}.</>}
            </dd>
          </div>
        ))}
        <dt>To better it</dt>
        <dd>{entry.card.improve}</dd>
      </dl>
      <Button className="button" onPress={() => void navigator.clipboard?.writeText(plainText(whole))}>
        Copy
      </Button>
    </>
  );
}

/** An end of the interval, one digit finer than the value. */
function endText(end: number, entry: LedgerEntry): string {
  const sigma = (entry.quantity.sigma ?? 0) * entry.scale;
  return sigma > 0 ? end.toFixed(Math.min(12, Math.max(0, 1 - roundSigma(sigma).place))) : String(end);
}

/** `E_n` with its subscript lowered. */
function Formula({ text }: { readonly text: string }) {
  return text
    .split(/(_\{[^}]*\}|_[\p{L}\p{N}∞])/u)
    .map((part, i) => (part.startsWith("_") ? <sub key={i}>{part.replace(/[_{}]/g, "")}</sub> : part));
}

export function Symbol({ symbol }: { readonly symbol: LedgerSymbol }) {
  return (
    <span className="symbol">
      <i>{symbol.letter}</i>
      {symbol.below !== undefined && <sub>{symbol.below}</sub>}
    </span>
  );
}
