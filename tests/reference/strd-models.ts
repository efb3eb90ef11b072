/**
 * The models of the certified problems with their derivatives, as the problems' own files state them.
 * gradient(x, b, g) writes df/db; `linear` lists the parameters in which the model is linear.
 */
export interface StrdModel {
  readonly linear: readonly number[];
  value(x: number, b: ArrayLike<number>): number;
  gradient(x: number, b: ArrayLike<number>, g: Float64Array): void;
}

const expSaturation: StrdModel = {
  linear: [0],
  value: (x, b) => -b[0]! * Math.expm1(-b[1]! * x),
  gradient: (x, b, g) => {
    g[0] = -Math.expm1(-b[1]! * x);
    g[1] = b[0]! * x * Math.exp(-b[1]! * x);
  },
};

const chwirut: StrdModel = {
  linear: [],
  value: (x, b) => Math.exp(-b[0]! * x) / (b[1]! + b[2]! * x),
  gradient: (x, b, g) => {
    const f = Math.exp(-b[0]! * x) / (b[1]! + b[2]! * x);
    g[0] = -x * f;
    g[1] = -f / (b[1]! + b[2]! * x);
    g[2] = x * g[1];
  },
};

const threeExponentials: StrdModel = {
  linear: [0, 2, 4],
  value: (x, b) => b[0]! * Math.exp(-b[1]! * x) + b[2]! * Math.exp(-b[3]! * x) + b[4]! * Math.exp(-b[5]! * x),
  gradient: (x, b, g) => {
    for (let i = 0; i < 6; i += 2) {
      g[i] = Math.exp(-b[i + 1]! * x);
      g[i + 1] = -x * b[i]! * g[i]!;
    }
  },
};

const twoGauss: StrdModel = {
  linear: [0, 2, 5],
  value: (x, b) =>
    b[0]! * Math.exp(-b[1]! * x) +
    b[2]! * Math.exp(-(((x - b[3]!) / b[4]!) ** 2)) +
    b[5]! * Math.exp(-(((x - b[6]!) / b[7]!) ** 2)),
  gradient: (x, b, g) => {
    g[0] = Math.exp(-b[1]! * x);
    g[1] = -x * b[0]! * g[0];
    for (let i = 2; i < 8; i += 3) {
      const u = (x - b[i + 1]!) / b[i + 2]!;
      g[i] = Math.exp(-u * u);
      g[i + 1] = (b[i]! * g[i]! * 2 * u) / b[i + 2]!;
      g[i + 2] = (b[i]! * g[i]! * 2 * u * u) / b[i + 2]!;
    }
  },
};

/** Numerator of degree up, denominator 1 + ... of degree down. */
function rational(up: number, down: number): StrdModel {
  const split = (x: number, b: ArrayLike<number>): [number, number] => {
    let numerator = 0;
    for (let i = up; i >= 0; i--) numerator = numerator * x + b[i]!;
    let denominator = 0;
    for (let i = down; i >= 1; i--) denominator = (denominator + b[up + i]!) * x;
    return [numerator, 1 + denominator];
  };
  return {
    linear: Array.from({ length: up + 1 }, (_, i) => i),
    value: (x, b) => {
      const [numerator, denominator] = split(x, b);
      return numerator / denominator;
    },
    gradient: (x, b, g) => {
      const [numerator, denominator] = split(x, b);
      for (let i = 0; i <= up; i++) g[i] = x ** i / denominator;
      for (let i = 1; i <= down; i++) g[up + i] = (-numerator * x ** i) / denominator ** 2;
    },
  };
}

export const STRD_MODELS: Readonly<Record<string, StrdModel>> = {
  Misra1a: expSaturation,
  BoxBOD: expSaturation,
  Misra1b: {
    linear: [0],
    value: (x, b) => b[0]! * (1 - (1 + (b[1]! * x) / 2) ** -2),
    gradient: (x, b, g) => {
      g[0] = 1 - (1 + (b[1]! * x) / 2) ** -2;
      g[1] = b[0]! * x * (1 + (b[1]! * x) / 2) ** -3;
    },
  },
  Misra1c: {
    linear: [0],
    value: (x, b) => b[0]! * (1 - (1 + 2 * b[1]! * x) ** -0.5),
    gradient: (x, b, g) => {
      g[0] = 1 - (1 + 2 * b[1]! * x) ** -0.5;
      g[1] = b[0]! * x * (1 + 2 * b[1]! * x) ** -1.5;
    },
  },
  Misra1d: {
    linear: [0],
    value: (x, b) => (b[0]! * b[1]! * x) / (1 + b[1]! * x),
    gradient: (x, b, g) => {
      g[0] = (b[1]! * x) / (1 + b[1]! * x);
      g[1] = (b[0]! * x) / (1 + b[1]! * x) ** 2;
    },
  },
  Chwirut1: chwirut,
  Chwirut2: chwirut,
  DanWood: {
    linear: [0],
    value: (x, b) => b[0]! * x ** b[1]!,
    gradient: (x, b, g) => {
      g[0] = x ** b[1]!;
      g[1] = b[0]! * g[0] * Math.log(x);
    },
  },
  Lanczos1: threeExponentials,
  Lanczos2: threeExponentials,
  Lanczos3: threeExponentials,
  Gauss1: twoGauss,
  Gauss2: twoGauss,
  Gauss3: twoGauss,
  Kirby2: rational(2, 2),
  Hahn1: rational(3, 3),
  Thurber: rational(3, 3),
  MGH09: {
    linear: [0],
    value: (x, b) => (b[0]! * (x * x + x * b[1]!)) / (x * x + x * b[2]! + b[3]!),
    gradient: (x, b, g) => {
      const d = x * x + x * b[2]! + b[3]!;
      g[0] = (x * x + x * b[1]!) / d;
      g[1] = (b[0]! * x) / d;
      g[2] = (-b[0]! * g[0] * x) / d;
      g[3] = (-b[0]! * g[0]) / d;
    },
  },
  MGH10: {
    linear: [0],
    value: (x, b) => b[0]! * Math.exp(b[1]! / (x + b[2]!)),
    gradient: (x, b, g) => {
      g[0] = Math.exp(b[1]! / (x + b[2]!));
      g[1] = (b[0]! * g[0]) / (x + b[2]!);
      g[2] = (-g[1] * b[1]!) / (x + b[2]!);
    },
  },
  MGH17: {
    linear: [0, 1, 2],
    value: (x, b) => b[0]! + b[1]! * Math.exp(-x * b[3]!) + b[2]! * Math.exp(-x * b[4]!),
    gradient: (x, b, g) => {
      g[0] = 1;
      g[1] = Math.exp(-x * b[3]!);
      g[2] = Math.exp(-x * b[4]!);
      g[3] = -x * b[1]! * g[1];
      g[4] = -x * b[2]! * g[2];
    },
  },
  Eckerle4: {
    linear: [0],
    value: (x, b) => (b[0]! / b[1]!) * Math.exp(-0.5 * ((x - b[2]!) / b[1]!) ** 2),
    gradient: (x, b, g) => {
      const u = (x - b[2]!) / b[1]!;
      g[0] = Math.exp(-0.5 * u * u) / b[1]!;
      g[1] = (b[0]! * g[0] * (u * u - 1)) / b[1]!;
      g[2] = (b[0]! * g[0] * u) / b[1]!;
    },
  },
  Rat42: {
    linear: [0],
    value: (x, b) => b[0]! / (1 + Math.exp(b[1]! - b[2]! * x)),
    gradient: (x, b, g) => {
      const e = Math.exp(b[1]! - b[2]! * x);
      g[0] = 1 / (1 + e);
      g[1] = -b[0]! * e * g[0] * g[0];
      g[2] = -x * g[1];
    },
  },
  Rat43: {
    linear: [0],
    value: (x, b) => b[0]! / (1 + Math.exp(b[1]! - b[2]! * x)) ** (1 / b[3]!),
    gradient: (x, b, g) => {
      const e = Math.exp(b[1]! - b[2]! * x);
      g[0] = (1 + e) ** (-1 / b[3]!);
      g[1] = (-b[0]! * g[0] * e) / (1 + e) / b[3]!;
      g[2] = -x * g[1];
      g[3] = (b[0]! * g[0] * Math.log1p(e)) / b[3]! ** 2;
    },
  },
  Bennett5: {
    linear: [0],
    value: (x, b) => b[0]! * (b[1]! + x) ** (-1 / b[2]!),
    gradient: (x, b, g) => {
      g[0] = (b[1]! + x) ** (-1 / b[2]!);
      g[1] = (-b[0]! * g[0]) / (b[2]! * (b[1]! + x));
      g[2] = (b[0]! * g[0] * Math.log(b[1]! + x)) / b[2]! ** 2;
    },
  },
  ENSO: {
    linear: [0, 1, 2, 4, 5, 7, 8],
    value: (x, b) => {
      const t = 2 * Math.PI * x;
      return (
        b[0]! +
        b[1]! * Math.cos(t / 12) +
        b[2]! * Math.sin(t / 12) +
        b[4]! * Math.cos(t / b[3]!) +
        b[5]! * Math.sin(t / b[3]!) +
        b[7]! * Math.cos(t / b[6]!) +
        b[8]! * Math.sin(t / b[6]!)
      );
    },
    gradient: (x, b, g) => {
      const t = 2 * Math.PI * x;
      g[0] = 1;
      g[1] = Math.cos(t / 12);
      g[2] = Math.sin(t / 12);
      for (let i = 3; i < 9; i += 3) {
        const c = Math.cos(t / b[i]!);
        const s = Math.sin(t / b[i]!);
        g[i] = ((b[i + 1]! * s - b[i + 2]! * c) * t) / b[i]! ** 2;
        g[i + 1] = c;
        g[i + 2] = s;
      }
    },
  },
  Roszman1: {
    linear: [0, 1],
    value: (x, b) => b[0]! - b[1]! * x - Math.atan(b[2]! / (x - b[3]!)) / Math.PI,
    gradient: (x, b, g) => {
      const u = x - b[3]!;
      const d = Math.PI * (u * u + b[2]! * b[2]!);
      g[0] = 1;
      g[1] = -x;
      g[2] = -u / d;
      g[3] = -b[2]! / d;
    },
  },
};
