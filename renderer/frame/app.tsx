import { useEffect, useRef, useState, type DragEvent } from "react";
import { Button, Menu, MenuItem, MenuTrigger, Popover } from "react-aria-components";
import { BatchesStage } from "../batches/batches-stage.tsx";
import { readFiles } from "../host/page-files.ts";
import { LadderStage } from "../ladder/ladder-stage.tsx";
import { LinesStage } from "../lines/lines-stage.tsx";
import type { FigureHandle } from "../plot/figure.tsx";
import { PowerStage } from "../power/power-stage.tsx";
import { ReadStage } from "../read/read-stage.tsx";
import { RecordStage } from "../record/record-stage.tsx";
import { RungStrip } from "../rungs/rung-strip.tsx";
import {
  currentComparison,
  currentFile,
  currentFit,
  currentPower,
  useController,
  useUndo,
  useWindow,
} from "../store/context.ts";
import type { ThemeChoice } from "../store/store.ts";
import { FilesDrawer } from "./files-drawer.tsx";
import { NotesLine } from "./notes-line.tsx";
import { StagePath } from "./stage-path.tsx";
import { useThemeOfPage } from "./theme.ts";

/** The window: path on top, ladder to the left, stage in the middle, notes below. */
export function App() {
  const controller = useController();
  const stage = useWindow((state) => state.stage);
  const start = useWindow((state) => state.start);
  const fitting = useWindow((state) => state.job !== null);
  const drawer = useWindow((state) => state.drawer);
  const [dropping, setDropping] = useState(false);
  const figure = useRef<FigureHandle>(null);
  const filesButton = useRef<HTMLButtonElement>(null);
  useThemeOfPage();

  useEffect(() => {
    const press = (event: KeyboardEvent): void => {
      if (!(event.ctrlKey || event.metaKey) || event.altKey) return;
      const key = event.key.toLowerCase();
      const typing = event.target instanceof HTMLInputElement;
      if (key === "z" && !typing) {
        event.preventDefault();
        if (event.shiftKey) controller.redo();
        else controller.undo();
      } else if (key === "y" && !typing) {
        event.preventDefault();
        controller.redo();
      } else if (key === "o") {
        event.preventDefault();
        void controller.open();
      } else if (key === "s") {
        event.preventDefault();
        void controller.saveShown();
      }
    };
    addEventListener("keydown", press);
    return () => removeEventListener("keydown", press);
  }, [controller]);

  const drop = (event: DragEvent): void => {
    event.preventDefault();
    setDropping(false);
    void readFiles(event.dataTransfer.files).then((files) => controller.add(files));
  };

  return (
    <div
      className="window"
      data-state={start === "ready" ? (fitting ? "fitting" : "ready") : start}
      data-stage={stage}
      onDragOver={(event) => {
        event.preventDefault();
        setDropping(true);
      }}
      onDragLeave={(event) => {
        if (event.currentTarget === event.target) setDropping(false);
      }}
      onDrop={drop}
    >
      <header className="top">
        <h1 className="name">Rungline</h1>
        <FilesButton
          ref={filesButton}
          open={drawer}
          onToggle={() => (drawer ? controller.closeDrawer() : controller.openDrawer())}
        />
        <StagePath />
        <UndoButtons />
        <SaveMenu figure={figure} />
        <ThemeButton />
      </header>
      <RungStrip />
      <main className="stage" aria-label={stage} data-stage={stage}>
        {stage === "read" && <ReadStage figureRef={figure} />}
        {stage === "lines" && <LinesStage figureRef={figure} />}
        {stage === "ladder" && <LadderStage figureRef={figure} />}
        {stage === "power" && <PowerStage figureRef={figure} />}
        {stage === "batches" && <BatchesStage figureRef={figure} />}
        {stage === "record" && <RecordStage />}
        {drawer && (
          <FilesDrawer
            onClose={() => {
              controller.closeDrawer();
              filesButton.current?.focus();
            }}
          />
        )}
        {dropping && (
          <div className="drop-hint">
            Drop spectra to read them, results to compare them, or a protocol to use its choices
          </div>
        )}
      </main>
      <NotesLine />
    </div>
  );
}

function FilesButton({
  ref,
  open,
  onToggle,
}: {
  readonly ref: React.Ref<HTMLButtonElement>;
  readonly open: boolean;
  readonly onToggle: () => void;
}) {
  const file = useWindow(currentFile);
  const count = useWindow((state) => state.session.files.length);
  const place = useWindow(({ session }) => session.files.findIndex(({ id }) => id === session.currentId));
  return (
    <button
      ref={ref}
      type="button"
      className="files-button"
      aria-expanded={open}
      aria-controls="files-drawer"
      onClick={onToggle}
    >
      <span className="files-name" title={file?.name}>
        {file?.name ?? "No file"}
      </span>
      <span className="small">{count > 1 ? `${place + 1} of ${count} files` : "files"} ▾</span>
    </button>
  );
}

function UndoButtons() {
  const controller = useController();
  const { undo, redo } = useUndo();
  return (
    <div className="undo" role="group" aria-label="Undo and redo">
      <button
        type="button"
        className="icon"
        aria-label={undo === null ? "Nothing to undo" : `Undo: ${undo}`}
        title={undo === null ? "Nothing to undo" : `Undo: ${undo} (Ctrl+Z)`}
        data-action="undo"
        disabled={undo === null}
        onClick={() => controller.undo()}
      >
        <svg viewBox="0 0 16 16" width="16" height="16" aria-hidden="true">
          <path d="M6 3L2.5 6.5L6 10M3 6.5h6.5a3.5 3.5 0 0 1 0 7H7" />
        </svg>
      </button>
      <button
        type="button"
        className="icon"
        aria-label={redo === null ? "Nothing to redo" : `Redo: ${redo}`}
        title={redo === null ? "Nothing to redo" : `Redo: ${redo} (Ctrl+Shift+Z)`}
        data-action="redo"
        disabled={redo === null}
        onClick={() => controller.redo()}
      >
        <svg viewBox="0 0 16 16" width="16" height="16" aria-hidden="true">
          <path d="M10 3l3.5 3.5L10 10M13 6.5H6.5a3.5 3.5 0 0 0 0 7H9" />
        </svg>
      </button>
    </div>
  );
}

const SAVED = [
  { id: "result", text: "Result", kind: "JSON, Ctrl+S" },
  { id: "protocol", text: "Protocol", kind: "JSON" },
  { id: "svg", text: "Figure", kind: "SVG" },
  { id: "png", text: "Figure", kind: "PNG" },
] as const;

function SaveMenu({ figure }: { readonly figure: React.RefObject<FigureHandle | null> }) {
  const controller = useController();
  const fitted = useWindow(
    (state) =>
      (state.stage === "power"
        ? currentPower(state)
        : state.stage === "batches"
          ? currentComparison(state)
          : currentFit(state)) !== null,
  );
  const file = useWindow(currentFile);
  const stage = useWindow((state) => state.stage);
  const saveFigure = async (format: "svg" | "png"): Promise<void> => {
    const bytes = await figure.current?.image(format);
    if (bytes === undefined) return;
    const base =
      stage === "batches" ? "comparison" : `${(file?.name ?? "figure").replace(/\.[^.]+$/, "")}-${stage}`;
    await controller.save(`${base}.${format}`, bytes);
  };
  return (
    <MenuTrigger>
      <Button className="button" isDisabled={file === null && !fitted}>
        Save
      </Button>
      <Popover className="menu-place" placement="bottom end">
        <Menu
          className="menu"
          aria-label="Save"
          disabledKeys={[
            ...(fitted ? [] : ["result"]),
            ...(fitted && stage !== "batches" ? [] : ["protocol"]),
            ...(stage === "record" ? ["svg", "png"] : []),
          ]}
          onAction={(key) => {
            if (key === "result" || key === "protocol") void controller.saveFit(key);
            else void saveFigure(key as "svg" | "png");
          }}
        >
          {SAVED.map(({ id, text, kind }) => (
            <MenuItem key={id} className="menu-item" id={id} textValue={text} aria-label={`${text}, ${kind}`}>
              {text} <span className="small">{kind}</span>
            </MenuItem>
          ))}
        </Menu>
      </Popover>
    </MenuTrigger>
  );
}

const NEXT: Readonly<Record<ThemeChoice, ThemeChoice>> = { system: "light", light: "dark", dark: "system" };
const THEME_WORDS: Readonly<Record<ThemeChoice, string>> = {
  system: "as the system",
  light: "light",
  dark: "dark",
};

function ThemeButton() {
  const controller = useController();
  const theme = useWindow((state) => state.theme);
  return (
    <button
      type="button"
      className="icon"
      data-action="theme"
      aria-label={`Colours: ${THEME_WORDS[theme]}. Change to ${THEME_WORDS[NEXT[theme]]}`}
      title={`Colours: ${THEME_WORDS[theme]}`}
      onClick={() => controller.setTheme(NEXT[theme])}
    >
      <svg viewBox="0 0 16 16" width="16" height="16" aria-hidden="true">
        <circle cx="8" cy="8" r="5.5" />
        {theme !== "light" && (
          <path
            className={theme === "dark" ? "filled" : "half"}
            d={
              theme === "dark"
                ? "M2.5 8a5.5 5.5 0 1 0 11 0a5.5 5.5 0 1 0 -11 0"
                : "M8 2.5a5.5 5.5 0 0 1 0 11z"
            }
          />
        )}
      </svg>
    </button>
  );
}
