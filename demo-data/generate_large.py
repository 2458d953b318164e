#!/usr/bin/env python3
"""Writes a large invented table to standard output or a file, for trying sizes.

    python3 demo-data/generate_large.py ROWS PREDICTORS [FILE] [--seed N] [--active N]

Columns: energy_kwh and x1 … xP. A third of the predictors (or --active) are true drivers, as ln, square root or reciprocal in turn; all are
skewed (lognormal) and share one common factor, so neighbours correlate at about 0.3. The truth is printed to standard error.
Only the standard library is used; the same arguments give the same bytes. Cost: about 200,000 cells a second.
"""
import argparse
import math
import random
import sys

SPREAD = 0.6       # sd of ln(x)
COMMON = 0.3       # correlation of ln(x) between predictors
NOISE_SD = 0.3     # of ln(energy)
EFFECT = 0.4       # of each true driver, in sd of its form

TRUE_FORMS = (
    ("ln", math.log),
    ("√", math.sqrt),
    ("1/", lambda x: 1 / x),
)


def standardiser(form, rng_seed=1):
    """Centre and scale of a form under the lognormal law of the predictors, by simulation with a fixed seed."""
    rng = random.Random(rng_seed)
    values = [form(math.exp(rng.gauss(0, SPREAD))) for _ in range(20000)]
    centre = sum(values) / len(values)
    scale = math.sqrt(sum((v - centre) ** 2 for v in values) / len(values))
    return centre, scale


def main():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("rows", type=int)
    parser.add_argument("predictors", type=int)
    parser.add_argument("file", nargs="?")
    parser.add_argument("--seed", type=int, default=20261201)
    parser.add_argument("--active", type=int)
    arguments = parser.parse_args()
    if arguments.rows < 1 or arguments.predictors < 1:
        parser.error("rows and predictors must be at least 1")
    active = max(1, arguments.predictors // 3) if arguments.active is None else min(arguments.active, arguments.predictors)

    rng = random.Random(arguments.seed)
    drivers = []
    for j in range(active):
        name, form = TRUE_FORMS[j % len(TRUE_FORMS)]
        centre, scale = standardiser(form)
        drivers.append((j, form, centre, scale, EFFECT / (1 + j // 3)))
        print(f"x{j + 1} enters as {name}(x{j + 1}), {drivers[-1][4] / scale:+.4f} per unit of it, on ln(energy_kwh)", file=sys.stderr)
    print(f"error sd {NOISE_SD} on ln(energy_kwh); the other {arguments.predictors - active} predictors have no effect", file=sys.stderr)

    out = open(arguments.file, "w", encoding="utf-8", newline="") if arguments.file else sys.stdout
    out.write("energy_kwh," + ",".join(f"x{j + 1}" for j in range(arguments.predictors)) + "\n")
    own = math.sqrt(1 - COMMON)
    shared = math.sqrt(COMMON)
    gauss, exp = rng.gauss, math.exp
    for _ in range(arguments.rows):
        common = shared * gauss(0, 1)
        x = [float(f"{exp(SPREAD * (common + own * gauss(0, 1))):.6g}") for _ in range(arguments.predictors)]
        eta = 7 + gauss(0, NOISE_SD) + sum(b * (form(x[j]) - centre) / scale for j, form, centre, scale, b in drivers)
        out.write(f"{exp(eta):.6g}," + ",".join(map(repr, x)) + "\n")
    if out is not sys.stdout:
        out.close()


if __name__ == "__main__":
    main()
