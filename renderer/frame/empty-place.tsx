import { Button } from "react-aria-components";
import { DemoSeriesButton } from "../power/demo-series-button.tsx";
import { useController, useWindow } from "../store/context.ts";

/** No file: say what to do next. */
export function EmptyPlace() {
  const controller = useController();
  const start = useWindow((state) => state.start);
  if (start === "starting")
    return (
      <div className="stage-message">
        <p>Opening</p>
      </div>
    );
  return (
    <div className="stage-message" data-state="empty">
      <h2>Drop spectra here</h2>
      <p>
        Text files with a light axis and a transmission, absorbance or absorption column, one spectrum each.
      </p>
      <div className="message-buttons">
        <Button className="button button-main" onPress={() => void controller.open()}>
          Open spectra
        </Button>
        <DemoSeriesButton />
      </div>
    </div>
  );
}
