import type { Note } from "../../app/base/index.ts";
import type { Protocol, RunglineResult } from "../../app/protocol/index.ts";

/** How far a level can be trusted: filled, hollow or dashed rung. */
export type RungKind = "determined" | "doubtful" | "predicted";

export interface Rung {
  readonly n: number;
  readonly kind: RungKind;
  readonly energy_eV: number;
  /** Pixels from the top. */
  readonly y: number;
  readonly thickness: number;
  /** Whether there is room for the number n and for the energy. */
  readonly numbered: boolean;
  readonly measured: boolean;
}

export interface RungLayout {
  readonly gap_eV: number;
  readonly gapY: number;
  readonly rungs: readonly Rung[];
}

const GAP_Y = 14;
const BREAK = 26;
const FOOT = 26;
const PREDICTED_ABOVE = 4;
const THINNEST = 1.6;
const THICKEST = 13;
const NUMBER_ROOM = 11;
const ENERGY_ROOM = 15;

/**
 * What      The ladder as drawn: one rung per n, its place by the logarithm of its distance to the gap, which
 *           stretches the axis towards the gap so that high n can be told apart; thickness by the logarithm of the
 *           width, never more than its room.
 * Units     eV in; pixels out, from the top.
 */
export function rungLayout(result: RunglineResult, height: number): RungLayout | null {
  const gap = result.series?.gap_eV.value ?? null;
  const rydberg = result.series?.rydberg_eV.value ?? null;
  const defect = result.series?.defect0.value ?? 0;
  if (gap === null || rydberg === null || result.lines.length === 0) return null;
  const law = (n: number): number => gap - rydberg / (n - defect) ** 2;
  const first = result.lines[0]!.n;
  const last = result.lines[result.lines.length - 1]!.n;
  const known = new Map(result.lines.map((line, i) => [line.n, { line, i }]));
  const levels: Level[] = [];
  for (let n = first; n <= last + PREDICTED_ABOVE; n++) {
    const found = known.get(n);
    const energy = found?.line.energy_eV.value ?? null;
    if (found === undefined || energy === null || energy >= gap)
      levels.push({ n, kind: "predicted", energy_eV: law(n), width: null });
    else
      levels.push({
        n,
        kind: isDoubtful(result, found.i) ? "doubtful" : "determined",
        energy_eV: energy,
        width: found.line.width_eV.value,
      });
  }
  return place(levels, gap, height);
}

/** Before a fit: where the chosen material would have its levels. */
export function expectedLayout(protocol: Protocol, height: number): RungLayout | null {
  const { gap_eV: gap, rydberg_eV: rydberg, defect0, first_n: first } = protocol.material;
  if (gap === null || rydberg === null) return null;
  const start = first ?? 1;
  const levels = Array.from({ length: 14 }, (_, i): Level => {
    const n = start + i;
    return { n, kind: "predicted", energy_eV: gap - rydberg / (n - (defect0 ?? 0)) ** 2, width: null };
  });
  return place(levels, gap, height);
}

interface Level {
  readonly n: number;
  readonly kind: RungKind;
  readonly energy_eV: number;
  readonly width: number | null;
}

function place(levels: readonly Level[], gap: number, height: number): RungLayout {
  const depth = (level: Level): number => Math.log(Math.max(gap - level.energy_eV, 1e-9));
  const lowest = depth(levels[0]!);
  const highest = depth(levels[levels.length - 1]!);
  const top = GAP_Y + BREAK;
  const bottom = Math.max(top + 1, height - FOOT);
  const y = (level: Level): number =>
    lowest === highest ? bottom : top + ((depth(level) - highest) / (lowest - highest)) * (bottom - top);
  const widths = levels.flatMap((level) =>
    level.width !== null && level.width > 0 ? [Math.log(level.width)] : [],
  );
  const narrowest = Math.min(...widths);
  const widest = Math.max(...widths);
  let numberedAt = Infinity;
  const rungs = levels.map((level, i): Rung => {
    const at = y(level);
    const above = i + 1 < levels.length ? at - y(levels[i + 1]!) : Infinity;
    const below = i > 0 ? y(levels[i - 1]!) - at : Infinity;
    const room = Math.min(above, below);
    const share =
      level.width !== null && level.width > 0 && widest > narrowest
        ? (Math.log(level.width) - narrowest) / (widest - narrowest)
        : 0;
    const numbered = numberedAt - at >= NUMBER_ROOM;
    if (numbered) numberedAt = at;
    return {
      n: level.n,
      kind: level.kind,
      energy_eV: level.energy_eV,
      y: at,
      thickness: Math.max(THINNEST, Math.min(THINNEST + share * (THICKEST - THINNEST), 0.6 * room)),
      numbered,
      measured: numbered && room >= ENERGY_ROOM,
    };
  });
  return { gap_eV: gap, gapY: GAP_Y, rungs };
}

const SURE = 5;

/** Whether the line at this place is hardly seen, or a doubt is about it. A held area says nothing of how well it is seen. */
export function isDoubtful({ lines, notes }: RunglineResult, index: number): boolean {
  const { n, significance, area } = lines[index]!;
  if (significance < SURE && area.sigma !== 0) return true;
  return notesOfLine(notes, index, n).some((note) => note.level === "doubt");
}

/** Notes about one line: `lines[n=7]...`, `lines[n=7,8]...`, or `lines[i]...` with i its place in the result. */
export function notesOfLine(notes: readonly Note[], index: number, n: number): readonly Note[] {
  return notes.filter(({ about }) => {
    const match = /^lines\[(n=)?([\d,]+)\]/.exec(about);
    if (match === null) return false;
    const numbers = match[2]!.split(",").map(Number);
    return match[1] === undefined ? numbers[0] === index : numbers.includes(n);
  });
}
