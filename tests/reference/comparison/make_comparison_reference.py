#!/usr/bin/env python3
"""Writes pairs.json: candidates of the cherry trees side by side, and fold differences, by NumPy, SciPy and statsmodels.

    python3 tests/reference/comparison/make_comparison_reference.py

Own-scale densities are those of the normal errors of the form's scale, with the Jacobian; the variance is that of maximum
likelihood. Vuong 1989 (z plain, less the AIC and the BIC penalty), the F test of nested fits by statsmodels, the PE test of
MacKinnon, White & Davidson 1983 by the t of the added column in a statsmodels OLS fit, the corrected resampled t of
Nadeau & Bengio 2003 from its formula with SciPy's t distribution.
"""
import json
import pathlib

import numpy
import scipy
import scipy.stats
import statsmodels
import statsmodels.api

HERE = pathlib.Path(__file__).resolve().parent
FORMS = {"identity": lambda x: x, "ln": numpy.log}
MODELS = {
    "linear": ("identity", {"girth": "identity", "height": "identity"}),
    "log-log": ("ln", {"girth": "ln", "height": "ln"}),
    "log-linear": ("ln", {"girth": "identity", "height": "identity"}),
    "girth alone": ("identity", {"girth": "identity"}),
    "linear in logs": ("identity", {"girth": "ln", "height": "ln"}),
    "log of girth": ("ln", {"girth": "ln"}),
}
PAIRS = [("linear", "log-log"), ("linear", "log-linear"), ("linear", "girth alone"), ("linear", "linear in logs"),
         ("log-linear", "log-log"), ("log-log", "log of girth"), ("linear", "log of girth")]


def trees():
    lines = (HERE.parent / "open" / "trees.csv").read_text().split()
    names = lines[0].split(",")
    values = numpy.array([[float(cell) for cell in line.split(",")] for line in lines[1:]])
    return {name: values[:, i] for i, name in enumerate(names)}


def fitted(table, model):
    response, terms = MODELS[model]
    x = numpy.column_stack([numpy.ones(len(table["volume"]))] + [FORMS[form](table[name]) for name, form in terms.items()])
    z = FORMS[response](table["volume"])
    fit = statsmodels.api.OLS(z, x).fit()
    sigma = numpy.sqrt(numpy.mean(fit.resid**2))
    density = scipy.stats.norm.logpdf(fit.resid, scale=sigma)
    if response == "ln":
        density = density - numpy.log(table["volume"])
    smeared = fit.fittedvalues if response == "identity" else numpy.exp(fit.fittedvalues) * numpy.mean(numpy.exp(fit.resid))
    return {"response": response, "terms": terms, "x": x, "fit": fit, "density": density, "q": x.shape[1] + 1, "mean": smeared}


def vuong(a, b):
    m = b["density"] - a["density"]
    n, more = len(m), b["q"] - a["q"]
    root = numpy.sqrt(n) * numpy.std(m)
    penalties = {"z": 0.0, "z_aic": more, "z_bic": 0.5 * more * numpy.log(n)}
    out = {name: (m.sum() - penalty) / root for name, penalty in penalties.items()}
    out["p_bic"] = 2 * scipy.stats.norm.sf(abs(out["z_bic"]))
    return out


def added(model, column):
    fit = statsmodels.api.OLS(model["fit"].model.endog, numpy.column_stack([model["x"], column])).fit()
    return {"t": fit.tvalues[-1], "df": fit.df_resid, "p": fit.pvalues[-1]}


def linear_log(linear, log):
    own, logs = linear["fit"].fittedvalues, log["fit"].fittedvalues
    out = {"against_log_linear": added(log, own - numpy.exp(logs))}
    if numpy.all(own > 0):
        out["against_linear"] = added(linear, numpy.log(own) - logs)
    return out


def compared(table, first, second):
    a, b = fitted(table, first), fitted(table, second)
    out = {"first": {k: a[k] for k in ("response", "terms")}, "second": {k: b[k] for k in ("response", "terms")},
           "log_likelihood": b["density"].sum() - a["density"].sum(),
           "root_mean_square": numpy.sqrt(numpy.mean((b["mean"] - a["mean"])**2)),
           "row": int(numpy.argmax(numpy.abs(b["mean"] - a["mean"])))}
    if a["response"] == b["response"] and set(a["terms"].items()) > set(b["terms"].items()):
        f, p, df = a["fit"].compare_f_test(b["fit"])
        out["nested"] = {"f": f, "p": p, "df": df, "df2": a["fit"].df_resid}
    else:
        out["vuong"] = vuong(a, b)
    if a["response"] == "identity" and b["response"] == "ln":
        out["linear_log"] = linear_log(a, b)
    return out


def folds(seed, n_folds, repeats):
    generator = numpy.random.default_rng(seed)
    first = 100 + 20 * generator.standard_normal(n_folds * repeats)
    second = first + 3 + 8 * generator.standard_normal(n_folds * repeats)
    d = second - first
    se = numpy.sqrt((1 / len(d) + 1 / (n_folds - 1)) * numpy.var(d, ddof=1))
    t = numpy.mean(d) / se
    return {"n_folds": n_folds, "first": list(first), "second": list(second), "mse": numpy.mean(d), "mse_se": se, "t": t,
            "df": len(d) - 1, "p": 2 * scipy.stats.t.sf(abs(t), len(d) - 1)}


def main():
    table = trees()
    result = {"by": f"NumPy {numpy.__version__}, SciPy {scipy.__version__}, statsmodels {statsmodels.__version__}",
              "pairs": [compared(table, *pair) for pair in PAIRS],
              "folds": [folds(1, 10, 1), folds(2, 5, 3), folds(3, 2, 2)]}
    (HERE / "pairs.json").write_text(json.dumps(result, indent=1) + "\n")


if __name__ == "__main__":
    main()
