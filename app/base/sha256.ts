/**
 * What      SHA-256 of bytes, as lower-case hexadecimal; in plain code, since the shells' own are asynchronous or absent.
 * Source    FIPS PUB 180-4 (2015), sections 4.1.2, 5, 6.2. The constants are the first 32 bits of the fractional
 *           parts of the square and cube roots of the first primes, computed here rather than listed.
 */
const { initial, round } = constants();

function constants(): { initial: Int32Array; round: Int32Array } {
  const initialWords = new Int32Array(8);
  const roundWords = new Int32Array(64);
  let found = 0;
  for (let candidate = 2; found < 64; candidate++) {
    let prime = true;
    for (let divisor = 2; divisor * divisor <= candidate; divisor++)
      if (candidate % divisor === 0) prime = false;
    if (!prime) continue;
    const fraction = (x: number): number => Math.floor((x - Math.floor(x)) * 4294967296) | 0;
    if (found < 8) initialWords[found] = fraction(Math.sqrt(candidate));
    roundWords[found++] = fraction(Math.cbrt(candidate));
  }
  return { initial: initialWords, round: roundWords };
}

export function sha256(bytes: Uint8Array): string {
  const blocks = Math.floor((bytes.length + 8) / 64) + 1;
  const tail = new Uint8Array(64 * 2);
  const whole = Math.floor(bytes.length / 64);
  tail.set(bytes.subarray(64 * whole));
  tail[bytes.length - 64 * whole] = 0x80;
  const tailView = new DataView(tail.buffer);
  const tailLength = (blocks - whole) * 64;
  tailView.setUint32(tailLength - 8, Math.floor(bytes.length / 0x20000000));
  tailView.setUint32(tailLength - 4, (bytes.length << 3) >>> 0);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const h = new Int32Array(initial);
  const w = new Int32Array(64);
  for (let block = 0; block < blocks; block++) {
    const source = block < whole ? view : tailView;
    const base = 64 * (block < whole ? block : block - whole);
    for (let i = 0; i < 16; i++) w[i] = source.getInt32(base + 4 * i);
    for (let i = 16; i < 64; i++) {
      const x = w[i - 15]!;
      const y = w[i - 2]!;
      const s0 = ((x >>> 7) | (x << 25)) ^ ((x >>> 18) | (x << 14)) ^ (x >>> 3);
      const s1 = ((y >>> 17) | (y << 15)) ^ ((y >>> 19) | (y << 13)) ^ (y >>> 10);
      w[i] = (w[i - 16]! + s0 + w[i - 7]! + s1) | 0;
    }
    let a = h[0]!,
      b = h[1]!,
      c = h[2]!,
      d = h[3]!,
      e = h[4]!,
      f = h[5]!,
      g = h[6]!,
      k = h[7]!;
    for (let i = 0; i < 64; i++) {
      const s1 = ((e >>> 6) | (e << 26)) ^ ((e >>> 11) | (e << 21)) ^ ((e >>> 25) | (e << 7));
      const t1 = (k + s1 + ((e & f) ^ (~e & g)) + round[i]! + w[i]!) | 0;
      const s0 = ((a >>> 2) | (a << 30)) ^ ((a >>> 13) | (a << 19)) ^ ((a >>> 22) | (a << 10));
      const t2 = (s0 + ((a & b) ^ (a & c) ^ (b & c))) | 0;
      k = g;
      g = f;
      f = e;
      e = (d + t1) | 0;
      d = c;
      c = b;
      b = a;
      a = (t1 + t2) | 0;
    }
    h[0]! += a;
    h[1]! += b;
    h[2]! += c;
    h[3]! += d;
    h[4]! += e;
    h[5]! += f;
    h[6]! += g;
    h[7]! += k;
  }
  return Array.from(h, (word) => (word >>> 0).toString(16).padStart(8, "0")).join("");
}
