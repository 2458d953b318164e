#!/usr/bin/env python3
"""Writes the demo table: 420 cold stores of an imaginary growers' co-operative, with a known truth.

    python3 demo-data/generate.py            writes coldstores.csv and truth.md beside this script

The energy of a store is a product of powers and exponentials of its true drivers and a lognormal error, so the equation to be found is
linear on the scale of ln(energy_kwh). Only the standard library is used, with a fixed seed: the same bytes on every machine.
"""
import csv
import math
import pathlib
import random

SEED = 20261201
ROWS = 420
NOISE_SD = 0.16  # of ln(energy): about 16 % either way

INTERCEPT = 4.20
B_AREA = 0.70        # per unit of ln(floor area)
B_THROUGHPUT = 0.014 # per unit of sqrt(throughput)
B_FILL = 0.055       # per unit of sqrt(101 - fill)
B_DOORS = 0.16       # per unit of ln(door openings + 1)
B_NIGHT = -0.45      # per unit of the share taken at night
B_OUTDOOR = 0.021    # per degree
COOLING = {"brine": 0.0, "ammonia": -0.12, "carbon dioxide": 0.07, "air": 0.21}
COOLING_SHARE = {"brine": 0.46, "ammonia": 0.28, "carbon dioxide": 0.17, "air": 0.09}

COLUMNS = ["store", "energy_kwh", "floor_area_m2", "volume_m3", "throughput_t", "fill_percent", "door_openings",
           "night_share", "outdoor_c", "cooling", "visit_day", "paint_batch"]


def pick(rng, shares):
    """One key, with probability in proportion to its share."""
    u, total = rng.random(), 0.0
    for key, share in shares.items():
        total += share
        if u < total:
            return key
    return key


def store(rng, number):
    """One cold store as a dict of cells, before anything is lost."""
    area = round(math.exp(rng.gauss(math.log(640), 0.72)), 0)
    height = rng.gauss(6.2, 0.16)  # nearly the same everywhere: volume and floor area are a near-duplicate pair
    throughput = round(area ** 0.6 * math.exp(rng.gauss(math.log(17), 0.75)), 1)
    fill = round(100 * (1 - rng.betavariate(1.3, 6.5)), 1)
    doors = 0 if rng.random() < 0.13 else int(rng.expovariate(1 / 38))
    night = round(rng.betavariate(2.2, 3.1), 3)
    outdoor = round(rng.gauss(9.4, 2.3), 1)
    cooling = pick(rng, COOLING_SHARE)
    ln_energy = (INTERCEPT + B_AREA * math.log(area) + B_THROUGHPUT * math.sqrt(throughput)
                 + B_FILL * math.sqrt(101 - fill) + B_DOORS * math.log(doors + 1) + B_NIGHT * night
                 + B_OUTDOOR * outdoor + COOLING[cooling] + rng.gauss(0, NOISE_SD))
    return {
        "store": f"K{number:03d}", "energy_kwh": round(math.exp(ln_energy) * 10),
        "floor_area_m2": int(area), "volume_m3": round(area * height), "throughput_t": throughput,
        "fill_percent": fill, "door_openings": doors, "night_share": night, "outdoor_c": outdoor, "cooling": cooling,
        "visit_day": rng.randint(1, 365), "paint_batch": rng.randint(1, 24),
    }


def lose_some(rng, rows):
    """Empties a few cells, as meters and clerks do."""
    for column, count in (("throughput_t", 5), ("fill_percent", 4), ("energy_kwh", 2)):
        for row in rng.sample(rows, count):
            row[column] = ""


def truth():
    levels = "\n".join(f"| `{name}` | {value:+.2f} |" for name, value in COOLING.items())
    return f"""# What is true in coldstores.csv

Written by `generate.py` (seed {SEED}), {ROWS} rows; all of it is invented.

    ln(energy_kwh) = {INTERCEPT + math.log(10):.4f} + {B_AREA}·ln(floor_area_m2) + {B_THROUGHPUT}·√(throughput_t) + {B_FILL}·√(101 − fill_percent)
                     + {B_DOORS}·ln(door_openings + 1) − {-B_NIGHT}·night_share + {B_OUTDOOR}·outdoor_c + effect of cooling + error

The error is normal with standard deviation {NOISE_SD} on this scale, so it is multiplicative in kWh: the mean lies exp({NOISE_SD}²/2) = {math.exp(NOISE_SD**2 / 2):.4f}
times above the median that the equation gives.

| cooling | effect |
| --- | --- |
{levels}

- `volume_m3` is floor area times a ceiling height that hardly varies: a near-duplicate of `floor_area_m2` without an effect of its own.
- `visit_day` and `paint_batch` are pure noise.
- `store` is a label, different on every row.
- A few cells of `throughput_t`, `fill_percent` and `energy_kwh` are empty.
"""


def main():
    here = pathlib.Path(__file__).resolve().parent
    rng = random.Random(SEED)
    rows = [store(rng, number) for number in range(1, ROWS + 1)]
    lose_some(rng, rows)
    with open(here / "coldstores.csv", "w", newline="", encoding="utf-8") as file:
        writer = csv.DictWriter(file, COLUMNS, lineterminator="\n")
        writer.writeheader()
        writer.writerows(rows)
    (here / "truth.md").write_text(truth(), encoding="utf-8")


if __name__ == "__main__":
    main()
