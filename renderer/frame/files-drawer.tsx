import { useEffect, useRef, useState } from "react";
import { Button } from "react-aria-components";
import { unfittedFiles } from "../store/gather.ts";
import { useController, useWindow } from "../store/context.ts";
import type { WindowState } from "../store/store.ts";

/** Samples and runs: a drawer over the figure, not a permanent tree. */
export function FilesDrawer({ onClose }: { readonly onClose: () => void }) {
  const controller = useController();
  const state = useWindow((one) => one);
  const panel = useRef<HTMLElement>(null);
  const [picked, setPicked] = useState<readonly string[]>([]);
  const { files, currentId, series, results } = state.session;
  const left = unfittedFiles(state.session).length;
  const marked = picked.filter((id) => files.some((file) => file.id === id));
  const memberOf = (id: string): readonly string[] | null => series.find((one) => one.includes(id)) ?? null;
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
          <li key={id} data-series={memberOf(id) === null ? undefined : "part"}>
            {files.length > 1 && (
              <input
                type="checkbox"
                className="drawer-pick"
                aria-label={`${name} for a power series`}
                title="for a power series"
                checked={marked.includes(id)}
                onChange={(event) =>
                  setPicked(event.target.checked ? [...marked, id] : marked.filter((one) => one !== id))
                }
              />
            )}
            <button
              type="button"
              className="drawer-file"
              aria-current={id === currentId || undefined}
              onClick={() => {
                controller.choose(id);
                onClose();
              }}
            >
              <span className="drawer-name" title={name}>
                {name}
              </span>
              <span className="small">
                {fileState(state, id)}
                {memberOf(id) !== null &&
                  `, ${memberOf(id)!.indexOf(id) + 1} of ${memberOf(id)!.length} in a power series`}
              </span>
            </button>
            {memberOf(id)?.[0] === id && (
              <button
                type="button"
                className="quiet"
                aria-label={`Part the power series of ${name}`}
                title="Part the power series"
                onClick={() => controller.partSeries(id)}
              >
                part
              </button>
            )}
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
        {results.map(({ id, result }) => (
          <li key={`result ${id}`}>
            <button
              type="button"
              className="drawer-file"
              onClick={() => {
                controller.openSample(id);
                onClose();
              }}
            >
              <span className="drawer-name">{id}</span>
              <span className="small">result of {result.source.file}, without its spectrum</span>
            </button>
            <button
              type="button"
              className="quiet"
              aria-label={`Close result ${id}`}
              onClick={() => controller.closeResult(id)}
            >
              ✕
            </button>
          </li>
        ))}
      </ul>
      {files.length > 1 && (
        <footer>
          <Button
            className="button"
            isDisabled={marked.length < 2}
            onPress={() => {
              controller.markSeries(marked);
              onClose();
            }}
          >
            {marked.length > 1
              ? `One power series of ${marked.length}`
              : "One power series of the ticked files"}
          </Button>
          <Button
            className="button"
            isDisabled={left === 0 || state.job !== null}
            onPress={() => {
              controller.show("batches");
              void controller.fitAll();
              onClose();
            }}
          >
            Fit all{left === 0 ? "" : ` ${left}`}
          </Button>
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
