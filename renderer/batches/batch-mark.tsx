import { MARK_PATHS, type BatchLook } from "./batch-look.ts";

/** Colour and mark of a batch as in the figure. */
export function BatchMarkSign({ look }: { readonly look: BatchLook }) {
  return (
    <svg viewBox="0 0 12 12" width="11" height="11" aria-hidden="true" className="batch-mark">
      <path d={MARK_PATHS[look.mark]} fill={look.colour} />
    </svg>
  );
}
