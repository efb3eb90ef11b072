import * as electron from "electron";
import { findPlace } from "../page/index.ts";
import { pathsFrom, startElectron } from "./start.ts";

startElectron(electron, findPlace(), pathsFrom(process.argv, electron.app.isPackaged)).catch(
  (error: unknown) => {
    electron.dialog.showErrorBox(
      "Rungline could not start",
      error instanceof Error ? error.message : String(error),
    );
    electron.app.exit(1);
  },
);
