import { backSubstitute, choleskyInto, forwardSubstitute } from "./cholesky.ts";
import { reflect } from "./pivotedQr.ts";

/** What steers a step: either the normal matrix A = J'J or a triangle R with R'R = J'J and b with R'b = g. */
export interface Steering {
  readonly p: number;
  orthogonal: boolean;
  /** A (p x p, row-major) in normal mode, R (p x p, row-major) in orthogonal mode. */
  readonly matrix: Float64Array;
  /** b (p), orthogonal mode only. */
  readonly right: Float64Array;
  /** g = J'r (p), always from every row. */
  readonly gradient: Float64Array;
  /** |J_j| (p) as the matrix has it. */
  readonly lengths: Float64Array;
}

export interface DampedStep {
  /** |S delta|. */
  readonly length: number;
  readonly damping: number;
  /** Fall of |r|^2 that the linear model promises for this step, and for the step without a length limit. */
  readonly predicted: number;
  readonly predictedFree: number;
  /** g'delta, half the slope of the fall at the start of the step. */
  readonly slope: number;
}

/**
 * Damping of the undamped step, relative to the present length of each column (not to the largest it ever had, or a
 * parameter whose influence has died away would look as if it stood at its minimum).
 */
const LEAST_DAMPING = 1e-14;

/**
 * What      The step of a Levenberg-Marquardt iteration within bounds:
 *           min |r - J delta|^2 subject to |S delta| <= radius and low <= delta <= high.
 *           For a given damping lambda the box problem is a strictly convex quadratic programme, solved exactly by a
 *           primal active-set method; lambda follows from |S delta(lambda)| = radius by More's safeguarded Newton
 *           iteration. Without bounds in reach this is More's method.
 * Shapes    S, low, high, delta (p); low <= 0 <= high.
 * Units     delta in those of the parameters; S in their inverse times that of the residual.
 * Domain    parameters with low = high = 0 stay; singular J is met by a damping of 1e-14 relative.
 * Accuracy  steers only; the gradient it is given decides where the iteration ends.
 * Source    More, The Levenberg-Marquardt algorithm, Lecture Notes in Mathematics 630, 105 (1978), section 5; active
 *           set after Nocedal and Wright, Numerical Optimization, 2nd ed. (2006), algorithm 16.3.
 */
export class StepFinder {
  private readonly p: number;
  private readonly free: Uint8Array;
  private readonly list: Int32Array;
  private readonly target: Float64Array;
  private readonly multiplier: Float64Array;
  private readonly hessian: Float64Array;
  private readonly lower: Float64Array;
  private readonly stacked: Float64Array;
  private readonly image: Float64Array;
  private readonly ridge: Float64Array;
  private count = 0;

  constructor(p: number) {
    this.p = p;
    this.free = new Uint8Array(p);
    this.list = new Int32Array(p);
    this.target = new Float64Array(p);
    this.multiplier = new Float64Array(p);
    this.hessian = new Float64Array(p * p);
    this.lower = new Float64Array(p * p);
    this.stacked = new Float64Array(2 * p * (p + 1));
    this.image = new Float64Array(p);
    this.ridge = new Float64Array(p);
  }

  find(
    steering: Steering,
    scale: Float64Array,
    low: Float64Array,
    high: Float64Array,
    radius: number,
    previousDamping: number,
    delta: Float64Array,
  ): DampedStep {
    const { p } = this;
    const { ridge } = this;
    for (let j = 0; j < p; j++) ridge[j] = steering.lengths[j]! > 0 ? steering.lengths[j]! : scale[j]!;
    this.solveBox(steering, ridge, low, high, LEAST_DAMPING, delta);
    let length = scaledNorm(delta, scale);
    const predictedFree = this.promise(steering, delta);
    if (length <= 1.1 * radius) {
      const slope = dot(steering.gradient, delta);
      return { length, damping: 0, predicted: predictedFree, predictedFree, slope };
    }

    let bottom = 0;
    let top = 0;
    for (let i = 0; i < p; i++) {
      if (low[i] === 0 && high[i] === 0) continue;
      top += (steering.gradient[i]! / scale[i]!) ** 2;
    }
    top = Math.sqrt(top) / radius;
    const first = this.newton(scale, delta, length, radius);
    if (Number.isFinite(first)) bottom = Math.min(Math.max(0, first), top);
    let damping = Math.min(Math.max(previousDamping, bottom), top);
    if (damping === 0) damping = Math.max(1e-3 * top, Math.sqrt(bottom * top));
    for (let turn = 0; turn < 12; turn++) {
      this.solveBox(steering, scale, low, high, Math.max(damping, LEAST_DAMPING), delta);
      length = scaledNorm(delta, scale);
      if (Math.abs(length - radius) <= 0.1 * radius || top - bottom <= 1e-12 * top) break;
      if (length > radius) bottom = Math.max(bottom, damping);
      else top = Math.min(top, damping);
      const change = this.newton(scale, delta, length, radius);
      let next = damping + change;
      if (!(next > bottom && next < top)) next = Math.max(Math.sqrt(bottom * top), 1e-3 * top);
      damping = next;
    }
    const slope = dot(steering.gradient, delta);
    return { length, damping, predicted: this.promise(steering, delta), predictedFree, slope };
  }

  /** Newton's change of the damping, from the factor of the last free system. */
  private newton(scale: Float64Array, delta: Float64Array, length: number, radius: number): number {
    const { count, list, target } = this;
    for (let a = 0; a < count; a++) {
      const i = list[a]!;
      target[a] = scale[i]! * scale[i]! * delta[i]!;
    }
    forwardSubstitute(this.lower, count, target);
    let square = 0;
    for (let a = 0; a < count; a++) square += target[a]! * target[a]!;
    return ((length - radius) / radius) * ((length * length) / square);
  }

  /** 2 g'delta - |J delta|^2. */
  private promise(steering: Steering, delta: Float64Array): number {
    const { p, image } = this;
    const linear = dot(steering.gradient, delta);
    let square = 0;
    for (let i = 0; i < p; i++) {
      let sum = 0;
      for (let j = 0; j < p; j++) sum += steering.matrix[i * p + j]! * delta[j]!;
      image[i] = sum;
      square += steering.orthogonal ? sum * sum : sum * delta[i]!;
    }
    return 2 * linear - square;
  }

  private solveBox(
    steering: Steering,
    scale: Float64Array,
    low: Float64Array,
    high: Float64Array,
    damping: number,
    delta: Float64Array,
  ): void {
    const { p, free, list, target } = this;
    delta.fill(0);
    for (let i = 0; i < p; i++) {
      const g = steering.gradient[i]!;
      free[i] =
        (g < 0 && low[i] === 0) || (g > 0 && high[i] === 0) || (low[i] === 0 && high[i] === 0) ? 0 : 1;
    }
    for (let turn = 0; turn < 4 * p + 8; turn++) {
      this.count = 0;
      for (let i = 0; i < p; i++) if (free[i] === 1) list[this.count++] = i;
      if (this.count > 0) {
        this.solveFree(steering, scale, damping, delta);
        let part = 1;
        let blocking = -1;
        for (let a = 0; a < this.count; a++) {
          const i = list[a]!;
          const change = target[a]! - delta[i]!;
          if (delta[i]! + change < low[i]!) {
            const fraction = (low[i]! - delta[i]!) / change;
            if (fraction < part) {
              part = fraction;
              blocking = i;
            }
          } else if (delta[i]! + change > high[i]!) {
            const fraction = (high[i]! - delta[i]!) / change;
            if (fraction < part) {
              part = fraction;
              blocking = i;
            }
          }
        }
        for (let a = 0; a < this.count; a++) {
          const i = list[a]!;
          delta[i] =
            part === 1
              ? Math.min(Math.max(target[a]!, low[i]!), high[i]!)
              : delta[i]! + part * (target[a]! - delta[i]!);
        }
        if (blocking >= 0) {
          delta[blocking] =
            target[this.positionOf(blocking)]! < delta[blocking]! ? low[blocking]! : high[blocking]!;
          free[blocking] = 0;
          continue;
        }
      }
      const release = this.worstMultiplier(steering, scale, low, high, damping, delta);
      if (release < 0) return;
      free[release] = 1;
    }
  }

  private positionOf(parameter: number): number {
    let a = 0;
    while (this.list[a] !== parameter) a++;
    return a;
  }

  /** The held parameter that most wants to leave its bound, -1 if none does. */
  private worstMultiplier(
    steering: Steering,
    scale: Float64Array,
    low: Float64Array,
    high: Float64Array,
    damping: number,
    delta: Float64Array,
  ): number {
    const { p, free, image, multiplier } = this;
    if (this.count === p) return -1;
    const m = steering.matrix;
    for (let i = 0; i < p; i++) {
      let sum = 0;
      for (let j = 0; j < p; j++) sum += m[i * p + j]! * delta[j]!;
      image[i] = sum;
    }
    let worst = -1;
    let size = 0;
    for (let i = 0; i < p; i++) {
      if (free[i] === 1 || (low[i] === 0 && high[i] === 0)) continue;
      let product = image[i]!;
      if (steering.orthogonal) {
        product = 0;
        for (let j = 0; j < p; j++) product += m[j * p + i]! * image[j]!;
      }
      const s = scale[i]!;
      multiplier[i] = (steering.gradient[i]! - product - damping * s * s * delta[i]!) / s;
      const inward = delta[i] === low[i] ? multiplier[i]! : -multiplier[i]!;
      const noise = 1e-13 * ((Math.abs(steering.gradient[i]!) + Math.abs(product)) / s);
      if (inward > size && inward > noise) {
        size = inward;
        worst = i;
      }
    }
    return worst;
  }

  /** target := the free parameters' minimum with the held ones where delta has them; `lower` keeps the factor. */
  private solveFree(steering: Steering, scale: Float64Array, damping: number, delta: Float64Array): void {
    if (steering.orthogonal) this.solveFreeOrthogonal(steering, scale, damping, delta);
    else this.solveFreeNormal(steering, scale, damping, delta);
  }

  private solveFreeNormal(
    steering: Steering,
    scale: Float64Array,
    damping: number,
    delta: Float64Array,
  ): void {
    const { p, count, list, free, hessian, target, lower } = this;
    const m = steering.matrix;
    for (let extra = damping; ; extra = Math.max(extra * 100, LEAST_DAMPING)) {
      for (let a = 0; a < count; a++) {
        const i = list[a]!;
        for (let b = 0; b < count; b++) hessian[a * count + b] = m[i * p + list[b]!]!;
        hessian[a * count + a] = hessian[a * count + a]! + extra * scale[i]! * scale[i]!;
        let right = steering.gradient[i]!;
        for (let j = 0; j < p; j++) if (free[j] === 0) right -= m[i * p + j]! * delta[j]!;
        target[a] = right;
      }
      if (choleskyInto(hessian, count, lower) > 0) break;
      if (!(extra < 1e10)) {
        target.fill(0);
        return;
      }
    }
    forwardSubstitute(lower, count, target);
    backSubstitute(lower, count, target);
  }

  private solveFreeOrthogonal(
    steering: Steering,
    scale: Float64Array,
    damping: number,
    delta: Float64Array,
  ): void {
    const { p, count, list, free, stacked, target, lower } = this;
    const m = steering.matrix;
    const rows = p + count;
    const root = Math.sqrt(damping);
    stacked.fill(0, 0, rows * (count + 1));
    for (let b = 0; b < count; b++) {
      const j = list[b]!;
      for (let i = 0; i < p; i++) stacked[b * rows + i] = m[i * p + j]!;
      stacked[b * rows + p + b] = root * scale[j]!;
    }
    for (let i = 0; i < p; i++) {
      let right = steering.right[i]!;
      for (let j = 0; j < p; j++) if (free[j] === 0) right -= m[i * p + j]! * delta[j]!;
      stacked[count * rows + i] = right;
    }
    for (let b = 0; b < count; b++) reflect(stacked, rows, count + 1, b, b);
    for (let a = 0; a < count; a++) {
      target[a] = stacked[count * rows + a]!;
      for (let b = 0; b < count; b++) lower[a * count + b] = b <= a ? stacked[a * rows + b]! : 0;
    }
    // `lower` is R', so that R x = target is the back substitution of the Cholesky form.
    backSubstitute(lower, count, target);
  }
}

export function scaledNorm(v: Float64Array, scale: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < v.length; i++) sum += (v[i]! * scale[i]!) ** 2;
  return Math.sqrt(sum);
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}
