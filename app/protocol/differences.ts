export interface Difference {
  /** Dotted key, `lines[3].width_eV.value`. */
  readonly key: string;
  readonly was: unknown;
  readonly is: unknown;
}

/** Where two plain values of JSON differ, in the order of their keys; numbers count as equal by their bits only. */
export function differences(was: unknown, is: unknown, key = ""): readonly Difference[] {
  if (Object.is(was, is)) return [];
  if (typeof was === "object" && was !== null && typeof is === "object" && is !== null) {
    const list = Array.isArray(was) && Array.isArray(is);
    if (list || (!Array.isArray(was) && !Array.isArray(is))) {
      const before = was as Record<string, unknown>;
      const after = is as Record<string, unknown>;
      const keys = [...Object.keys(before), ...Object.keys(after).filter((one) => !(one in before))];
      return keys.flatMap((one) =>
        differences(before[one], after[one], list ? `${key}[${one}]` : key === "" ? one : `${key}.${one}`),
      );
    }
  }
  return [{ key, was, is }];
}
