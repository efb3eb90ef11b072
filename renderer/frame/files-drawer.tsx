import { useEffect, useRef } from "react";
import { Button } from "react-aria-components";
import { useController, useWindow } from "../store/context.ts";
import type { WindowState } from "../store/store.ts";

/** Samples and runs: a drawer over the figure, not a permanent tree. */
export function FilesDrawer({ onClose }: { readonly onClose: () => void }) {
  const controller = useController();
  const state = useWindow((one) => one);
  const panel = useRef<HTMLElement>(null);
  const { files, currentId } = state.session;
  useEffect(() => panel.current?.querySelector<HTMLElement>("[aria-current]")?.focus(), []);
  return (
    <aside
      className="drawer"
      ref={panel}
      aria-label="Files"
      id="files-drawer"
      onKeyDown={(event) => {
        if (event.key === "Escape") onClose();
      }}
    >
      <header>
        <h2>Files</h2>
        <Button className="button" onPress={() => void controller.open()}>
          Open spectra
        </Button>
        <button type="button" className="quiet" aria-label="Close the drawer" onClick={onClose}>
          ✕
        </button>
      </header>
      {files.length === 0 && <p className="hint">No file is open. Drop spectra on the window.</p>}
      <ul>
        {files.map(({ id, name }) => (
          <li key={id}>
            <button
              type="button"
              className="drawer-file"
              aria-current={id === currentId || undefined}
              onClick={() => {
                controller.choose(id);
                onClose();
              }}
            >
              <span className="drawer-name">{name}</span>
              <span className="small">{fileState(state, id)}</span>
            </button>
            <button
              type="button"
              className="quiet"
              aria-label={`Close ${name}`}
              onClick={() => controller.close(id)}
            >
              ✕
            </button>
          </li>
        ))}
      </ul>
      {files.length > 1 && (
        <footer>
          <Button className="button" onPress={() => controller.share()}>
            Use these choices for all files
          </Button>
        </footer>
      )}
    </aside>
  );
}

function fileState({ session, readings, job, refusals }: WindowState, id: string): string {
  if (job?.fileId === id) return "fitting";
  if (readings[id]?.state === "refused") return "not a spectrum";
  if (refusals[id] !== undefined) return "refused";
  const fit = session.fits[id];
  if (fit === undefined) return "not fitted";
  if (fit.choices !== session.choices[id]) return "choices changed";
  const { result } = fit.analysed;
  return result.status === "converged" ? `${result.lines.length} lines` : result.status.replace("-", " ");
}
