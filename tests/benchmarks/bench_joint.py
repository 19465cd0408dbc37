"""Water content and pore-water conductivity together, beside scipy.optimize.fsolve row by row.

Run: python -m tests.benchmarks.bench_joint
"""

import numpy as np
from scipy.optimize import fsolve

from models.conductivity.loss import conduction_loss
from models.mixing.joint import to_complex_permittivity, to_water_content_and_conductivity
from models.water import kaatze_1989
from tests.benchmarks.interleaved import medians, quiet, report

ROWS, SOLVED, FREQUENCY = 200_000, 200, 70e6
PER_CONDUCTIVITY = float(conduction_loss(1.0, FREQUENCY))
SOIL = {"porosity": 0.45, "solid_permittivity": 4.7}


def main():
    rng = np.random.default_rng(3)
    theta, salt = rng.uniform(0.08, 0.4, ROWS), rng.uniform(0.02, 0.3, ROWS)
    real, loss = kaatze_1989.parts(FREQUENCY, rng.uniform(2, 35, ROWS))
    water = real - 1j * loss
    for exponent, aim in ((0.5, "at least 1000"), (0.46, "at least 20")):
        how = {**SOIL, "exponent": exponent}
        eps = to_complex_permittivity(theta, salt, FREQUENCY, water_permittivity=water, **how)

        def ours(eps=eps, how=how):
            return to_water_content_and_conductivity(
                eps, FREQUENCY, water_permittivity=water, **how
            )

        def solved(eps=eps, exponent=exponent):
            """As a user would: the equation on plain Python numbers, one reading at a time."""
            dry = (1 - SOIL["porosity"]) * SOIL["solid_permittivity"] ** exponent + SOIL["porosity"]
            for row in range(SOLVED):
                pure, seen = complex(water[row]), complex(eps[row])

                def off(x, pure=pure, seen=seen):
                    wet = (pure - 1j * x[1] * PER_CONDUCTIVITY) ** exponent
                    rest = (dry + x[0] * (wet - 1)) ** (1 / exponent) - seen
                    return (rest.real, rest.imag)

                fsolve(off, (0.2, 0.1))

        calm = quiet()
        found = medians({"fsolve": solved, "ours": ours}, rounds=5)
        each, one = found["fsolve"] / SOLVED, found["ours"] / ROWS
        report(f"joint inversion, exponent {exponent}, times as fast per reading as fsolve",
               each / one, aim, fsolve_us=1e6 * each, ours_ns=1e9 * one, calm=calm)  # fmt: skip


if __name__ == "__main__":
    main()
