import { useState, type ClipboardEvent } from "react";
import { columnHead, dayNumber, factValue, temperatureIn } from "../../app/batch/index.ts";
import { formatNumber } from "../../app/report/index.ts";
import { Amount } from "../controls/choices.tsx";
import { useController, useWindow } from "../store/context.ts";
import { gather, type Gathered } from "../store/gather.ts";
import { typedColumns, typedFact, typeFacts, type TypedFact } from "../store/typed-facts.ts";

interface Column {
  /** As it stands in the choices. */
  readonly name: string;
  readonly title: string;
  /** What the header says. */
  readonly header: (one: Gathered) => string;
  /** What is wrong with a text, null where it will do. */
  readonly check: (text: string) => string | null;
  /** As it is kept. */
  readonly kept: (text: string) => string;
}

const anything = (): null => null;
const asTyped = (text: string): string => text;

const FIXED: readonly Column[] = [
  { name: "sample", title: "Sample", header: ({ named }) => named.sample, check: anything, kept: asTyped },
  { name: "batch", title: "Batch", header: ({ named }) => named.batch, check: anything, kept: asTyped },
  {
    name: "temperature",
    title: "Temperature / K",
    header: ({ named }) => (named.temperature_K === null ? "not told" : formatNumber(named.temperature_K)),
    check: (text) => {
      const value = factValue("temperature", text, ".");
      return value === null || temperatureIn(value) === null ? "a temperature in kelvin" : null;
    },
    kept: asTyped,
  },
  {
    name: "date",
    title: "Date",
    header: ({ named }) => named.date ?? "not told",
    check: (text) => (dayNumber(text) === null ? "a date as 2025-03-11" : null),
    kept: asTyped,
  },
];

function freeColumn(name: string, unit: string): Column {
  return {
    name,
    title: unit === "" ? name : `${name} / ${unit}`,
    header: () => "not told",
    check: (text) => (factValue(name, text, ".") === null ? "a number, with or without its unit" : null),
    kept: (text) => (unit === "" || !/^[-+.\d\s]*(e[-+]?\d+)?$/i.test(text) ? text : `${text} ${unit}`),
  };
}

/**
 * What the headers do not say, typed file by file: sample, batch, temperature, date, and columns of the user's own. A
 * column of a spreadsheet that is pasted into a field fills the rows below it.
 */
export function TypedTable() {
  const controller = useController();
  const session = useWindow((state) => state.session);
  const [added, setAdded] = useState<readonly { readonly name: string; readonly unit: string }[]>([]);
  const values = session.compare.choices.values ?? [];
  const seen = new Set<string>();
  const rows = gather(session).filter(
    ({ result: { source } }) => !seen.has(source.file) && seen.add(source.file),
  );
  const own = typedColumns(values);
  const columns = [
    ...FIXED,
    ...own.map((name) => freeColumn(name, added.find((one) => one.name === name)?.unit ?? "")),
    ...added.filter(({ name }) => !own.includes(name)).map(({ name, unit }) => freeColumn(name, unit)),
  ];
  const type = (changes: readonly TypedFact[], step: string): void => {
    const { choices } = session.compare;
    controller.changeCompare({ choices: { ...choices, values: typeFacts(values, changes) } }, step);
  };
  const paste = (event: ClipboardEvent, from: number, column: Column): void => {
    const lines = event.clipboardData.getData("text").replace(/\r/g, "").replace(/\n$/, "").split("\n");
    if (lines.length < 2) return;
    event.preventDefault();
    const first = columns.indexOf(column);
    const changes = lines.flatMap((line, i) => {
      const row = rows[from + i];
      if (row === undefined) return [];
      return line.split("\t").flatMap((cell, j) => {
        const into = columns[first + j];
        const text = cell.trim();
        return into === undefined || text === "" || into.check(text) !== null
          ? []
          : [{ of: row.result.source.file, name: into.name, text: into.kept(text) }];
      });
    });
    type(changes, `paste ${column.title.replace(/ \/.*/, "").toLowerCase()}`);
  };
  return (
    <div className="batches-scroll" tabIndex={0} role="group" aria-label="Typed columns">
      <table className="lines-table typed-table">
        <caption className="hidden">
          What the headers do not say, by file; a column that is pasted into a field fills the rows below
        </caption>
        <thead>
          <tr>
            <th scope="col">File</th>
            {columns.map(({ name, title }) => (
              <th key={name} scope="col">
                {title}
              </th>
            ))}
            <th scope="col">
              <Amount
                label="Name of a new column"
                value=""
                placeholder="add a column"
                width={10}
                onCommit={(text) => {
                  const head = columnHead(text);
                  const taken = columns.some((one) => one.name.toLowerCase() === head.name.toLowerCase());
                  if (head.name === "" || taken)
                    return "a name that no column has, such as growth rate (mm/h)";
                  setAdded([...added, head]);
                  return null;
                }}
              />
            </th>
          </tr>
        </thead>
        <tbody>
          {rows.map((one, i) => {
            const { file } = one.result.source;
            return (
              <tr key={file} data-file={file}>
                <th scope="row">{file}</th>
                {columns.map((column) => (
                  <td key={column.name} onPaste={(event) => paste(event, i, column)}>
                    <Amount
                      label={`${column.title} of ${file}`}
                      value={typedFact(values, file, column.name)}
                      placeholder={column.header(one)}
                      width={8}
                      onCommit={(text) => {
                        const wrong = text === "" ? null : column.check(text);
                        if (wrong !== null) return wrong;
                        type(
                          [{ of: file, name: column.name, text: text === "" ? "" : column.kept(text) }],
                          `${column.title.replace(/ \/.*/, "").toLowerCase()} of ${file}`,
                        );
                        return null;
                      }}
                    />
                  </td>
                ))}
                <td />
              </tr>
            );
          })}
        </tbody>
      </table>
    </div>
  );
}
