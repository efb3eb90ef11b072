import { Button, ProgressBar } from "react-aria-components";
import { fitIsOld, powerIsOld, useController, useWindow } from "../store/context.ts";

/** Fit the spectrum, or the power series, or how far the running fit is with a way out. */
export function FitButton({ what = "fit" }: { readonly what?: "fit" | "power" }) {
  const controller = useController();
  const job = useWindow((state) => state.job);
  const old = useWindow(what === "fit" ? fitIsOld : powerIsOld);
  const none = useWindow((state) => state.session.currentId === null);
  if (job === null)
    return (
      <div className="fit-place">
        <Button
          className="button button-main"
          data-old={old || undefined}
          isDisabled={none}
          onPress={() => void (what === "fit" ? controller.fit() : controller.fitPower())}
        >
          {old ? "Fit again" : "Fit"}
        </Button>
      </div>
    );
  return (
    <div className="fit-place fit-job" data-state={job.cancelling ? "cancelling" : "running"}>
      <Button className="button" isDisabled={job.cancelling} onPress={() => controller.cancel()}>
        Cancel
      </Button>
      <ProgressBar value={100 * job.fraction} className="progress" aria-label="Fit">
        {({ percentage }) => (
          <>
            <svg className="progress-track" aria-hidden="true">
              <rect className="progress-ground" width="100%" height="100%" rx="2" />
              <rect className="progress-fill" width={`${percentage ?? 0}%`} height="100%" rx="2" />
            </svg>
            <span className="small progress-step" title={job.step}>
              {job.cancelling ? "stopping" : job.step}
            </span>
          </>
        )}
      </ProgressBar>
    </div>
  );
}
