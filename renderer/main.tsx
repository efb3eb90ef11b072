import { StrictMode } from "react";
import { createRoot } from "react-dom/client";
import "@fontsource/ibm-plex-sans/latin-400.css";
import "@fontsource/ibm-plex-sans/latin-ext-400.css";
import "@fontsource/ibm-plex-sans/greek-400.css";
import "@fontsource/ibm-plex-sans/latin-400-italic.css";
import "@fontsource/ibm-plex-sans/greek-400-italic.css";
import "@fontsource/ibm-plex-sans/latin-600.css";
import "@fontsource/ibm-plex-sans/greek-600.css";
import "@fontsource/ibm-plex-mono/latin-400.css";
import "@fontsource/ibm-plex-mono/latin-500.css";
import "./styles/window.css";
import { App } from "./frame/app.tsx";
import { chooseHost } from "./host/choose-host.ts";
import { JobClient, type WorkerLike } from "./jobs/job-client.ts";
import { ControllerContext } from "./store/context.ts";
import { Controller } from "./store/controller.ts";
import { makeStore } from "./store/store.ts";

const makeWorker = (): WorkerLike =>
  new Worker(new URL("./worker/worker.ts", import.meta.url), { type: "module" }) as WorkerLike;

// Reading answers at once even while a fit runs: a worker each.
const controller = new Controller(
  makeStore(),
  chooseHost(window),
  new JobClient(makeWorker, crossOriginIsolated),
  new JobClient(makeWorker, crossOriginIsolated),
);

createRoot(document.getElementById("root")!).render(
  <StrictMode>
    <ControllerContext value={controller}>
      <App />
    </ControllerContext>
  </StrictMode>,
);
void controller.start();
