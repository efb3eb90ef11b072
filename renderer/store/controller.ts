import type { Wording } from "../../app/base/index.ts";
import {
  PROTOCOL_SCHEMA,
  resolveProtocol,
  wordProtocolIssue,
  type ProtocolInput,
} from "../../app/protocol/index.ts";
import { protocolToJson, resultToJson } from "../../app/report/index.ts";
import type { Host, NamedBytes } from "../../app/tasks/index.ts";
import type { JobClient, RunningJob } from "../jobs/job-client.ts";
import {
  addFiles,
  chooseFile,
  editChoices,
  keepFit,
  keepPower,
  markSeries,
  partSeries,
  seriesOf,
  NO_CHOICES,
  removeFile,
  replaceChoices,
  shareChoices,
  type Session,
} from "./session.ts";
import type { Message, Reading, Stage, ThemeChoice, WindowState, WindowStore } from "./store.ts";

/** The demo crystal is cuprous oxide; a newcomer should not have to know. */
const DEMO_CHOICES: ProtocolInput = { material: { preset: "cuprous-oxide-yellow-p" } };

/** The same crystal, and what the header of the demo series says in words only. */
const SERIES_CHOICES: ProtocolInput = {
  ...DEMO_CHOICES,
  power: { excitation: "separate-pump", spot_diameter_um: 12, spot_profile: "flat" },
};

/** What the window can do, in one place: the parts of the interface only call these. */
export class Controller {
  readonly store: WindowStore;
  readonly #host: Host;
  readonly #reader: JobClient;
  readonly #fitter: JobClient;
  readonly #now: () => Date;
  #running: RunningJob<unknown> | null = null;
  #messageId = 1;

  constructor(store: WindowStore, host: Host, reader: JobClient, fitter: JobClient, now = () => new Date()) {
    this.store = store;
    this.#host = host;
    this.#reader = reader;
    this.#fitter = fitter;
    this.#now = now;
    store.subscribe((state, before) => {
      if (state.session !== before.session) this.#readCurrent();
    });
  }

  /** Open what the shell was started with, else the demo, and fit it. */
  async start(): Promise<void> {
    try {
      const [facts, start] = await Promise.all([this.#host.about(), this.#host.startFiles()]);
      this.#set({ facts });
      const files = start.files.length > 0 ? start.files : await this.#host.demoFiles();
      const choices = start.files.length > 0 ? (start.choices as ProtocolInput) : DEMO_CHOICES;
      this.#edit((session) => ({ ...addFiles(session, files, choices), step: "start" }));
      // The first files are where undo ends, not a step of their own.
      this.store.temporal.getState().clear();
      this.#set({ start: "ready" });
      if (files.length > 0) {
        this.#set({ stage: "lines" });
        await this.fit();
      }
    } catch (error) {
      this.#set({ start: "failed" });
      this.say(
        true,
        `the shell did not answer: ${textOf(error)}`,
        "close this window and start Rungline again",
      );
    }
  }

  async open(): Promise<void> {
    this.add(await this.#host.openFiles());
  }

  /** Files from the dialog or dropped on the window; a protocol among them becomes the current file's choices. */
  add(files: readonly NamedBytes[]): void {
    const spectra: NamedBytes[] = [];
    let protocol: { name: string; choices: ProtocolInput } | null = null;
    for (const file of files) {
      const read = readProtocol(file);
      if (read === null) spectra.push(file);
      else if (read.ok) protocol = { name: file.name, choices: read.choices };
      else
        for (const { message, remedy } of read.wordings) this.say(true, `${file.name}: ${message}`, remedy);
    }
    const session = this.store.getState().session;
    const current =
      session.currentId === null ? NO_CHOICES : (session.choices[session.currentId] ?? NO_CHOICES);
    if (spectra.length > 0) {
      this.#edit((before) => addFiles(before, spectra, protocol?.choices ?? current));
      this.#set({ stage: "read", selectedN: null });
    } else if (protocol !== null) {
      const { choices, name } = protocol;
      this.#edit((before) => replaceChoices(before, choices, `take protocol ${name}`));
    }
  }

  /** The demo power series, fitted at once. */
  async openDemoSeries(): Promise<void> {
    let files: readonly NamedBytes[];
    try {
      files = await this.#host.demoSeries();
    } catch (error) {
      this.say(true, `the demo series could not be read: ${textOf(error)}`, "start Rungline again");
      return;
    }
    if (files.length === 0) {
      this.say(true, "there is no demo series beside this program", "open a power series of your own");
      return;
    }
    this.#edit((before) => {
      const added = addFiles(before, files, SERIES_CHOICES);
      if (files.length === 1) return { ...added, step: "open the demo series" };
      const ids = added.files.slice(before.files.length).map(({ id }) => id);
      return { ...markSeries(added, ids), step: "open the demo series" };
    });
    this.#set({ stage: "power", selectedN: null });
    await this.fitPower();
  }

  markSeries(ids: readonly string[]): void {
    this.#edit((session) => markSeries(session, ids));
    this.#set({ stage: "power", selectedN: null });
  }

  partSeries(id: string): void {
    this.#edit((session) => partSeries(session, id));
  }

  close(id: string): void {
    const { job, session: before } = this.store.getState();
    if (
      job !== null &&
      (job.fileId === id || (job.what === "power" && seriesOf(before, job.fileId).includes(id)))
    )
      this.cancel();
    this.#edit((session) => removeFile(session, id));
  }

  choose(id: string): void {
    this.#edit((session) => chooseFile(session, id));
    this.#set({ selectedN: null });
  }

  change(change: ProtocolInput, step: string): void {
    this.#edit((session) => editChoices(session, change, step));
  }

  share(): void {
    this.#edit(shareChoices);
  }

  select(n: number | null): void {
    if (this.store.getState().selectedN !== n) this.#set({ selectedN: n });
  }

  point(n: number | null): void {
    if (this.store.getState().pointedN !== n) this.#set({ pointedN: n });
  }

  openDrawer(): void {
    this.#set({ drawer: true });
  }

  closeDrawer(): void {
    this.#set({ drawer: false });
  }

  show(stage: Stage): void {
    this.#set({ stage });
  }

  setTheme(theme: ThemeChoice): void {
    this.#set({ theme });
  }

  /** The window of the fit that stands. */
  fittedWindow(): readonly [number, number] | null {
    const { session } = this.store.getState();
    const fit = session.currentId === null ? undefined : session.fits[session.currentId];
    return fit?.analysed.result.fit?.window_eV ?? null;
  }

  undo(): void {
    this.store.temporal.getState().undo();
  }

  redo(): void {
    this.store.temporal.getState().redo();
  }

  /** Fit the current file with its present choices, in the worker. One fit at a time. */
  async fit(): Promise<void> {
    const { session, job, facts } = this.store.getState();
    const file = session.files.find((one) => one.id === session.currentId);
    if (file === undefined || job !== null || facts === null) return;
    const choices = session.choices[file.id] ?? NO_CHOICES;
    this.#set({
      job: { fileId: file.id, what: "fit", fraction: 0, step: "starting", cancelling: false },
      refusals: without(this.store.getState().refusals, file.id),
    });
    const running = this.#fitter.analyse(
      { file: file.name, bytes: file.bytes, choices },
      { version: facts.version, node: facts.node, started: this.#now().toISOString() },
      this.#progress,
    );
    this.#running = running;
    const outcome = await running.outcome;
    this.#running = null;
    this.#set({ job: null });
    switch (outcome.kind) {
      case "done":
        this.#edit((before) => keepFit(before, file.id, { analysed: outcome.value, choices }));
        break;
      case "refused":
        this.#set({ refusals: { ...this.store.getState().refusals, [file.id]: outcome.wordings } });
        break;
      case "cancelled":
        this.say(false, `the fit of ${file.name} was cancelled`, "press Fit to start it again");
        break;
      case "fault":
        this.say(
          true,
          `a fault of Rungline while fitting ${file.name}: ${outcome.message}`,
          "keep the file and its protocol and report them",
        );
    }
  }

  /** Fit the current file, or all files marked with it, as a power series. */
  async fitPower(): Promise<void> {
    const { session, job, facts } = this.store.getState();
    if (session.currentId === null || job !== null || facts === null) return;
    const fileIds = seriesOf(session, session.currentId);
    const files = fileIds.flatMap((id) => session.files.filter((file) => file.id === id));
    const id = fileIds[0]!;
    const choices = session.choices[session.currentId] ?? NO_CHOICES;
    const name = files.length === 1 ? files[0]!.name : `${files.length} files`;
    this.#set({
      job: { fileId: id, what: "power", fraction: 0, step: "starting", cancelling: false },
      powerRefusals: without(this.store.getState().powerRefusals, id),
    });
    const running = this.#fitter.analysePower(
      { files: files.map((file) => ({ file: file.name, bytes: file.bytes })), choices },
      { version: facts.version, node: facts.node, started: this.#now().toISOString() },
      this.#progress,
    );
    this.#running = running;
    const outcome = await running.outcome;
    this.#running = null;
    this.#set({ job: null });
    switch (outcome.kind) {
      case "done":
        this.#edit((before) => keepPower(before, id, { analysed: outcome.value, choices, fileIds }));
        break;
      case "refused":
        this.#set({ powerRefusals: { ...this.store.getState().powerRefusals, [id]: outcome.wordings } });
        break;
      case "cancelled":
        this.say(false, `the fit of the power series ${name} was cancelled`, "press Fit to start it again");
        break;
      case "fault":
        this.say(
          true,
          `a fault of Rungline while fitting the power series ${name}: ${outcome.message}`,
          "keep the files and the protocol and report them",
        );
    }
  }

  readonly #progress = (fraction: number, step: string): void => {
    const present = this.store.getState().job;
    if (present !== null) this.#set({ job: { ...present, fraction, step } });
  };

  cancel(): void {
    const { job } = this.store.getState();
    if (job === null || this.#running === null) return;
    this.#set({ job: { ...job, cancelling: true } });
    this.#running.cancel();
  }

  /** The result, or the protocol that repeats it; a file each, since a page may offer one at a time. */
  async saveFit(what: "result" | "protocol"): Promise<void> {
    const { session } = this.store.getState();
    const { currentId } = session;
    if (currentId === null) return;
    const power = this.store.getState().stage === "power";
    const fit = power ? session.powerFits[seriesOf(session, currentId)[0]!] : session.fits[currentId];
    const file = session.files.find((one) => one.id === currentId);
    if (fit === undefined || file === undefined) return;
    const base = `${file.name.replace(/\.[^.]+$/, "")}${power ? ".power" : ""}`;
    const { result } = fit.analysed;
    if (what === "result") await this.save(`${base}.json`, encode(resultToJson(result)));
    else await this.save(`${base}.protocol.json`, encode(protocolToJson(result.protocol)));
  }

  async save(name: string, bytes: Uint8Array): Promise<string | null> {
    try {
      return await this.#host.saveFile(name, bytes);
    } catch (error) {
      this.say(true, `${name} could not be written: ${textOf(error)}`, "choose another folder");
      return null;
    }
  }

  say(grave: boolean, text: string, remedy: string): void {
    const message: Message = { id: this.#messageId++, grave, text, remedy };
    this.#set({ messages: [message, ...this.store.getState().messages].slice(0, 20) });
  }

  dismiss(id: number): void {
    this.#set({ messages: this.store.getState().messages.filter((message) => message.id !== id) });
  }

  #readCurrent(): void {
    const { session, readings } = this.store.getState();
    const file = session.files.find((one) => one.id === session.currentId);
    if (file === undefined) return;
    const choices = session.choices[file.id] ?? NO_CHOICES;
    const known = readings[file.id];
    if (known !== undefined && known.choices === choices) return;
    const before =
      known?.state === "read" ? known.inspection : known?.state === "reading" ? known.before : null;
    this.#setReading(file.id, { state: "reading", choices, before });
    void this.#reader.inspect({ file: file.name, bytes: file.bytes, choices }).then((outcome) => {
      // A later choice may have overtaken this one.
      if (this.store.getState().readings[file.id]?.choices !== choices) return;
      if (outcome.kind === "done")
        this.#setReading(file.id, { state: "read", choices, inspection: outcome.value });
      else {
        const wordings: readonly Wording[] =
          outcome.kind === "refused"
            ? outcome.wordings
            : [
                {
                  message: outcome.kind === "fault" ? outcome.message : "cancelled",
                  remedy: "open the file again",
                },
              ];
        this.#setReading(file.id, { state: "refused", choices, wordings });
      }
    });
  }

  #setReading(id: string, reading: Reading): void {
    this.#set({ readings: { ...this.store.getState().readings, [id]: reading } });
  }

  #edit(edit: (session: Session) => Session): void {
    const before = this.store.getState().session;
    const after = edit(before);
    if (after !== before) this.#set({ session: after });
  }

  #set(part: Partial<WindowState>): void {
    this.store.setState(part);
  }
}

type ProtocolFile =
  | { readonly ok: true; readonly choices: ProtocolInput }
  | { readonly ok: false; readonly wordings: readonly Wording[] };

function readProtocol({ name, bytes }: NamedBytes): ProtocolFile | null {
  if (!name.toLowerCase().endsWith(".json")) return null;
  let content: unknown;
  try {
    content = JSON.parse(new TextDecoder().decode(bytes));
  } catch {
    return null;
  }
  if (typeof content !== "object" || content === null) return null;
  if ((content as { schema?: unknown }).schema !== PROTOCOL_SCHEMA) return null;
  const resolved = resolveProtocol(content);
  return resolved.ok
    ? { ok: true, choices: content as ProtocolInput }
    : { ok: false, wordings: resolved.issues.map(wordProtocolIssue) };
}

function encode(text: string): Uint8Array {
  return new TextEncoder().encode(text);
}

function without<T>(record: Readonly<Record<string, T>>, key: string): Record<string, T> {
  return Object.fromEntries(Object.entries(record).filter(([one]) => one !== key));
}

function textOf(error: unknown): string {
  return error instanceof Error ? error.message : String(error);
}
