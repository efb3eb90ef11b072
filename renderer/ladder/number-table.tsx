import { Subscripts } from "./subscripts.tsx";

interface Props {
  readonly title: string;
  readonly head: readonly string[];
  /** The first cell of a row names it. */
  readonly rows: readonly (readonly string[])[];
  readonly remark?: string;
}

/** A few numbers side by side in the ledger. */
export function NumberTable({ title, head, rows, remark }: Props) {
  return (
    <section className="ledger-section" aria-label={title}>
      <h3>{title}</h3>
      <table className="number-table">
        <thead>
          <tr>
            {head.map((word, i) =>
              word === "" ? (
                <td key={i} />
              ) : (
                <th key={i} scope="col">
                  <Subscripts text={word} />
                </th>
              ),
            )}
          </tr>
        </thead>
        <tbody>
          {rows.map(([name, ...cells]) => (
            <tr key={name}>
              <th scope="row">
                <Subscripts text={name ?? ""} />
              </th>
              {cells.map((cell, i) => (
                <td key={i}>{cell}</td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
      {remark !== undefined && <p className="small table-remark">{remark}</p>}
    </section>
  );
}
