"""Made-up soils and what is measured of them."""

import numpy as np

from models.calibration import Pairs


def root_law(permittivity):
    return -0.16 + 0.11 * np.sqrt(permittivity)


def cubic_law(permittivity):
    k = permittivity
    return -0.053 + 2.92e-2 * k - 5.5e-4 * k**2 + 4.3e-6 * k**3


def measured(law, count, errors, draw, *, stated=True, low=4.0, high=32.0):
    """Pairs of a soil; errors: of permittivity, of water content, and the soil's own scatter."""
    of_permittivity, of_water, of_soil = errors
    true = np.square(np.linspace(low**0.5, high**0.5, count))
    water = law(true) + of_soil * draw.standard_normal(count)
    said = 1.0 if stated else 0.0
    return Pairs(
        true + of_permittivity * draw.standard_normal(count),
        np.full(count, said * of_permittivity),
        water + of_water * draw.standard_normal(count),
        np.full(count, said * of_water),
    )


def exact(permittivity, water_content):
    """Pairs that state no uncertainty."""
    x, y = np.asarray(permittivity, dtype=float), np.asarray(water_content, dtype=float)
    return Pairs(x, np.zeros_like(x), y, np.zeros_like(y))
