#!/usr/bin/env python3
"""The peer of engine-bench.ts: one problem file in, times of scipy's MINPACK fit out, both as JSON.

A spectrum is a sum over lines of A L + 2 B D on a known background, with L = Re w / (s sqrt(2 pi)) and D = Im w / (s sqrt(2 pi))
under a Gaussian instrument of standard deviation s, and the Lorentzian pair without one. The vector handed to the solver
holds energies, widths, A, B and the factors of the background, each divided by a typical size of its own.
"""
import json
import platform
import sys
import time

import numpy
import scipy
from scipy.optimize import least_squares
from scipy.special import wofz


class Spectrum:
    def __init__(self, given):
        self.energy = numpy.asarray(given["energy"])
        self.signal = numpy.asarray(given["signal"])
        self.noise = float(given["noise"])
        self.count = int(given["lines"])
        self.std = float(given["gauss_std"])
        self.background = numpy.asarray(given["background"]).T
        widths = numpy.asarray(given["widths"])
        areas = numpy.asarray(given["coefficients"][: self.count])
        extra = self.background.shape[1]
        self.start = numpy.concatenate([given["energies"], widths, given["coefficients"]])
        self.typical = numpy.concatenate([widths, widths, areas, areas, numpy.ones(extra)])

    def split(self, vector):
        n = self.count
        return vector[:n], vector[n : 2 * n], vector[2 * n : 3 * n], vector[3 * n : 4 * n], vector[4 * n :]

    def residual(self, vector):
        centre, width, area, odd, rest = self.split(vector)
        distance = self.energy[:, None] - centre
        if self.std > 0:
            z = (distance + 0.5j * width) / (self.std * 2**0.5)
            w = wofz(z) / (self.std * (2 * numpy.pi) ** 0.5)
            lines = w.real @ area + 2 * (w.imag @ odd)
        else:
            half = width / 2
            pair = 1 / (numpy.pi * (distance**2 + half**2))
            lines = pair @ (area * half) + (pair * distance) @ (2 * odd)
        return (lines + self.background @ rest - self.signal) / self.noise

    def slopes(self, vector):
        """Columns of the derivatives of plain lines."""
        centre, width, area, odd, _ = self.split(vector)
        n = self.count
        distance = self.energy[:, None] - centre
        half = width / 2
        pair = 1 / (distance**2 + half**2)
        out = numpy.empty((self.energy.size, vector.size))
        even_part, odd_part = area / numpy.pi, 2 * odd / numpy.pi
        cross = 2 * distance * half * pair**2
        square = (distance**2 - half**2) * pair**2
        out[:, :n] = even_part * cross + odd_part * square
        out[:, n : 2 * n] = 0.5 * (even_part * square - odd_part * cross)
        out[:, 2 * n : 3 * n] = half * pair / numpy.pi
        out[:, 3 * n : 4 * n] = 2 * distance * pair / numpy.pi
        out[:, 4 * n :] = self.background
        return out / self.noise


def least_time(spectrum, repeats, **options):
    best = None
    for _ in range(repeats):
        began, ran = time.perf_counter(), time.thread_time()
        answer = least_squares(spectrum.residual, spectrum.start, method="lm", x_scale=spectrum.typical, **options)
        spent, ran = 1e3 * (time.perf_counter() - began), 1e3 * (time.thread_time() - ran)
        if best is None or spent < best["ms"]:
            best = {"ms": spent, "cpu_ms": ran, "evaluations": int(answer.nfev), "chi2": float(2 * answer.cost)}
    return best


def main():
    with open(sys.argv[1], encoding="utf-8") as file:
        given = json.load(file)
    spectrum = Spectrum(given)
    repeats = int(given["repeats"])
    result = {
        "scipy": scipy.__version__,
        "numpy": numpy.__version__,
        "python": platform.python_version(),
        "numerical": least_time(spectrum, 1 if spectrum.std > 0 else repeats),
        "analytic": None if spectrum.std > 0 else least_time(spectrum, repeats, jac=spectrum.slopes),
    }
    print(json.dumps(result))


if __name__ == "__main__":
    main()
