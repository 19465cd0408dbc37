"""A column of a million readings through CRIM, values and bands, in plain np.sqrt passes.

Run: python -m tests.benchmarks.bench_estimates
"""

import time

import numpy as np

from models.estimate import Query, estimate, prepare
from models.mixing.apparent import to_apparent
from models.mixing.physical import crim
from models.readings import read
from models.soil.description import describe
from models.water import kaatze_1989
from service.memory import keep_working_memory
from tests.benchmarks.interleaved import medians, quiet, report

ROWS, BLOCK = 1_000_000, 16_384
FREQUENCY, POROSITY, SOLID = 1e9, 0.46, 4.7


def values_alone(permittivity, temperature, out):
    """Water content from apparent permittivity and temperature, in blocks, no bands."""
    for start in range(0, ROWS, BLOCK):
        rows = slice(start, start + BLOCK)
        real, loss = kaatze_1989.parts(FREQUENCY, temperature[rows])
        out[rows] = crim.to_water_content(
            permittivity[rows],
            water_permittivity=to_apparent(real, loss),
            porosity=POROSITY,
            solid_permittivity=SOLID,
        )


def main():
    keep_working_memory()  # as every process of the service does
    rng = np.random.default_rng(3)
    permittivity, temperature = rng.uniform(6.0, 30.0, ROWS), rng.uniform(2.0, 35.0, ROWS)
    columns = {"apparent_permittivity": permittivity, "temperature": temperature}
    soil = describe("loam", {"porosity": POROSITY}, {"porosity": 0.02})
    basis = prepare(
        Query(
            model="crim", soil=soil, columns=frozenset(columns),
            probe={"frequency": FREQUENCY, "apparent_permittivity_u": 0.3, "temperature_u": 0.5},
        )
    )  # fmt: skip
    readings = read(columns, {}, {})
    out = np.empty(ROWS)
    calm = quiet()
    found = medians({
        "sqrt": lambda: np.sqrt(permittivity, out=out),
        "values": lambda: values_alone(permittivity, temperature, out),
        "bands": lambda: estimate(readings, basis),
    }, clock=time.process_time)  # fmt: skip
    for name, aim in (("values", "at most 20"), ("bands", "at most 150")):
        report(f"crim {name}, 1e6 rows, in np.sqrt passes", found[name] / found["sqrt"], aim,
               sqrt_ms=1e3 * found["sqrt"], case_ms=1e3 * found[name], calm=calm)  # fmt: skip


if __name__ == "__main__":
    main()
