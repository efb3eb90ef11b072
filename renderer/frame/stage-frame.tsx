import type { ReactNode } from "react";
import { Group, Panel, Separator } from "react-resizable-panels";

interface Props {
  readonly choices: ReactNode;
  readonly tools: ReactNode;
  readonly figure: ReactNode;
  readonly ledger: ReactNode;
  /** A ledger that holds a table needs more room. */
  readonly wide?: boolean;
}

/** From here on the style sheet sets larger type. */
const LARGE_WINDOW = 1600;

/** Figure in the middle, as large as can be, and the ledger to its right; the border between them moves. */
export function StageFrame({ choices, tools, figure, ledger, wide = false }: Props) {
  const width = (wide ? 400 : 316) * (window.innerWidth >= LARGE_WINDOW ? 1.1 : 1);
  return (
    <Group orientation="horizontal" id={wide ? "stage-wide" : "stage"} className="stage-group">
      <Panel id="middle" minSize="40%">
        <div className="middle">
          {choices}
          {tools !== null && <div className="tools">{tools}</div>}
          <div className="figure-place">{figure}</div>
        </div>
      </Panel>
      <Separator className="split split-upright" aria-label="Width of the ledger" />
      <Panel id="ledger" defaultSize={`${width}px`} minSize="240px" groupResizeBehavior="preserve-pixel-size">
        <aside className="ledger-place" aria-label="Ledger" tabIndex={0}>
          {ledger}
        </aside>
      </Panel>
    </Group>
  );
}
