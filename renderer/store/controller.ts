import type { Wording } from "../../app/base/index.ts";
import {
  parseResults,
  PROTOCOL_SCHEMA,
  resolveProtocol,
  wordProtocolIssue,
  wordResultIssue,
  type ProtocolInput,
  type RunglineResult,
} from "../../app/protocol/index.ts";
import { comparisonToJson, protocolToJson, resultToJson, type ReportInput } from "../../app/report/index.ts";
import type { FigureWish, Host, MadeFigures, NamedBytes, RecordPart } from "../../app/tasks/index.ts";
import { batchesOf, gather, unfittedFiles } from "./gather.ts";
import type { JobClient, Outcome, RunningJob } from "../jobs/job-client.ts";
import { recordInput } from "../record/record-input.ts";
import { currentComparison } from "./context.ts";
import {
  addFiles,
  addResults,
  chooseFile,
  editChoices,
  editCompare,
  keepDrawn,
  keepFit,
  keepPower,
  markSeries,
  partSeries,
  seriesOf,
  NO_CHOICES,
  removeFile,
  removeResult,
  replaceChoices,
  shareChoices,
  type CompareView,
  type Fitted,
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
  /** What the last comparison was asked about. */
  #compared: readonly unknown[] = [];

  constructor(store: WindowStore, host: Host, reader: JobClient, fitter: JobClient, now = () => new Date()) {
    this.store = store;
    this.#host = host;
    this.#reader = reader;
    this.#fitter = fitter;
    this.#now = now;
    store.subscribe((state, before) => {
      if (state.session !== before.session) {
        this.#readCurrent();
        this.#compare();
      }
    });
  }

  /** Open what the shell was started with, else the demo, and fit it. */
  async start(): Promise<void> {
    try {
      const [facts, start] = await Promise.all([this.#host.about(), this.#host.startFiles()]);
      this.#set({ facts });
      const files = start.files.length > 0 ? start.files : await this.#host.demoFiles();
      const choices = start.files.length > 0 ? (start.choices as ProtocolInput) : DEMO_CHOICES;
      const results = files.map((file) => ({ file, found: readResults(file) }));
      const spectra = results.flatMap(({ file, found }) => (found?.ok === true ? [] : [file]));
      this.#edit((session) => ({
        ...results.reduce(
          (before, { file, found }) =>
            found?.ok === true ? addResults(before, file.name, found.results) : before,
          addFiles(session, spectra, choices),
        ),
        step: "start",
      }));
      // The first files are where undo ends, not a step of their own.
      this.store.temporal.getState().clear();
      this.#set({ start: "ready" });
      if (spectra.length === 0 && results.length > 0) this.#set({ stage: "batches" });
      if (spectra.length > 0) {
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
    const results: { name: string; results: readonly RunglineResult[] }[] = [];
    let protocol: { name: string; choices: ProtocolInput } | null = null;
    for (const file of files) {
      const read = readProtocol(file);
      const found = read === null ? readResults(file) : null;
      if (found?.ok === true) results.push({ name: file.name, results: found.results });
      else if (found !== null)
        for (const { message, remedy } of found.wordings) this.say(true, `${file.name}: ${message}`, remedy);
      else if (read === null) spectra.push(file);
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
    for (const { name, results: found } of results) this.#edit((before) => addResults(before, name, found));
    if (results.length > 0 && spectra.length === 0) this.#set({ stage: "batches" });
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

  closeResult(id: string): void {
    this.#edit((session) => removeResult(session, id));
  }

  changeCompare(change: Partial<CompareView>, step: string): void {
    this.#edit((session) => {
      const edited = editCompare(session, change, step);
      // A batch that a typed name has emptied can be no reference.
      const { reference } = edited.compare.choices;
      if (reference === undefined || reference === null) return edited;
      const shown = gather(edited).filter((one) => one.shown);
      return batchesOf(shown).includes(reference)
        ? edited
        : editCompare(edited, { choices: { ...edited.compare.choices, reference: null } }, step);
    });
  }

  /** The figure of a sample that was chosen among others: its ladder, or its record where it came as a result alone. */
  openSample(id: string): void {
    const found = gather(this.store.getState().session).find((one) => one.id === id);
    if (found === undefined) return;
    if (found.of !== "result") {
      this.choose(id);
      this.show(found.of === "file" ? "ladder" : "power");
    } else this.#set({ stage: "record", recordOf: id });
  }

  /** The same by the file that a comparison names. */
  openMeasured(file: string, sha256: string): void {
    const found = gather(this.store.getState().session).find(
      ({ result }) => result.source.file === file && result.source.sha256 === sha256,
    );
    if (found !== undefined) this.openSample(found.id);
  }

  recordOf(id: string | null): void {
    this.#set({ recordOf: id });
  }

  /** One file of a record, made in the worker. */
  makeRecord(input: Omit<ReportInput, "run">, part: RecordPart): Promise<Outcome<NamedBytes>> {
    return this.#reader.record(this.#withRun(input), part);
  }

  figureNames(input: Omit<ReportInput, "run">): Promise<Outcome<readonly string[]>> {
    return this.#reader.figureNames(this.#withRun(input));
  }

  makeFigures(
    input: Omit<ReportInput, "run">,
    wish: FigureWish,
    progress: (fraction: number, step: string) => void,
  ): RunningJob<MadeFigures> {
    return this.#reader.figures(this.#withRun(input), wish, progress);
  }

  /** Offers made figures to be kept, and says which characters could not be drawn. */
  async saveFigures({ file, missing }: MadeFigures): Promise<void> {
    const name = await this.save(file.name, file.bytes);
    if (name === null) return;
    if (missing.length === 0) this.say(false, `${name} is kept`, "");
    else
      this.say(
        false,
        `${name} is kept; its typeface has no sign for ${missing.join(" ")}, another stands for it`,
        "name the sample in letters of Latin, Greek or Cyrillic, or take the SVG",
      );
  }

  #withRun(input: Omit<ReportInput, "run">): ReportInput {
    const { facts } = this.store.getState();
    return {
      ...input,
      run: {
        version: facts?.version ?? "",
        node: facts?.node ?? "",
        started: this.#now().toISOString(),
      },
    };
  }

  async saveRecord(input: Omit<ReportInput, "run">, part: RecordPart): Promise<void> {
    const outcome = await this.makeRecord(input, part);
    if (outcome.kind === "done") {
      const name = await this.save(outcome.value.name, outcome.value.bytes);
      if (name !== null) this.say(false, `${name} is kept`, "");
    } else if (outcome.kind === "fault")
      this.say(true, `a fault of Rungline: ${outcome.message}`, "keep the results and report it");
  }

  /** What the stage is about: the report in Record, the comparison in Batches, else the result. */
  async saveShown(): Promise<void> {
    const { stage, session, recordOf } = this.store.getState();
    if (stage !== "record") return this.saveFit("result");
    const input = recordInput(session, currentComparison(this.store.getState()), recordOf);
    if (input.results.length > 0) await this.saveRecord(input, "report");
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
    await this.#fitCurrent(
      (choices) => choices,
      (before, id, fitted) => keepFit(before, id, fitted),
      (name) => [`the fit of ${name} was cancelled`, "press Fit to start it again"],
    );
  }

  /** Fit the current file and spectra drawn anew from its fit; the choices are kept with the fit, as one step. */
  async drawAnew(
    wanted: Required<Pick<NonNullable<ProtocolInput["uncertainty"]>, "resample" | "resamples" | "seed">>,
  ): Promise<void> {
    const change: ProtocolInput = { uncertainty: wanted };
    const step = `draw ${wanted.resamples} spectra anew`;
    let present = NO_CHOICES;
    await this.#fitCurrent(
      (choices) => {
        present = choices;
        const { session } = this.store.getState();
        return editChoices(session, change, step).choices[session.currentId!] ?? NO_CHOICES;
      },
      (before, id, fitted) => keepDrawn(before, id, fitted, present, change, step),
      (name) => [`drawing spectra of ${name} anew was cancelled; the fit before stands`, "draw them again"],
    );
  }

  async #fitCurrent(
    choose: (present: ProtocolInput) => ProtocolInput,
    keep: (session: Session, id: string, fitted: Fitted) => Session,
    cancelledWords: (name: string) => readonly [text: string, remedy: string],
  ): Promise<void> {
    const { session, job, facts } = this.store.getState();
    const file = session.files.find((one) => one.id === session.currentId);
    if (file === undefined || job !== null || facts === null) return;
    const choices = choose(session.choices[file.id] ?? NO_CHOICES);
    this.#set({
      job: { fileId: file.id, what: "fit", fraction: 0, step: "starting", cancelling: false },
      messages: this.#lasting(),
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
        this.#edit((before) => keep(before, file.id, { analysed: outcome.value, choices }));
        break;
      case "refused":
        this.#set({ refusals: { ...this.store.getState().refusals, [file.id]: outcome.wordings } });
        break;
      case "cancelled":
        this.say(false, ...cancelledWords(file.name));
        break;
      case "fault":
        this.say(
          true,
          `a fault of Rungline while fitting ${file.name}: ${outcome.message}`,
          "keep the file and its protocol and report them",
        );
    }
  }

  /** Fit every file that has no fit with its present choices; what is finished stays when it is cancelled. */
  async fitAll(): Promise<void> {
    const { session, job, facts } = this.store.getState();
    const ids = unfittedFiles(session);
    if (ids.length === 0 || job !== null || facts === null) return;
    const refused: string[] = [];
    let kept = 0;
    let cancelled = false;
    for (const [i, id] of ids.entries()) {
      const present = this.store.getState().session;
      const file = present.files.find((one) => one.id === id);
      // It was closed meanwhile.
      if (file === undefined) continue;
      const choices = present.choices[id] ?? NO_CHOICES;
      const report = (fraction: number): void => {
        const running = this.store.getState().job;
        this.#set({
          job: {
            fileId: id,
            what: "all",
            fraction: (i + fraction) / ids.length,
            step: `${i + 1} of ${ids.length}`,
            cancelling: running?.cancelling ?? false,
          },
          ...(fraction === 0 && { refusals: without(this.store.getState().refusals, id) }),
        });
      };
      report(0);
      const running = this.#fitter.analyse(
        { file: file.name, bytes: file.bytes, choices },
        { version: facts.version, node: facts.node, started: this.#now().toISOString() },
        report,
      );
      this.#running = running;
      const outcome = await running.outcome;
      this.#running = null;
      if (outcome.kind === "done") {
        // All fits of one press are one step back.
        const { temporal } = this.store;
        if (kept > 0) temporal.getState().pause();
        this.#edit((before) => ({
          ...keepFit(before, id, { analysed: outcome.value, choices }),
          step: "fit all files",
        }));
        temporal.getState().resume();
        kept++;
      } else if (outcome.kind === "refused") {
        refused.push(file.name);
        this.#set({ refusals: { ...this.store.getState().refusals, [id]: outcome.wordings } });
      } else if (outcome.kind === "fault") {
        refused.push(file.name);
        this.say(
          true,
          `a fault of Rungline while fitting ${file.name}: ${outcome.message}`,
          "keep the file and its protocol and report them",
        );
      } else cancelled = true;
      if (cancelled || this.store.getState().job?.cancelling === true) {
        cancelled = true;
        break;
      }
    }
    this.#set({ job: null });
    if (refused.length > 0)
      this.say(
        true,
        `${refused.length} of ${ids.length} files could not be fitted: ${refused.join(", ")}`,
        "choose one in the drawer to read why",
      );
    if (cancelled)
      this.say(
        false,
        `fitting all files was cancelled; ${kept} of ${ids.length} were finished and are kept`,
        "press Fit all to go on",
      );
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
      messages: this.#lasting(),
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
    if (this.store.getState().stage === "batches") {
      const comparison = currentComparison(this.store.getState());
      if (what === "result" && comparison !== null)
        await this.save("comparison.json", encode(comparisonToJson(comparison)));
      return;
    }
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

  /** What was said in passing, such as that a fit was cancelled, is over when the next one starts. */
  #lasting(): readonly Message[] {
    return this.store.getState().messages.filter(({ grave }) => grave);
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

  /** Ask the worker to compare anew whenever a result that is shown or a choice has changed. */
  #compare(): void {
    const { session, compared, facts } = this.store.getState();
    const { choices } = session.compare;
    const results = gather(session).flatMap(({ shown, result }) => (shown ? [result] : []));
    const asked = [choices, ...results];
    if (asked.length === this.#compared.length && asked.every((one, i) => one === this.#compared[i])) return;
    this.#compared = asked;
    if (results.length < 2) {
      if (compared !== null) this.#set({ compared: null });
      return;
    }
    const before =
      compared?.state === "done"
        ? compared.comparison
        : compared?.state === "working"
          ? compared.before
          : null;
    this.#set({ compared: { state: "working", before } });
    const run = {
      version: facts?.version ?? "",
      node: facts?.node ?? "",
      started: this.#now().toISOString(),
    };
    void this.#reader.compare(results, choices, run).then((outcome) => {
      // A later change may have overtaken this one.
      if (this.#compared !== asked) return;
      if (outcome.kind === "done") this.#set({ compared: { state: "done", comparison: outcome.value } });
      else
        this.#set({
          compared: {
            state: "refused",
            wordings:
              outcome.kind === "refused"
                ? outcome.wordings
                : [
                    {
                      message: outcome.kind === "fault" ? outcome.message : "cancelled",
                      remedy: "change a choice to try again",
                    },
                  ],
          },
        });
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

type ResultsFile =
  | { readonly ok: true; readonly results: readonly RunglineResult[] }
  | { readonly ok: false; readonly wordings: readonly Wording[] };

/** Results from their JSON file or from a report that carries them; null where the file is neither. */
function readResults({ name, bytes }: NamedBytes): ResultsFile | null {
  if (!/\.(json|html)$/i.test(name)) return null;
  const text = new TextDecoder().decode(bytes);
  if (!text.includes('"rungline-result/')) return null;
  const parsed = parseResults(text);
  return parsed.ok
    ? { ok: true, results: parsed.value }
    : { ok: false, wordings: parsed.issues.map(wordResultIssue) };
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
