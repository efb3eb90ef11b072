import { Button } from "react-aria-components";
import { useController, useWindow } from "../store/context.ts";

/** A power series to look at, for those who have none at hand. */
export function DemoSeriesButton() {
  const controller = useController();
  const busy = useWindow((state) => state.job !== null);
  return (
    <Button className="button" isDisabled={busy} onPress={() => void controller.openDemoSeries()}>
      Open the demo series
    </Button>
  );
}
