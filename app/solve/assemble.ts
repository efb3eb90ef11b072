/** Instructions in the binary form of WebAssembly. */
export type Code = readonly number[];

/**
 * What      As much of an assembler for WebAssembly as a few numerical loops need: expressions are built from the inside
 *           out, each a list of bytes that leaves its value on the stack.
 * Source    WebAssembly Core Specification 2.0 (W3C), chapter 5 (binary format) with the fixed-width SIMD instructions.
 */
export const i32 = {
  get: (local: number): Code => [0x20, ...unsigned(local)],
  set: (local: number, value: Code): Code => [...value, 0x21, ...unsigned(local)],
  constant: (value: number): Code => [0x41, ...signed(value)],
  add: (a: Code, b: Code): Code => [...a, ...b, 0x6a],
  subtract: (a: Code, b: Code): Code => [...a, ...b, 0x6b],
  multiply: (a: Code, b: Code): Code => [...a, ...b, 0x6c],
  less: (a: Code, b: Code): Code => [...a, ...b, 0x48],
  atLeast: (a: Code, b: Code): Code => [...a, ...b, 0x4e],
  /** local := local + step */
  increase: (local: number, step: Code): Code => i32.set(local, i32.add(i32.get(local), step)),
  choose: (yes: Code, no: Code, condition: Code): Code => [...yes, ...no, ...condition, 0x1b],
} as const;

export const f64 = {
  get: i32.get,
  set: i32.set,
  constant: (value: number): Code => [0x44, ...new Uint8Array(Float64Array.of(value).buffer)],
  load: (address: Code, offset = 0): Code => [...address, 0x2b, 3, ...unsigned(offset)],
  store: (address: Code, value: Code, offset = 0): Code => [
    ...address,
    ...value,
    0x39,
    3,
    ...unsigned(offset),
  ],
  add: (a: Code, b: Code): Code => [...a, ...b, 0xa0],
  subtract: (a: Code, b: Code): Code => [...a, ...b, 0xa1],
  multiply: (a: Code, b: Code): Code => [...a, ...b, 0xa2],
  divide: (a: Code, b: Code): Code => [...a, ...b, 0xa3],
  root: (a: Code): Code => [...a, 0x9f],
  negate: (a: Code): Code => [...a, 0x9a],
  greater: (a: Code, b: Code): Code => [...a, ...b, 0x64],
  differs: (a: Code, b: Code): Code => [...a, ...b, 0x62],
  choose: i32.choose,
} as const;

/** Two doubles at once. */
export const pair = {
  get: i32.get,
  set: i32.set,
  zero: [0xfd, 0x0c, ...new Array<number>(16).fill(0)] as Code,
  load: (address: Code, offset = 0): Code => [...address, 0xfd, 0x00, 3, ...unsigned(offset)],
  store: (address: Code, value: Code, offset = 0): Code => [
    ...address,
    ...value,
    0xfd,
    0x0b,
    3,
    ...unsigned(offset),
  ],
  both: (value: Code): Code => [...value, 0xfd, 0x14],
  add: (a: Code, b: Code): Code => [...a, ...b, 0xfd, 0xf0, 0x01],
  subtract: (a: Code, b: Code): Code => [...a, ...b, 0xfd, 0xf1, 0x01],
  multiply: (a: Code, b: Code): Code => [...a, ...b, 0xfd, 0xf2, 0x01],
  /** local := local + value */
  increase: (local: number, value: Code): Code => pair.set(local, pair.add(pair.get(local), value)),
  /** Sum of the two halves of a local, a double. */
  sum: (local: number): Code =>
    f64.add([...pair.get(local), 0xfd, 0x21, 0], [...pair.get(local), 0xfd, 0x21, 1]),
} as const;

/** Runs the body, and again while the condition holds. */
export function repeat(body: Code, condition: Code): Code {
  return [0x03, 0x40, ...body, ...condition, 0x0d, 0, 0x0b];
}

export function when(condition: Code, body: Code): Code {
  return [...condition, 0x04, 0x40, ...body, 0x0b];
}

export type Kind = "i32" | "f64" | "pair";

const KIND: Record<Kind, number> = { i32: 0x7f, f64: 0x7c, pair: 0x7b };

/** A function without a result: parameters are i32 and are the first locals. */
export interface Routine {
  readonly name: string;
  readonly parameters: number;
  readonly locals: readonly Kind[];
  readonly body: Code;
}

/** Bytes of a module that exports the routines and its memory. */
export function assemble(routines: readonly Routine[], pages: number): Uint8Array<ArrayBuffer> {
  const types = routines.map(({ parameters }) => [
    0x60,
    ...unsigned(parameters),
    ...new Array<number>(parameters).fill(KIND.i32),
    0,
  ]);
  const exported = [
    ...routines.map(({ name }, place) => [...text(name), 0, ...unsigned(place)]),
    [...text("memory"), 2, 0],
  ];
  const bodies = routines.map(({ locals, body }) => {
    const code = [...vector(locals.map((kind) => [1, KIND[kind]])), ...body, 0x0b];
    return [...unsigned(code.length), ...code];
  });
  return Uint8Array.from([
    ...[0, 0x61, 0x73, 0x6d, 1, 0, 0, 0],
    ...section(1, vector(types)),
    ...section(3, vector(routines.map((_, place) => unsigned(place)))),
    ...section(5, vector([[0, ...unsigned(pages)]])),
    ...section(7, vector(exported)),
    ...section(10, vector(bodies)),
  ]);
}

function section(id: number, content: Code): Code {
  return [id, ...unsigned(content.length), ...content];
}

function vector(items: readonly Code[]): Code {
  return [...unsigned(items.length), ...items.flat()];
}

function text(name: string): Code {
  return [...unsigned(name.length), ...Array.from(name, (letter) => letter.charCodeAt(0))];
}

function unsigned(value: number): number[] {
  const out: number[] = [];
  do {
    const more = value > 127;
    out.push((value & 127) | (more ? 128 : 0));
    value >>>= 7;
  } while (value > 0);
  return out;
}

function signed(value: number): number[] {
  const out: number[] = [];
  for (;;) {
    const low = value & 127;
    value >>= 7;
    if ((value === 0 && (low & 64) === 0) || (value === -1 && (low & 64) !== 0)) return [...out, low];
    out.push(low | 128);
  }
}
