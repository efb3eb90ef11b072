import { Button } from "react-aria-components";
import { useController, useWindow } from "../store/context.ts";
import { unfittedFiles } from "../store/gather.ts";

/** Fit every file without a fit of its present choices, with progress and a way out. */
export function FitAllButton() {
  const controller = useController();
  const job = useWindow((state) => state.job);
  const left = useWindow((state) => unfittedFiles(state.session).length);
  if (job !== null)
    return (
      <div className="fit-place fit-job" data-state={job.cancelling ? "cancelling" : "running"}>
        <Button className="button" isDisabled={job.cancelling} onPress={() => controller.cancel()}>
          Cancel
        </Button>
        <progress className="fit-all-progress" max={1} value={job.fraction} aria-label="Fit all" />
        <span className="small progress-step">{job.cancelling ? "stopping" : job.step}</span>
      </div>
    );
  return (
    <div className="fit-place">
      <Button className="button button-main" isDisabled={left === 0} onPress={() => void controller.fitAll()}>
        Fit all
      </Button>
      <span className="small">{left === 0 ? "all are fitted" : `${left} to fit`}</span>
    </div>
  );
}
