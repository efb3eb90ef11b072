/**
 * What      psi(z) and psi'(z) (digamma and trigamma) for complex z with Re z > 0: upward recurrence
 *           psi(z) = psi(z+1) - 1/z until |z| >= 12, then the asymptotic series with ten Bernoulli numbers.
 * Shapes    out (4): Re psi, Im psi, Re psi', Im psi'.
 * Domain    Re z > 0.
 * Accuracy  relative 1e-14 away from the zero of psi at 1.4616 (tests/app/lines/digamma.test.ts).
 * Source    DLMF 5.5.2, 5.11.2 and 5.15.8.
 */
export function digamma(re: number, im: number, out: Float64Array): void {
  let x = re;
  let valueRe = 0;
  let valueIm = 0;
  let slopeRe = 0;
  let slopeIm = 0;
  while (x * x + im * im < 144) {
    const inverse = 1 / (x * x + im * im);
    const a = x * inverse;
    const b = -im * inverse;
    valueRe -= a;
    valueIm -= b;
    slopeRe += a * a - b * b;
    slopeIm += 2 * a * b;
    x += 1;
  }
  const r2 = x * x + im * im;
  // v = 1/z, u = 1/z^2
  const vr = x / r2;
  const vi = -im / r2;
  const ur = vr * vr - vi * vi;
  const ui = 2 * vr * vi;
  // Horner in u: p = Sum B_2k/(2k) u^(k-1), q = Sum B_2k u^(k-1).
  let pr = 0;
  let pi = 0;
  let qr = 0;
  let qi = 0;
  for (let k = BERNOULLI.length - 1; k >= 0; k--) {
    const number = BERNOULLI[k]!;
    const nextP = pr * ur - pi * ui + number / (2 * k + 2);
    pi = pr * ui + pi * ur;
    pr = nextP;
    const nextQ = qr * ur - qi * ui + number;
    qi = qr * ui + qi * ur;
    qr = nextQ;
  }
  // psi = ln z - v/2 - u p;  psi' = v + u/2 + v u q
  const vur = vr * ur - vi * ui;
  const vui = vr * ui + vi * ur;
  out[0] = valueRe + 0.5 * Math.log(r2) - vr / 2 - (ur * pr - ui * pi);
  out[1] = valueIm + Math.atan2(im, x) - vi / 2 - (ur * pi + ui * pr);
  out[2] = slopeRe + vr + ur / 2 + (vur * qr - vui * qi);
  out[3] = slopeIm + vi + ui / 2 + (vur * qi + vui * qr);
}

/** B_2, B_4, ..., B_20. */
const BERNOULLI = new Float64Array([
  1 / 6,
  -1 / 30,
  1 / 42,
  -1 / 30,
  5 / 66,
  -691 / 2730,
  7 / 6,
  -3617 / 510,
  43867 / 798,
  -174611 / 330,
]);
