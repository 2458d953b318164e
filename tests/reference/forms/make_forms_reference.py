#!/usr/bin/env python3
"""Writes forms.csv: values of forms from programs and definitions outside the project.

    python3 make_forms_reference.py > forms.csv

scipy    scipy.stats.boxcox and yeojohnson with the parameter given, scipy.special.logit and expit (SciPy 1.10.1)
numpy    numpy.arcsin(numpy.sqrt(x)), numpy.arcsinh, numpy.log10, numpy.cbrt (NumPy 1.24.2)
decimal  the definition in 720-digit arithmetic (Python's decimal) on the exact double: Box & Cox 1964 and Yeo & Johnson
         2000 where a plain formula in doubles loses digits, fractional polynomials (Royston & Altman 1994) and the
         restricted cubic spline (Stone & Koo 1985) from their definitions; the logit near its zero

Columns: form, its parameters with blanks between, x, column of the form (or "inverse"), value, source.
"""
import csv
import sys
from decimal import Decimal, getcontext

import numpy
import scipy
from scipy import special, stats

getcontext().prec = 720  # 1e-300 beside 1, and the 1e-300 of a power beside that
ORDINARY = [0.001, 0.03, 0.2, 0.5, 0.9, 1.0, 1.1, 2.5, 7.0, 42.0, 365.25, 1e4, 3.2e6]
EXTREME = [1e-300, 1e-150, 1e-20, 1e-9, 0.9999999, 1.0000001, 1e9, 1e20, 1e150, 1e300]
rows = []


def add(form, parameters, x, column, value, source):
    if numpy.isfinite(value) and (value == 0 or abs(value) > 1e-290):
        rows.append([form, " ".join(repr(float(p)) for p in parameters), repr(float(x)), column, repr(float(value)), source])


def box_cox(w, l):
    return w.ln() if l == 0 else (w**l - 1) / l


def yeo_johnson(u, l):
    return box_cox(1 + u, l) if u >= 0 else -box_cox(1 - u, 2 - l)


def power(u, p):
    return u.ln() if p == 0 else u**p


def from_scipy():
    x = numpy.array(ORDINARY)
    for l in [-2.0, -1.3, -0.5, 0.0, 0.3, 0.307, 0.5, 1.0, 2.0, 3.5]:
        for a, value in zip(x, stats.boxcox(x, lmbda=l)):
            add("box-cox", [l], a, 0, value, "scipy")
    x = numpy.concatenate([-numpy.array(ORDINARY), [0.0], ORDINARY])
    for l in [-1.0, -0.3, 0.0, 0.5, 1.0, 1.7, 2.0, 2.5, 4.0]:
        for a, value in zip(x, stats.yeojohnson(x, lmbda=l)):
            add("yeo-johnson", [l], a, 0, value, "scipy")
    for a in [1e-12, 0.001, 0.2, 0.3, 0.45, 0.499, 0.5, 0.51, 0.7, 0.8, 0.999]:
        add("logit", [], a, 0, special.logit(a), "scipy")
    for a in [-700.0, -30.0, -2.0, -0.1, 0.0, 0.3, 5.0, 36.0]:
        add("logit", [], a, "inverse", special.expit(a), "scipy")


def from_numpy():
    for a in [0.0, 1e-10, 0.01, 0.25, 0.5, 0.8, 1.0]:
        add("arcsine-sqrt", [], a, 0, numpy.arcsin(numpy.sqrt(a)), "numpy")
    for a in ORDINARY + EXTREME:
        add("asinh", [], a, 0, numpy.arcsinh(a), "numpy")
        add("asinh", [], -a, 0, numpy.arcsinh(-a), "numpy")
        add("log10", [], a, 0, numpy.log10(a), "numpy")
        add("cube-root", [], -a, 0, numpy.cbrt(-a), "numpy")


def from_definitions():
    tiny = [1e-300, -1e-18, 1e-12, -1e-9, 3e-9, 1e-8, -1e-6, 1e-3]
    for l in tiny + [0.1, 0.5, -0.5, 2.0, -2.0]:
        for a in EXTREME + [0.5, 3.0]:
            value = box_cox(Decimal(a), Decimal(l))
            if abs(value) < Decimal("1e308"):
                add("box-cox", [l], a, 0, float(value), "decimal")
    for l in tiny + [2.0 + 1e-9, 2.0 - 1e-12, 0.5, 1.5, -1.0]:
        for a in EXTREME + [0.5, 3.0]:
            for x in (a, -a):
                value = yeo_johnson(Decimal(x), Decimal(l))
                if abs(value) < Decimal("1e308"):
                    add("yeo-johnson", [l], x, 0, float(value), "decimal")
    for a in [1e-300, 1e-12, 0.001, 0.2, 0.2501, 0.45, 0.499, 0.5000001, 0.51, 0.7499, 0.8, 0.999, 1 - 1e-12]:
        u = Decimal(a)
        add("logit", [], a, 0, float((u / (1 - u)).ln()), "decimal")
    powers = [-2.0, -1.0, -0.5, 0.0, 0.5, 1.0, 2.0, 3.0]
    for i, p in enumerate(powers):
        for q in powers[i:]:
            for a in [0.03, 0.9, 1.0, 7.0, 365.25]:
                u = Decimal(a)
                first = power(u, Decimal(p))
                second = first * u.ln() if p == q else power(u, Decimal(q))
                add("fractional-polynomial", [p, q], a, 0, float(first), "decimal")
                add("fractional-polynomial", [p, q], a, 1, float(second), "decimal")
    for knots in [[1.0, 4.0, 9.0], [-2.5, 0.1, 3.0, 8.0], [1.0, 2.0, 3.5, 7.0, 20.0]]:
        spline(knots)


def spline(knots):
    t = [Decimal(k) for k in knots]
    positive = lambda d: max(d, Decimal(0)) ** 3
    for a in [-10.0, 0.0, 0.5, 1.0, 2.2, 4.0, 6.5, 9.0, 15.0, 20.0, 33.0, 1e6, 1e12]:
        u = Decimal(a)
        add("spline", knots, a, 0, a, "decimal")
        for j in range(len(t) - 2):
            value = (positive(u - t[j]) - positive(u - t[-2]) * (t[-1] - t[j]) / (t[-1] - t[-2])
                     + positive(u - t[-1]) * (t[-2] - t[j]) / (t[-1] - t[-2])) / (t[-1] - t[0]) ** 2
            add("spline", knots, a, j + 1, float(value), "decimal")


if __name__ == "__main__":
    from_scipy()
    from_numpy()
    from_definitions()
    print(f"# SciPy {scipy.__version__}, NumPy {numpy.__version__}, Python {sys.version.split()[0]}; make_forms_reference.py")
    writer = csv.writer(sys.stdout, lineterminator="\n")
    writer.writerow(["form", "parameters", "x", "column", "value", "source"])
    writer.writerows(rows)
