"""Fits small synthetic line spectra with scipy and prints values and standard errors as JSON.

    python3 tests/reference/scipy_line_fit.py > fixtures/reference/scipy-line-fit.json

The spectra are written into the output with all digits, so that the test needs neither Python nor the same random
numbers. Model: sum of A/pi (g + 2 q x)/(x^2 + g^2), g = G/2, one q for all lines, plus a parabola; with a Gaussian
instrument the real and imaginary part of the Faddeeva function. All parameters are found by least_squares(method="lm",
tight tolerances) from a start that is off, then by curve_fit from the same start; standard errors are those of
curve_fit(absolute_sigma=True) with the Jacobian in scaled parameters.
"""
import json
import sys

import numpy as np
import scipy
from scipy.optimize import curve_fit, least_squares
from scipy.special import wofz


def pair(x, width, std):
    g = width / 2
    if std == 0:
        return g / np.pi / (x * x + g * g), x / np.pi / (x * x + g * g)
    w = wofz((x + 1j * g) / (std * np.sqrt(2)))
    norm = 1 / (std * np.sqrt(2 * np.pi))
    return w.real * norm, w.imag * norm


def model(energy, p, lines, std):
    out = np.zeros_like(energy)
    q = p[3 * lines]
    for j in range(lines):
        even, odd = pair(energy - p[3 * j], p[3 * j + 1], std)
        out += p[3 * j + 2] * (even + 2 * q * odd)
    u = (energy - energy[0]) / (energy[-1] - energy[0]) * 2 - 1
    return out + p[3 * lines + 1] + p[3 * lines + 2] * u + p[3 * lines + 3] * u * u


def jacobian(energy, p, lines, std, scale):
    """Central differences of fourth order in scaled parameters; good to 1e-9 of a column."""
    columns = []
    for k in range(len(p)):
        h = 2e-3 * scale[k]
        f = lambda t: model(energy, np.where(np.arange(len(p)) == k, p + t, p), lines, std)
        columns.append((8 * (f(h) - f(-h)) - (f(2 * h) - f(-2 * h))) / (12 * h) * scale[k])
    return np.array(columns).T


def case(name, truth, lines, std, seed, points, window, sigma):
    random = np.random.default_rng(seed)
    energy = np.round(np.linspace(*window, points), 9)
    signal = model(energy, truth, lines, std) + sigma * random.standard_normal(points)
    signal = np.array([float(f"{value:.9g}") for value in signal])
    scale = np.ones(len(truth))
    for j in range(lines):
        scale[3 * j], scale[3 * j + 1], scale[3 * j + 2] = truth[3 * j + 1], truth[3 * j + 1], truth[3 * j + 2]
    offset = np.zeros(len(truth))
    for j in range(lines):
        offset[3 * j] = truth[3 * j]
    # Scaled parameters t with p = offset + scale t, so that no digit is lost to the size of the energies.
    start = (truth - offset) / scale
    for j in range(lines):
        start[3 * j] += 0.2
        start[3 * j + 1] *= 1.3
        start[3 * j + 2] *= 0.8
    residual = lambda t: (model(energy, offset + scale * t, lines, std) - signal) / sigma
    jac = lambda t: jacobian(energy, offset + scale * t, lines, std, scale) / sigma
    found = least_squares(residual, start, jac=jac, method="lm", xtol=1e-15, ftol=1e-15, gtol=1e-15, max_nfev=2000)
    again, covariance = curve_fit(
        lambda x, *t: model(x, offset + scale * np.array(t), lines, std),
        energy,
        signal,
        p0=start,
        sigma=np.full(points, sigma),
        absolute_sigma=True,
        jac=lambda x, *t: jacobian(x, offset + scale * np.array(t), lines, std, scale),
        xtol=1e-15,
        ftol=1e-15,
        gtol=1e-15,
        maxfev=2000,
    )
    errors = np.sqrt(np.diag(covariance))
    print(name, "two answers differ by", np.max(np.abs(found.x - again) / errors), "errors", file=sys.stderr)
    names = [f"{word}{j}" for j in range(lines) for word in ("energy", "width", "area")] + ["q", "b0", "b1", "b2"]
    return {
        "name": name,
        "lines": lines,
        "gaussStd": std,
        "sigma": sigma,
        "energy": energy.tolist(),
        "signal": signal.tolist(),
        "start": {"energy": [truth[3 * j] + 0.2 * truth[3 * j + 1] for j in range(lines)],
                  "width": [1.3 * truth[3 * j + 1] for j in range(lines)]},
        "parameters": [
            {"name": n, "value": float(o + s * t), "error": float(s * e)}
            for n, o, s, t, e in zip(names, offset, scale, found.x, errors)
        ],
        "chi2": float(2 * found.cost),
    }


def main():
    three = [2.1500, 4e-3, 1.2, 2.1615, 1.2e-3, 0.5, 2.1660, 6e-4, 0.22, -0.18, 60.0, 8.0, 3.0]
    one = [1.5150, 3e-4, 2.0, 0.1, 500.0, 20.0, -5.0]
    cases = [
        case("three plain lines", np.array(three), 3, 0.0, 1, 240, (2.135, 2.170), 2.0),
        case("three lines through a slit", np.array(three), 3, 2.5e-4, 2, 240, (2.135, 2.170), 2.0),
        case("one line", np.array(one), 1, 0.0, 3, 120, (1.5130, 1.5170), 30.0),
        case("one line narrower than the slit", np.array(one), 1, 2e-4, 4, 120, (1.5130, 1.5170), 30.0),
    ]
    out = {"scipy": scipy.__version__, "numpy": np.__version__, "python": sys.version.split()[0], "cases": cases}
    text = json.dumps(out)
    # A number a line would be long: a case a line is enough to see a difference.
    print(text.replace('{"name": "three', '\n{"name": "three').replace('{"name": "one', '\n{"name": "one'))


main()
