"""Crops: root depth and depletion fraction, salt threshold and slope; guides, never a field value.

Root depths and depletion fractions: Allen and others (1998), Table 22, from secondary copies. Salt:
Maas and Hoffman (1977) as tabulated in Ayers and Westcot (1985), Table 4, and by Maas (1990), from
secondary copies. What is from memory says so. Climate, variety, stage and management change all of
them; a later edition of the first (2025) moves several.
"""

from dataclasses import dataclass

from models.decisions.allen_1998 import SOURCE
from models.decisions.leaching import SOURCE as AYERS_WESTCOT
from models.registry import Registry
from models.relation import Citation

TABLE_22 = Citation(
    authors=SOURCE.authors, year=SOURCE.year, title=SOURCE.title,
    where="FAO Irrigation and Drainage Paper 56, Table 22",
    note="from secondary copies, at 5 mm a day; the edition of 2025 has other numbers",
)  # fmt: skip
TABLE_4 = Citation(
    authors=AYERS_WESTCOT.authors, year=AYERS_WESTCOT.year, title=AYERS_WESTCOT.title,
    where="FAO Irrigation and Drainage Paper 29, revision 1, Table 4; eggplant and muskmelon: "
    "Maas, E. V. (1990), Crop salt tolerance, ASCE Manual 71",
    note="after Maas and Hoffman (1977), from secondary copies",
)  # fmt: skip

THRESHOLD_SPREAD, SLOPE_SPREAD = 0.17, 0.10
"""Relative standard uncertainty of threshold and slope: our choice, after the ranges that FAO-56
(revision of 2025) prints for tomato and cucumber, taken as rectangular."""
FRACTION_U = 0.05
"""Standard uncertainty of a depletion fraction; our choice."""
DS_M = 0.1
"""S/m in 1 dS/m."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Crop:
    """One crop; None where the tables have no number."""

    key: str
    title: str
    root_depth: tuple[float, float] | None = None
    """m: the smaller for irrigation planning, the larger for stress where it only rains."""
    depletion_fraction: float | None = None
    """At 5 mm a day of evapotranspiration."""
    threshold_ds_m: float | None = None
    """Extract conductivity up to which yield is whole, dS/m, as printed."""
    slope_percent: float | None = None
    """Percent of yield lost per dS/m beyond, as printed."""
    from_memory: tuple[str, ...] = ()
    """Numbers not confirmed in any copy."""
    note: str = ""

    @property
    def threshold(self) -> tuple[float, float] | None:
        """Threshold and its standard uncertainty, S/m."""
        if self.threshold_ds_m is None:
            return None
        return self.threshold_ds_m * DS_M, THRESHOLD_SPREAD * self.threshold_ds_m * DS_M

    @property
    def slope(self) -> tuple[float, float] | None:
        """Slope and its standard uncertainty, fraction of the yield per S/m."""
        if self.slope_percent is None:
            return None
        value = self.slope_percent / 100.0 / DS_M
        return value, SLOPE_SPREAD * value

    @property
    def readily_available(self) -> tuple[float, float] | None:
        """Depletion fraction at 5 mm a day and its standard uncertainty."""
        if self.depletion_fraction is None:
            return None
        return self.depletion_fraction, FRACTION_U


def _crop(
    title: str,
    water: tuple[float, float, float] | None = None,
    salt: tuple[float, float] | None = None,
    *from_memory: str,
    note: str = "",
) -> Crop:
    """water: smaller and larger root depth, depletion fraction; salt: threshold and slope."""
    key = title.lower().replace(" (", "-").replace(")", "").replace(", ", "-").replace(" ", "-")
    return Crop(
        key=key,
        title=title,
        root_depth=water[:2] if water else None,
        depletion_fraction=water[2] if water else None,
        threshold_ds_m=salt[0] if salt else None,
        slope_percent=salt[1] if salt else None,
        from_memory=from_memory,
        note=note,
    )


_ROOTS, _SLOPE = "root_depth", "slope_percent"
_WATER = (_ROOTS, "depletion_fraction")
_SUBMERGED = "while submerged, the conductivity is that of the soil water"

CROPS: Registry[Crop] = Registry(
    "crop",
    _crop("Alfalfa", (1.0, 2.0, 0.55), (2.0, 7.3), _ROOTS, _SLOPE),
    _crop("Barley", None, (8.0, 5.0), note="seedlings may need less salt than the threshold"),
    _crop("Bean", None, (1.0, 19.0)),
    _crop("Bean, green", (0.5, 0.7, 0.45)),
    _crop("Beet, red", None, (4.0, 9.0)),
    _crop("Beet, sugar", None, (7.0, 5.9)),
    _crop("Bermuda grass", None, (6.9, 6.4)),
    _crop("Broccoli", (0.4, 0.6, 0.45), (2.8, 9.2)),
    _crop("Cabbage", (0.5, 0.8, 0.45), (1.8, 9.7)),
    _crop("Carrot", (0.5, 1.0, 0.35), (1.0, 14.0)),
    _crop("Cauliflower", (0.4, 0.7, 0.45)),
    _crop("Citrus", (1.2, 1.5, 0.50)),
    _crop("Cotton", (1.0, 1.7, 0.65), (7.7, 5.2), _ROOTS),
    _crop("Cucumber", (0.7, 1.2, 0.50), (2.5, 13.0)),
    _crop("Date palm", None, (4.0, 3.6)),
    _crop("Eggplant", (0.7, 1.2, 0.45), (1.1, 6.9)),
    _crop("Garlic", (0.3, 0.5, 0.30)),
    _crop("Grape", (1.0, 2.0, 0.45), (1.5, 9.6), _SLOPE),
    _crop("Lentil", (0.6, 0.8, 0.50)),
    _crop("Lettuce", (0.3, 0.5, 0.30), (1.3, 13.0)),
    _crop("Love grass", None, (2.0, 8.4), _SLOPE),
    _crop("Maize, forage", None, (1.8, 7.4), _SLOPE),
    _crop("Maize, grain", (1.0, 1.7, 0.55), (1.7, 12.0)),
    _crop("Maize, sweet", (0.8, 1.2, 0.50)),
    _crop("Melon", (0.8, 1.5, 0.40)),
    _crop("Muskmelon", None, (1.0, 8.4)),
    _crop("Olive", (1.2, 1.7, 0.65)),
    _crop("Onion", (0.3, 0.6, 0.30), (1.2, 16.0)),
    _crop("Orange", None, (1.7, 16.0), _SLOPE),
    _crop("Pepper, sweet", (0.5, 1.0, 0.30), (1.5, 14.0)),
    _crop("Potato", (0.4, 0.6, 0.35), (1.7, 12.0)),
    _crop("Radish", (0.3, 0.5, 0.30), (1.2, 13.0)),
    _crop("Rice", (0.5, 1.0, 0.20), (3.0, 12.0), *_WATER, note=_SUBMERGED),
    _crop("Sorghum", None, (6.8, 16.0)),
    _crop("Soybean", (0.6, 1.3, 0.50), (5.0, 20.0), *_WATER),
    _crop("Spinach", (0.3, 0.5, 0.20), (2.0, 7.6)),
    _crop("Squash", (0.6, 1.0, 0.50)),
    _crop("Strawberry", None, (1.0, 33.0)),
    _crop("Sudan grass", None, (2.8, 4.3), _SLOPE),
    _crop("Sugarcane", (1.2, 2.0, 0.65), (1.7, 5.9), *_WATER, _SLOPE),
    _crop("Tomato", (0.7, 1.5, 0.40), (2.5, 9.9)),
    _crop("Watermelon", (0.8, 1.5, 0.40)),
    _crop("Wheat", None, (6.0, 7.1), note="seedlings may need less salt than the threshold"),
    _crop("Wheat, spring", (1.0, 1.5, 0.55), None, _ROOTS),
    _crop("Wheat, winter", (1.5, 1.8, 0.55), None, _ROOTS),
    _crop("Zucchini", None, (4.7, 9.4)),
)
