#!/usr/bin/env python3
"""Prediction intervals of two fits of open/trees.csv by statsmodels, as the tests of scoring compare with.

    /usr/bin/python3 tests/reference/intervals/make.py > tests/reference/intervals/trees.json

Rows: the 31 trees, and two further ones that no tree comes near.
"""
import json
import pathlib

import numpy
import statsmodels
import statsmodels.api as sm

folder = pathlib.Path(__file__).resolve().parent.parent / "open"
with open(folder / "trees.csv", encoding="utf-8") as file:
    names = file.readline().strip().split(",")
    table = numpy.loadtxt(file, delimiter=",")
girth, height, volume = (table[:, [name.lower() for name in names].index(n)] for n in ("girth", "height", "volume"))
new_girth = numpy.append(girth, [25.0, 8.0])
new_height = numpy.append(height, [60.0, 90.0])


def figures(response, form):
    fit = sm.OLS(response(volume), sm.add_constant(numpy.column_stack([form(girth), form(height)]))).fit()
    rows = sm.add_constant(numpy.column_stack([form(new_girth), form(new_height)]), has_constant="add")
    frame = fit.get_prediction(rows).summary_frame(alpha=0.05)
    return {
        "coefficients": list(fit.params),
        "sigma": float(numpy.sqrt(fit.scale)),
        "smearing": float(numpy.mean(numpy.exp(fit.resid))),
        "mean": list(frame["mean"]),
        "lower": list(frame["obs_ci_lower"]),
        "upper": list(frame["obs_ci_upper"]),
    }


print(json.dumps({
    "statsmodels": statsmodels.__version__, "numpy": numpy.__version__,
    "girth": list(new_girth), "height": list(new_height),
    "identity": figures(lambda x: x, lambda x: x),
    "ln": figures(numpy.log, numpy.log),
}, indent=1))
