import type { Comparison, RunglineResult } from "../protocol/index.ts";
import { COMPARISON_METHODS } from "./comparison-to-text.ts";

/** What was done with which published method, for what these results hold. */
export function methodsInWords(
  results: readonly RunglineResult[],
  comparison: Comparison | null,
): readonly { readonly title: string; readonly text: string }[] {
  const some = (test: (result: RunglineResult) => boolean): boolean => results.some(test);
  const said: { title: string; text: string }[] = [
    {
      title: "Light axis and constants",
      text: "Constants of CODATA 2022 (Mohr, Newell, Taylor and Tiesinga, Rev. Mod. Phys. 97, 025002 (2025)); index of air after Ciddor, Appl. Opt. 35, 1566 (1996), where the axis is one in air.",
    },
    {
      title: "Lines",
      text: "α_n(E) = (A_n/π) [g + 2 q_n (E − E_n)]/[(E − E_n)² + g²], g half of the full width at half maximum (Toyozawa, J. Phys. Chem. Solids 25, 59 (1964); Fano, Phys. Rev. 124, 1866 (1961)); a Gaussian instrument by the complex error function (DLMF 7.19).",
    },
    {
      title: "Tail and continuum",
      text: "Lines above the last one told apart follow the laws of the series up to the gap and join the continuum there (Elliott, Phys. Rev. 108, 1384 (1957)), with a free factor.",
    },
    {
      title: "Least squares",
      text: "Separable: linear parameters eliminated by orthogonal factorisation (Golub and Pereyra, SIAM J. Numer. Anal. 10, 413 (1973); Kaufman, BIT 15, 49 (1975)), the others by a damped loop with scaling (Moré, in Numerical Analysis, Lecture Notes in Mathematics 630, 105 (1978)); analytic derivatives; covariance at the solution.",
    },
    {
      title: "Series",
      text: "E_n = E_g − Ry/(n − δ_n)², fitted to the line energies with their full covariance; widths Γ_n and areas A_n against their laws in the same way. n and a constant δ are not decided by energies alone.",
    },
    {
      title: "Uncertainty",
      text: "One standard error, statistical; the systematic part is the spread over defensible backgrounds and windows, axis and thickness, and is never mixed in. Value and error are rounded after the Particle Data Group; brackets as JCGM 100:2008, 7.2.2.",
    },
  ];
  if (some((result) => result.background.some(({ term }) => term === "urbach")))
    said.push({ title: "Urbach tail", text: "Urbach, Phys. Rev. 92, 1324 (1953)." });
  if (some((result) => (result.power ?? null) !== null))
    said.push({
      title: "Power",
      text: "Saturation of the areas by the law named in the table; density of excitons from the absorbed power and the lifetime; the volume that one exciton blocks is S_n P over the density at low power. Blockade between excitons: Kazimierczuk, Fröhlich, Scheel, Stolz and Bayer, Nature 514, 343 (2014). A plasma of free carriers and heating cannot be excluded by data of one colour.",
    });
  if (comparison !== null) said.push({ title: "Comparison", text: COMPARISON_METHODS });
  if ((comparison?.temperature ?? null) !== null)
    said.push({
      title: "Temperature",
      text: "Varshni, Physica 34, 149 (1967); O'Donnell and Chen, Appl. Phys. Lett. 58, 2924 (1991); widths with phonons: Rudin, Reinecke and Segall, Phys. Rev. B 42, 11218 (1990); choice between laws: Akaike, IEEE Trans. Autom. Control 19, 716 (1974).",
    });
  return said;
}
