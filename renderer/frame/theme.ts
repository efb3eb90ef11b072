import { useEffect, useSyncExternalStore } from "react";
import { PALETTES, type Mode, type Palette } from "../plot/colours.ts";
import { useWindow } from "../store/context.ts";

const query = "(prefers-color-scheme: dark)";

function subscribe(changed: () => void): () => void {
  const media = matchMedia(query);
  media.addEventListener("change", changed);
  return () => media.removeEventListener("change", changed);
}

/** Light or dark: the user's switch, else what the system says. */
export function useMode(): Mode {
  const choice = useWindow((state) => state.theme);
  const systemDark = useSyncExternalStore(subscribe, () => matchMedia(query).matches);
  return choice === "system" ? (systemDark ? "dark" : "light") : choice;
}

export function usePalette(): Palette {
  return PALETTES[useMode()];
}

/** The style sheet follows an attribute of the page. */
export function useThemeOfPage(): void {
  const mode = useMode();
  useEffect(() => {
    document.documentElement.dataset["theme"] = mode;
  }, [mode]);
}
