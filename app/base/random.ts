/**
 * What      Seeded random numbers: uniform on [0, 1) with 53 bits, and standard normal.
 * Source    Uniform bits: xoshiro128** 1.1 (Blackman and Vigna, ACM Trans. Math. Softw. 47, 36 (2021)), state
 *           filled by splitmix32; normal: polar method (Marsaglia and Bray, SIAM Rev. 6, 260 (1964)).
 */
export interface Random {
  uniform(): number;
  normal(): number;
}

/** Streams 1, 2, ... of one seed are different numbers, each known without the others; stream 0 is the seed's own. */
export function makeRandom(seed: number, stream = 0): Random {
  let [a, b, c, d] = splitmix(seed);
  if (stream > 0) [c, d] = splitmix(stream);
  const bits = (): number => {
    const m = Math.imul(b, 5);
    const result = Math.imul((m << 7) | (m >>> 25), 9) >>> 0;
    const t = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= t;
    d = (d << 11) | (d >>> 21);
    return result;
  };
  // Streams of one seed have two words of their state in common.
  if (stream > 0) for (let i = 0; i < MIXING; i++) bits();
  const uniform = (): number => ((bits() >>> 5) * 67108864 + (bits() >>> 6)) / 9007199254740992;
  let spare: number | null = null;
  const normal = (): number => {
    if (spare !== null) {
      const value = spare;
      spare = null;
      return value;
    }
    let u: number, v: number, r: number;
    do {
      u = 2 * uniform() - 1;
      v = 2 * uniform() - 1;
      r = u * u + v * v;
    } while (r >= 1 || r === 0);
    const f = Math.sqrt((-2 * Math.log(r)) / r);
    spare = v * f;
    return u * f;
  };
  return { uniform, normal };
}

/** Steps until all of the state depends on every word of its start. */
const MIXING = 32;

/** Four words of splitmix32, which are not all zero; the first alone tells the seed. */
function splitmix(seed: number): [number, number, number, number] {
  let s = seed >>> 0;
  const next32 = (): number => {
    s = (s + 0x9e3779b9) | 0;
    let t = s ^ (s >>> 16);
    t = Math.imul(t, 0x21f0aaad);
    t ^= t >>> 15;
    t = Math.imul(t, 0x735a2d97);
    return (t ^ (t >>> 15)) >>> 0;
  };
  return [next32(), next32(), next32(), next32()];
}
