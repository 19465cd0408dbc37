"""Parts of a soil's description that hardly go together: told, since either may be right."""

from models.soil.description import Soil
from models.soil.texture import TEXTURES

FAR = 3.0
"""Standard uncertainties from a class mean beyond which a fraction is hardly of that class."""
PORES = 0.06
"""m3/m3 between a porosity and that of the densities: three times what densities leave open."""


def contradictions(soil: Soil) -> tuple[str, ...]:
    """Sentences about what the caller gave, numbers in the unit of the API; none: nothing odd."""
    given = {name: v for name, v in soil.values.items() if soil.origins.get(name) == "given"}
    told = []
    if soil.texture is not None:
        mean = TEXTURES[soil.texture]
        for name, usual, spread in (
            ("clay", mean.clay, mean.clay_u),
            ("sand", mean.sand, mean.sand_u),
        ):
            if name in given and usual is not None and abs(given[name] - usual) > FAR * spread:
                told.append(
                    f"{name} {given[name]:g} is far from a soil called {mean.title}, which has "
                    f"about {usual:g}: one of both is wrong, and the number counts"
                )
    if {"porosity", "bulk_density"} <= given.keys():
        porosity, dense, solid = (
            soil.values[name] for name in ("porosity", "bulk_density", "particle_density")
        )
        if abs(porosity - (1.0 - dense / solid)) > PORES:
            told.append(
                f"porosity {porosity:g} and bulk_density {dense / 1e3:g} g/cm3 contradict each "
                f"other: with a particle_density of {solid / 1e3:g} g/cm3 that density has "
                f"{1.0 - dense / solid:.2f} of pores"
            )
    return tuple(told)


def is_inverted(soil: Soil) -> bool:
    """Whether more water is left at the wilting point than at field capacity."""
    known = soil.values
    both = "field_capacity" in known and "wilting_point" in known
    return both and known["field_capacity"] < known["wilting_point"]
