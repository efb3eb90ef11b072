import { assemble, f64, i32, pair, repeat, when, type Code, type Kind, type Routine } from "./assemble.ts";

/** Rows of a block in `products`, and in `eliminate`; both are built into the code as distances of columns. */
export const PRODUCT_ROWS = 128;
export const ELIMINATE_ROWS = 64;

const DOUBLE = 8;
const PAGE = 65_536;

/**
 * What      The two loops that most of a fit is spent in, compiled, two doubles at a time:
 *           products(a, na, b, nb, bytes, out, ld, symmetric): out += A'B for a block of rows, na a multiple of 4, nb of 2;
 *           symmetric: only columns up to the diagonal's tile;
 *           eliminate(r, block, n, bytes): folds a block of rows into the triangle r as rowBlockTriangle.ts says.
 * Shapes    columns one after another, PRODUCT_ROWS or ELIMINATE_ROWS apart; `bytes` is 8 times the rows in use, made up
 *           with zeros to a multiple of 4 rows; out row-major with `ld` bytes a row, r (n x n, row-major). All are byte
 *           addresses in the module's memory.
 * Accuracy  that of the plain loops; sums are taken in another order (tests/app/solve/vector-kernels.test.ts).
 * Source    gram.ts and rowBlockTriangle.ts, of which this is a translation.
 */
export interface VectorKernels {
  readonly products: (
    a: number,
    na: number,
    b: number,
    nb: number,
    bytes: number,
    out: number,
    ld: number,
    symmetric: number,
  ) => void;
  readonly eliminate: (r: number, block: number, n: number, bytes: number) => void;
  /** The first `doubles` numbers of the memory, which grows to hold them; valid until the next call. */
  readonly room: (doubles: number) => Float64Array;
}

let made: VectorKernels | null | undefined;

/** Null where the machine or the page's policy has no WebAssembly with SIMD: the plain loops serve then. */
export function vectorKernels(): VectorKernels | null {
  if (made === undefined) made = makeKernels();
  return made;
}

/** For tests: the plain loops from now on, or the compiled ones again. */
export function usePlainLoops(plain: boolean): void {
  made = plain ? null : makeKernels();
}

function makeKernels(): VectorKernels | null {
  try {
    const { exports } = new WebAssembly.Instance(new WebAssembly.Module(assemble([PRODUCTS, ELIMINATE], 1)));
    const memory = exports["memory"] as WebAssembly.Memory;
    let view = new Float64Array(memory.buffer);
    return {
      products: exports["products"] as VectorKernels["products"],
      eliminate: exports["eliminate"] as VectorKernels["eliminate"],
      room: (doubles) => {
        const missing = doubles * DOUBLE - memory.buffer.byteLength;
        if (missing > 0) {
          memory.grow(Math.ceil(missing / PAGE));
          view = new Float64Array(memory.buffer);
        }
        return view;
      },
    };
  } catch {
    return null;
  }
}

/** Places of a routine's locals by name: parameters, then whole numbers, doubles and pairs. */
function nameLocals(
  parameters: readonly string[],
  integers: readonly string[],
  doubles: readonly string[],
  pairs: readonly string[],
): { at: (name: string) => number; locals: Kind[] } {
  const all = [...parameters, ...integers, ...doubles, ...pairs];
  return {
    at: (name) => all.indexOf(name),
    locals: [
      ...integers.map((): Kind => "i32"),
      ...doubles.map((): Kind => "f64"),
      ...pairs.map((): Kind => "pair"),
    ],
  };
}

function makeProducts(): Routine {
  const sums = ["s00", "s01", "s10", "s11", "s20", "s21", "s30", "s31"];
  const { at, locals } = nameLocals(
    ["a", "na", "b", "nb", "bytes", "out", "ld", "symmetric"],
    ["i", "j", "limit", "bj", "oj", "p", "q", "end"],
    [],
    ["y0", "y1", "x", ...sums],
  );
  const get = (name: string): Code => i32.get(at(name));
  const set = (name: string, value: Code): Code => i32.set(at(name), value);
  const column = PRODUCT_ROWS * DOUBLE;
  const rows = [0, 1, 2, 3];
  const inner = repeat(
    [
      ...set("y0", pair.load(get("q"))),
      ...set("y1", pair.load(get("q"), column)),
      ...rows.flatMap((r) => [
        ...set("x", pair.load(get("p"), r * column)),
        ...pair.increase(at(`s${r}0`), pair.multiply(get("x"), get("y0"))),
        ...pair.increase(at(`s${r}1`), pair.multiply(get("x"), get("y1"))),
      ]),
      ...i32.increase(at("p"), i32.constant(16)),
      ...i32.increase(at("q"), i32.constant(16)),
    ],
    i32.less(get("p"), get("end")),
  );
  const addTo = (sum: number, offset: number): Code =>
    f64.store(get("q"), f64.add(f64.load(get("q"), offset), pair.sum(sum)), offset);
  const tile = [
    ...sums.flatMap((sum) => set(sum, pair.zero)),
    ...set("p", get("a")),
    ...set("q", get("bj")),
    ...inner,
    ...set("q", get("oj")),
    ...rows.flatMap((r) => [
      ...addTo(at(`s${r}0`), 0),
      ...addTo(at(`s${r}1`), DOUBLE),
      ...i32.increase(at("q"), get("ld")),
    ]),
  ];
  const overColumns = [
    ...set("limit", i32.choose(i32.add(get("i"), i32.constant(4)), get("nb"), get("symmetric"))),
    ...set("j", i32.constant(0)),
    ...set("bj", get("b")),
    ...set("oj", get("out")),
    ...set("end", i32.add(get("a"), get("bytes"))),
    ...repeat(
      [
        ...tile,
        ...i32.increase(at("j"), i32.constant(2)),
        ...i32.increase(at("bj"), i32.constant(2 * column)),
        ...i32.increase(at("oj"), i32.constant(2 * DOUBLE)),
      ],
      i32.less(get("j"), get("limit")),
    ),
  ];
  const body = repeat(
    [
      ...overColumns,
      ...i32.increase(at("i"), i32.constant(4)),
      ...i32.increase(at("a"), i32.constant(4 * column)),
      ...i32.increase(at("out"), i32.multiply(get("ld"), i32.constant(4))),
    ],
    i32.less(get("i"), get("na")),
  );
  return { name: "products", parameters: 8, locals, body };
}

function makeEliminate(): Routine {
  const { at, locals } = nameLocals(
    ["r", "block", "n", "bytes"],
    ["j", "c", "b", "rc", "p", "q", "end"],
    ["tail", "head", "beta", "tau", "t"],
    ["v", "s0", "s1", "s2", "s3"],
  );
  const get = (name: string): Code => i32.get(at(name));
  const set = (name: string, value: Code): Code => i32.set(at(name), value);
  const column = ELIMINATE_ROWS * DOUBLE;
  const restart = [...set("p", get("block")), ...set("q", get("b"))];
  const step = (body: Code): Code =>
    repeat(
      [...body, ...i32.increase(at("p"), i32.constant(16)), ...i32.increase(at("q"), i32.constant(16))],
      i32.less(get("p"), get("end")),
    );
  /** The reflection on `wide` columns that begin at b. */
  const reflect = (wide: number): Code => {
    const range = Array.from({ length: wide }, (_, place) => place);
    return [
      ...range.flatMap((w) => pair.set(at(`s${w}`), pair.zero)),
      ...restart,
      ...step([
        ...set("v", pair.load(get("p"))),
        ...range.flatMap((w) =>
          pair.increase(at(`s${w}`), pair.multiply(get("v"), pair.load(get("q"), w * column))),
        ),
      ]),
      ...range.flatMap((w) => [
        ...set(
          "t",
          f64.multiply(get("tau"), f64.add(f64.load(get("rc"), w * DOUBLE), pair.sum(at(`s${w}`)))),
        ),
        ...f64.store(get("rc"), f64.subtract(f64.load(get("rc"), w * DOUBLE), get("t")), w * DOUBLE),
        ...pair.set(at(`s${w}`), pair.both(get("t"))),
      ]),
      ...restart,
      ...step([
        ...set("v", pair.load(get("p"))),
        ...range.flatMap((w) =>
          pair.store(
            get("q"),
            pair.subtract(pair.load(get("q"), w * column), pair.multiply(get("v"), get(`s${w}`))),
            w * column,
          ),
        ),
      ]),
      ...i32.increase(at("c"), i32.constant(-wide)),
      ...i32.increase(at("rc"), i32.constant(wide * DOUBLE)),
      ...i32.increase(at("b"), i32.constant(wide * column)),
    ];
  };
  const while_ = (wide: number): Code => {
    const enough = i32.atLeast(get("c"), i32.constant(wide));
    return when(enough, repeat(reflect(wide), enough));
  };
  const eliminateColumn = [
    ...set("head", f64.load(get("r"))),
    ...set("beta", f64.root(f64.add(f64.multiply(get("head"), get("head")), get("tail")))),
    ...set(
      "beta",
      f64.choose(f64.negate(get("beta")), get("beta"), f64.greater(get("head"), f64.constant(0))),
    ),
    ...set("tau", f64.divide(f64.subtract(get("beta"), get("head")), get("beta"))),
    ...set("v", pair.both(f64.divide(f64.constant(1), f64.subtract(get("head"), get("beta"))))),
    ...restart,
    ...step(pair.store(get("p"), pair.multiply(pair.load(get("p")), get("v")))),
    ...f64.store(get("r"), get("beta")),
    ...set("c", i32.subtract(i32.subtract(get("n"), i32.constant(1)), get("j"))),
    ...set("rc", i32.add(get("r"), i32.constant(DOUBLE))),
    ...set("b", i32.add(get("block"), i32.constant(column))),
    ...while_(4),
    ...while_(1),
  ];
  const body = repeat(
    [
      ...set("end", i32.add(get("block"), get("bytes"))),
      ...set("s0", pair.zero),
      ...restart,
      ...step([
        ...set("v", pair.load(get("p"))),
        ...pair.increase(at("s0"), pair.multiply(get("v"), get("v"))),
      ]),
      ...set("tail", pair.sum(at("s0"))),
      ...when(f64.differs(get("tail"), f64.constant(0)), eliminateColumn),
      ...i32.increase(at("j"), i32.constant(1)),
      ...i32.increase(at("block"), i32.constant(column)),
      ...i32.increase(at("r"), i32.multiply(i32.add(get("n"), i32.constant(1)), i32.constant(DOUBLE))),
    ],
    i32.less(get("j"), get("n")),
  );
  return { name: "eliminate", parameters: 4, locals, body };
}

const PRODUCTS = makeProducts();
const ELIMINATE = makeEliminate();
