"""Robust fits of two open tables, to compare with: prints robust.json.

Huber and bisquare M estimates by statsmodels' RLM; the S estimate by trying every set of p rows and improving each to the
end, in NumPy, independently of the project's search. Run from this folder; versions are written into the file.
"""
import csv
import itertools
import json

import numpy
import scipy
import scipy.optimize
import statsmodels
import statsmodels.api as sm


def table(name, response, columns):
    with open(f"../open/{name}.csv") as f:
        rows = list(csv.DictReader(f))
    y = numpy.array([float(r[response]) for r in rows])
    x = numpy.column_stack([numpy.ones(len(y))] + [[float(r[c]) for r in rows] for c in columns])
    return x, y


def chi(u, c=1.54764):
    t = numpy.minimum((u / c) ** 2, 1.0)
    return 1.0 - (1.0 - t) ** 3


def m_scale(r, p):
    """The root s of sum(chi(r/s)) = (n - p)/2, by bisection and not by the fixed point that the project uses."""
    if numpy.sum(r != 0.0) <= 0.5 * (len(r) - p):
        return 0.0
    f = lambda log_s: chi(r / numpy.exp(log_s)).sum() - 0.5 * (len(r) - p)
    top = numpy.log(numpy.abs(r).max()) + 5.0
    return float(numpy.exp(scipy.optimize.brentq(f, top - 60.0, top, xtol=1e-15, rtol=8.9e-16)))


def s_estimate(x, y):
    n, p = x.shape
    best = (numpy.inf, None)
    for rows in itertools.combinations(range(n), p):
        sub = x[list(rows)]
        if numpy.linalg.matrix_rank(sub) < p:
            continue
        b = numpy.linalg.solve(sub, y[list(rows)])
        s = numpy.median(numpy.abs(y - x @ b)) / 0.6745
        for step in range(300):
            r = y - x @ b
            s *= numpy.sqrt(2.0 * chi(r / s).sum() / (n - p))
            w = numpy.where(numpy.abs(r / s) < 1.54764, (1.0 - (r / s / 1.54764) ** 2) ** 2, 0.0)
            if numpy.linalg.matrix_rank(x * numpy.sqrt(w)[:, None]) < p:
                break
            new = numpy.linalg.lstsq(x * numpy.sqrt(w)[:, None], y * numpy.sqrt(w), rcond=None)[0]
            done = numpy.abs(new - b).max() <= 1e-14 * numpy.abs(new).max()
            b = new
            if done or (step == 5 and m_scale(y - x @ b, p) > 1.5 * best[0]):
                break
        scale = m_scale(y - x @ b, p)
        if 0.0 < scale < best[0]:
            best = (scale, b)
    return best


def bisquare(x, y, start, scale):
    """statsmodels' bisquare M estimate from a start, with the scale held: what it would estimate first is overridden."""
    model = sm.RLM(y, x, M=sm.robust.norms.TukeyBiweight(4.685))
    model._estimate_scale = lambda resid: scale
    return model.fit(start_params=start, update_scale=False, maxiter=5000, tol=1e-14, conv="coefs").params


def values(name, response, columns):
    x, y = table(name, response, columns)
    huber = sm.RLM(y, x, M=sm.robust.norms.HuberT(1.345)).fit(maxiter=5000, tol=1e-14, conv="coefs")
    scale, start = s_estimate(x, y)
    return {
        "table": name, "response": response, "columns": columns,
        "huber": list(huber.params), "huber_scale": huber.scale,
        "s_scale": scale, "s": list(start), "mm": list(bisquare(x, y, start, scale)),
    }


# about two minutes: stack loss has 5,985 sets of four rows, the hill races 6,545 of three
print(json.dumps({
    "versions": {"statsmodels": statsmodels.__version__, "numpy": numpy.__version__, "scipy": scipy.__version__},
    "fits": [
        values("stackloss", "stack_loss", ["air_flow", "water_temp", "acid_conc"]),
        values("hills", "time", ["dist", "climb"]),
    ],
}, indent=1))
