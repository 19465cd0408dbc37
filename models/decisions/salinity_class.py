"""Classes of salinity by named schemes: the same number has another class in another scheme."""

from dataclasses import dataclass

import numpy as np

from models.decisions.outcome import exceedance
from models.registry import Registry
from models.relation import Array, Citation

DIGITS = 12
"""Of a conductivity in S/m that is compared: 0.7 dS/m is on its edge, not below it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Scheme:
    """Classes from the least saline on; a class holds its lower edge."""

    key: str
    title: str
    edges: tuple[float, ...]
    """S/m at 25 Cel, between the classes."""
    classes: tuple[str, ...]
    source: Citation


_HANDBOOK = Citation(
    authors="United States Salinity Laboratory Staff", year=1954,
    title="Diagnosis and improvement of saline and alkali soils", where="Agriculture Handbook 60",
    note="edges from a secondary copy, names of the classes in part from memory",
)  # fmt: skip
_DESCRIPTION = Citation(
    authors="Food and Agriculture Organization", year=2006,
    title="Guidelines for soil description", where="4th edition",
    note="edges from a secondary copy, names of the classes from memory",
)  # fmt: skip
_QUALITY = Citation(
    authors="Ayers, R. S.; Westcot, D. W.", year=1985, title="Water quality for agriculture",
    where="FAO Irrigation and Drainage Paper 29, revision 1, Table 1",
    note="edges from a secondary copy",
)  # fmt: skip

SOIL_SCHEMES: Registry[Scheme] = Registry(
    "salinity scheme",
    Scheme(key="handbook-60", title="Conductivity of the saturation extract, Handbook 60",
           edges=(0.2, 0.4, 0.8, 1.6),
           classes=("non-saline", "slightly saline", "moderately saline", "strongly saline",
                    "very strongly saline"), source=_HANDBOOK),
    Scheme(key="fao-2006", title="Conductivity of the saturation extract, soil description of 2006",
           edges=(0.075, 0.2, 0.4, 0.8, 1.5),
           classes=("not salty", "slightly salty", "moderately salty", "strongly salty",
                    "very strongly salty", "extremely salty"), source=_DESCRIPTION),
)  # fmt: skip

WATER_SCHEME = Scheme(
    key="fao-29", title="Conductivity of irrigation water, restriction on its use",
    edges=(0.07, 0.3), classes=("none", "slight to moderate", "severe"), source=_QUALITY,
)  # fmt: skip


def class_of(conductivity: Array, scheme: Scheme) -> Array:
    """Place of the class in ``scheme.classes``, elementwise; NaN where there is no number."""
    known = np.round(conductivity, DIGITS)
    place = np.searchsorted(scheme.edges, known, side="right").astype(float)
    return np.where(np.isnan(conductivity), np.nan, place)


def class_probabilities(conductivity: Array, u: Array, scheme: Scheme) -> Array:
    """Probability of each class, shape (n, classes), for normal quantities.

    An exact value on an edge is shared by two classes, as ``exceedance`` has it.
    """
    above = [exceedance(conductivity - edge, u) for edge in scheme.edges]
    ones = np.where(np.isnan(conductivity), np.nan, 1.0)
    steps = np.stack([ones, *above, 0.0 * ones], axis=-1)
    return steps[:, :-1] - steps[:, 1:]
