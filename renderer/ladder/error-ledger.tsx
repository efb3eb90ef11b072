import type { RunglineResult } from "../../app/protocol/index.ts";
import { Ledger } from "../ledger/ledger.tsx";
import type { LedgerSection } from "../ledger/ledger-entry.ts";
import { fitSection } from "../lines/lines-ledger.ts";
import { DrawChoices } from "./draw-choices.tsx";
import type { ErrorView } from "./error-figure.ts";
import {
  correlationTable,
  drawnTable,
  intervalTable,
  strongestTable,
  type TableText,
} from "./error-tables.ts";
import { InfluenceTable } from "./influence-table.tsx";
import { ladderLedger } from "./ladder-ledger.ts";
import { NumberTable } from "./number-table.tsx";
import { conditionSection, residualSection } from "./residual-section.ts";

/** The numbers beside each way to look at the errors. */
export function ErrorLedger({ result, view }: { readonly result: RunglineResult; readonly view: ErrorView }) {
  const table = (text: TableText | null) => text !== null && <NumberTable {...text} />;
  switch (view) {
    case "regions":
      return (
        <>
          <Ledger sections={ladderLedger(result).slice(0, 1)} />
          {table(correlationTable(result))}
          <Hint>
            A region holds the two parameters together at the level it names; the bars are one standard error
            of each alone. It follows the likelihood, so it bends where the law does.
          </Hint>
        </>
      );
    case "profiles":
      return (
        <>
          {table(intervalTable(result))}
          <Hint>
            Each point holds one parameter and fits the others again. Where the curve leaves the dashed
            parabola the interval is not symmetric, and its ends are quoted instead of ± σ.
          </Hint>
        </>
      );
    case "influence":
      return (
        <>
          <InfluenceTable result={result} />
          <Hint>
            Changes in standard errors when the line is left out. A leverage near 1 means that the fitted law
            follows this line alone.
          </Hint>
        </>
      );
    case "correlations":
      return (
        <>
          {table(correlationTable(result))}
          {table(strongestTable(result))}
          <Ledger sections={only(conditionSection(result))} />
        </>
      );
    case "residuals":
      return <Ledger sections={[...only(fitSection(result)), ...only(residualSection(result))]} />;
    case "draws":
      return (
        <>
          <DrawChoices />
          {table(drawnTable(result))}
          <Hint>
            Every drawn spectrum is fitted again, lines, tail and laws. The protocol keeps number and seed:
            the command line repeats the same draws to the last bit.
          </Hint>
        </>
      );
  }
}

function Hint({ children }: { readonly children: React.ReactNode }) {
  return <p className="small ledger-hint">{children}</p>;
}

function only(section: LedgerSection | null): readonly LedgerSection[] {
  return section === null ? [] : [section];
}
