import { doubt, type Note } from "../base/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { listAssignments, type Assignment, type AssignmentChoices } from "./assign-n.ts";
import type { Peak } from "./find-peaks.ts";

/** A series whose lines stand between stronger ones, with the same gap and Rydberg energy. */
export interface WeakSeries {
  readonly defect: number;
  readonly n: readonly number[];
  /** Median height over that of the strong lines beside. */
  readonly share: number;
}

export interface SplitSeries {
  /** Readings of the strong lines; their places are those in `peaks`. */
  readonly assignments: readonly Assignment[];
  readonly weak: readonly WeakSeries[];
}

/** A weak line is at most this part of the stronger of its neighbours. */
const WEAK = 0.4;
/** Fewer lines in a row are satellites and no series. */
const FEWEST = 4;
/** Fractional parts of n* of one series scatter less, and those of another lie further away. */
const ALIKE = 0.08;
/** Where spacings shrink to the errors of peaks, fractional parts of n* say nothing. */
const HIGHEST_JUDGED = 14;

/**
 * What      Weak lines that alternate with strong ones are not every second line of one series, since strengths run smoothly with
 *           n: the strong ones are read alone, and weak ones whose effective quantum number stands at one fraction from the
 *           whole number are a series with the same gap and Rydberg energy (S beside P). Read as one, both would have four
 *           times the Rydberg energy. Null where no such series stands beside a strong one.
 * Units     eV.
 */
export function splitSeries(
  peaks: readonly Peak[],
  choices: AssignmentChoices,
  most: number,
): SplitSeries | null {
  const beside = peaks.map((_, i) =>
    Math.max(...[i - 2, i - 1, i + 1, i + 2].map((j) => peaks[j]?.height ?? 0)),
  );
  const strong = peaks.map((_, i) => i).filter((i) => peaks[i]!.height > WEAK * beside[i]!);
  const weak = peaks.map((_, i) => i).filter((i) => !strong.includes(i));
  if (weak.length < FEWEST || strong.length < FEWEST + 1) return null;
  const listed = listAssignments(
    strong.map((i) => peaks[i]!),
    choices,
    most,
  );
  const best = listed[0];
  if (best === undefined || best.matched.length < FEWEST + 1) return null;
  const series = clusters(
    weak.flatMap((i) => {
      const nu = Math.sqrt(best.rydberg_eV / (best.gap_eV - peaks[i]!.energy_eV));
      return nu > 1 && nu < HIGHEST_JUDGED ? [{ nu, share: peaks[i]!.height / beside[i]! }] : [];
    }),
  );
  // The strong lines' own fraction is theirs: weak lines there are fading lines of the same series.
  const others = series.filter(({ defect }) => {
    const apart = defect - best.defect - Math.round(defect - best.defect);
    return Math.abs(apart) > 2 * ALIKE;
  });
  if (others.length === 0) return null;
  return {
    assignments: listed.map((one) => ({
      ...one,
      matched: one.matched.map(({ n, peak }) => ({ n, peak: strong[peak]! })),
      unmatched: one.unmatched.map((peak) => strong[peak]!),
    })),
    weak: others,
  };
}

/** Groups of lines whose fractional parts agree, each with neighbours in n; the largest first. */
function clusters(lines: readonly { readonly nu: number; readonly share: number }[]): WeakSeries[] {
  const out: WeakSeries[] = [];
  let left = [...lines];
  for (;;) {
    const groups = left.map(({ nu }) =>
      left.filter((other) => Math.abs(other.nu - nu - Math.round(other.nu - nu)) < ALIKE),
    );
    const group = groups.sort((a, b) => b.length - a.length)[0];
    if (group === undefined || group.length < FEWEST) return out;
    const first = group[0]!.nu;
    const mean = group.reduce((sum, { nu }) => sum + (nu - first - Math.round(nu - first)), 0) / group.length;
    // n is the whole number above n*, so that the defect lies between 0 and 1.
    const defect = Math.ceil(first + mean) - (first + mean);
    const n = [...new Set(group.map(({ nu }) => Math.round(nu + defect)))].sort((a, b) => a - b);
    const shares = group.map(({ share }) => share).sort((a, b) => a - b);
    left = left.filter((one) => !group.includes(one));
    if (n.length >= FEWEST && n[n.length - 1]! - n[0]! < 2 * n.length)
      out.push({ defect, n, share: shares[shares.length >> 1]! });
  }
}

const NAMES = ["second", "third", "fourth"];

/** The series in the form in which a protocol names them. */
function asExtra(weak: readonly WeakSeries[]): { name: string; defect: number; n: number[] }[] {
  return weak.slice(0, NAMES.length).map(({ defect, n }, i) => ({
    name: NAMES[i]!,
    defect: Number(defect.toFixed(2)),
    n: Array.from({ length: n[n.length - 1]! - n[0]! + 1 }, (_, j) => n[0]! + j),
  }));
}

/** The protocol with the weak series beside the strong one, where it names none itself. */
export function withWeakSeries(protocol: Protocol, weak: readonly WeakSeries[]): Protocol {
  if (protocol.series.extra.length > 0) return protocol;
  const extra = asExtra(weak).map((one) => ({
    ...one,
    hold_defect: false,
    width: "law" as const,
    asymmetry: "own" as const,
  }));
  return { ...protocol, series: { ...protocol.series, extra } };
}

export function weakSeriesNotes(protocol: Protocol, weak: readonly WeakSeries[]): Note[] {
  if (protocol.series.extra.length > 0) return [];
  const told = weak.map(
    ({ defect, n, share }) =>
      `n = ${n[0]} to ${n[n.length - 1]} with a defect near ${defect.toFixed(2)}, ${share.toPrecision(1)} times as strong`,
  );
  return [
    doubt(
      "every-other-line",
      "lines",
      `Weak lines stand between the strong ones at a fixed fraction of their spacing: read as another series with the same gap and Rydberg energy (${told.join("; ")}) and fitted beside it. All lines as one series would have about four times the Rydberg energy and strengths that alternate.`,
      `name the series yourself: series.extra=${JSON.stringify(asExtra(weak))}, with more n where they are seen`,
    ),
  ];
}
