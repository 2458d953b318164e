"""Writes column_statistics.json: reference figures of single columns from programs outside the project.

Run from this folder with NumPy, SciPy and statsmodels; their versions are written into the file.

- mean, sd, G1, G2: NumPy, scipy.stats.skew and kurtosis with bias=False
- quartiles: numpy.quantile, method "linear" (type 7 of Hyndman & Fan 1996)
- medcouple: statsmodels.stats.stattools.medcouple. Its conventions: pairs tied with the median get the antisymmetric
  block of -1, 0, 1 of the paper, and an even number of pairs the mean of the middle two.
- Box-Cox power: scipy.stats.boxcox_normmax(method="mle"), Brent without bounds; the program stops at -3 and 3.
"""

import json

import numpy
import scipy
import scipy.stats
import statsmodels
from statsmodels.stats.stattools import medcouple


def rounded(values, decimals):
    return [float(x) for x in numpy.round(values, decimals)]


def columns():
    draw = numpy.random.default_rng(20261201)
    yield "lognormal 60", rounded(draw.lognormal(1.0, 0.8, 60), 3)
    yield "lognormal 61", rounded(draw.lognormal(1.0, 0.8, 61), 3)
    yield "normal 50", rounded(draw.normal(20.0, 3.0, 50), 2)
    yield "gamma 400", rounded(draw.gamma(3.0, 2.0, 400) + 0.5, 4)
    yield "left-skewed 45", rounded(100.0 - draw.gamma(2.0, 4.0, 45), 1)
    yield "counts, many ties 80", rounded(draw.poisson(2.0, 80), 0)
    yield "counts, odd, ties at the median 81", rounded(draw.poisson(1.2, 81), 0)
    yield "mostly zeros 40", rounded(draw.binomial(3, 0.12, 40), 0)
    yield "reciprocal of gamma 70", rounded(10.0 / (1.0 + draw.gamma(4.0, 1.0, 70)), 4)
    yield "squares 90", rounded(draw.normal(50.0, 6.0, 90) ** 2, 1)
    yield "large mean 30", rounded(1e6 + draw.exponential(2.0, 30), 3)
    yield "four values", [1.0, 2.0, 4.0, 9.0]
    yield "five values, tied median", [1.0, 3.0, 3.0, 3.0, 10.0]


def figures(values):
    x = numpy.asarray(values)
    out = {
        "values": values,
        "mean": float(x.mean()),
        "sd": float(x.std(ddof=1)),
        "skewness_G1": float(scipy.stats.skew(x, bias=False)),
        "excess_kurtosis_G2": float(scipy.stats.kurtosis(x, bias=False)),
        "quartiles": [float(q) for q in numpy.quantile(x, [0.25, 0.5, 0.75])],
        "medcouple": float(medcouple(x)),
    }
    if x.min() > 0 and x.max() > 1.01 * x.min():  # nearer to constant, SciPy runs away
        out["box_cox_lambda"] = float(scipy.stats.boxcox_normmax(x, method="mle"))
    return out


with open("column_statistics.json", "w", encoding="utf-8") as file:
    versions = {"numpy": numpy.__version__, "scipy": scipy.__version__, "statsmodels": statsmodels.__version__}
    content = {"versions": versions, "columns": {name: figures(values) for name, values in columns()}}
    json.dump(content, file, indent=1)
    file.write("\n")
