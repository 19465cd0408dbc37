"""Bands in passes of the values alone, and draws beside a loop over the readings.

Run: python -m tests.benchmarks.bench_uncertainty
"""

import numpy as np

from models.uncertainty.distributions import Normal
from models.uncertainty.draws import Draws
from models.uncertainty.first_order import Input, propagate
from models.uncertainty.monte_carlo import simulate
from models.uncertainty.quantiles.reliability import Method, band
from service.memory import keep_working_memory
from tests.benchmarks.interleaved import medians, quiet, report

ROWS, BLOCK = 1_000_000, 16_384
FEW, SOME = 100, 1000
UNCERTAIN = {"t": 1.0, "phi": 0.02, "solid": 0.4}
SHARE = 0.03


def measurand(ka, t, phi, solid):
    """Three phases in their refractive indices: any smooth function of four inputs would do."""
    water = 87.740 - t * (0.40008 - t * (9.398e-4 - t * 1.410e-6))
    return (np.sqrt(ka) - (1 - phi) * np.sqrt(solid) - phi) / (np.sqrt(water) - 1)


def values_alone(at, out):
    for start in range(0, out.size, BLOCK):
        rows = slice(start, start + BLOCK)
        out[rows] = measurand(at["ka"][rows], at["t"][rows], at["phi"], at["solid"])


def first_order(at, out):
    for start in range(0, out.size, BLOCK):
        rows = slice(start, start + BLOCK)
        here = {"ka": at["ka"][rows], "t": at["t"][rows], "phi": at["phi"], "solid": at["solid"]}
        given = [Input(n, x, UNCERTAIN.get(n, SHARE * here["ka"])) for n, x in here.items()]
        out[rows] = propagate(measurand, given, measurand(**here)).per_reading


def reading_by_reading(at, rows, draws):
    """What one would write: for each reading fresh draws, the measurand, two quantiles."""
    rng = np.random.default_rng(1)
    ends = np.empty((rows, 2))
    for row in range(rows):
        drawn = {
            "ka": rng.normal(at["ka"][row], SHARE * at["ka"][row], draws),
            "t": rng.normal(at["t"][row], UNCERTAIN["t"], draws),
            "phi": rng.normal(at["phi"], UNCERTAIN["phi"], draws),
            "solid": rng.normal(at["solid"], UNCERTAIN["solid"], draws),
        }
        ends[row] = np.quantile(measurand(**drawn), [0.025, 0.975])
    return ends


def known(at, rows):
    """The same as distributions, of the first rows."""
    ka = at["ka"][:rows]
    return {
        "ka": Normal(ka, SHARE * ka),
        "t": Normal(at["t"][:rows], UNCERTAIN["t"]),
        "phi": Normal(at["phi"], UNCERTAIN["phi"]),
        "solid": Normal(at["solid"], UNCERTAIN["solid"]),
    }


def main():
    keep_working_memory()  # as every process of the service does
    rng = np.random.default_rng(3)
    at = {"ka": rng.uniform(6, 30, ROWS), "t": rng.uniform(2, 35, ROWS), "phi": 0.45, "solid": 4.7}
    out, given, part, few = np.empty(ROWS), known(at, ROWS), known(at, SOME), known(at, FEW)
    assert (band(measurand, given).method == Method.GRADIENT).mean() > 0.99
    calm = quiet()
    found = medians({
        "sqrt": lambda: np.sqrt(at["ka"], out=out),
        "values": lambda: values_alone(at, out),
        "first order": lambda: first_order(at, out),
        "bands": lambda: band(measurand, given),
    })  # fmt: skip
    for name, aim in (("first order", "at most 15"), ("bands", "at most 40")):
        report(f"{name}, 1e6 rows, four inputs, in passes of the values alone",
               found[name] / found["values"], aim, sqrt_passes=found[name] / found["sqrt"],
               values_ms=1e3 * found["values"], case_ms=1e3 * found[name], calm=calm)  # fmt: skip
    each = found["bands"] / ROWS
    calm = quiet()
    found = medians({
        "loop": lambda: reading_by_reading(at, SOME, 1000),
        "bands": lambda: band(measurand, part),
    })  # fmt: skip
    report("bands, times as fast as 1 000 draws per reading in a loop", found["loop"] / SOME / each,
           "at least 500", loop_us=1e6 * found["loop"] / SOME, band_us=1e6 * each,
           of_1000_rows=found["loop"] / found["bands"], calm=calm)  # fmt: skip
    for kind in ("pseudo-random", "quasi-random"):
        draws = Draws(10_000, kind=kind)
        calm = quiet()
        found = medians({
            "loop": lambda draws=draws: reading_by_reading(at, FEW, draws.count),
            "common": lambda draws=draws: simulate(measurand, few, draws=draws),
        })  # fmt: skip
        report(f"{draws.count} common {kind} draws, times as fast as a loop with its own",
               found["loop"] / found["common"], "at least 4", loop_us=1e6 * found["loop"] / FEW,
               case_us=1e6 * found["common"] / FEW, calm=calm)  # fmt: skip


if __name__ == "__main__":
    main()
