"""One soil, completed: what was given, what its texture class adds, what follows from both."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from models.errors import Complaint, ParameterError
from models.soil import banin_amiel_1970, bound_water
from models.soil.texture import TEXTURES, TextureClass, texture_key

PARTICLE_DENSITY, PARTICLE_DENSITY_U = 2650.0, 50.0  # mineral soils, common practice
ORGANIC_DENSITY = 1400.0  # of organic matter, common practice
MINERAL_ORGANIC = 0.02  # kg/kg, of a soil whose texture class is a mineral one, common practice
CLOSURE = 0.02  # how far sand + silt + clay may be from one


@dataclass(frozen=True, slots=True, kw_only=True)
class Soil:
    """Properties by quantity name, SI, each with its standard uncertainty and its origin."""

    texture: str | None
    values: Mapping[str, float]
    uncertainties: Mapping[str, float]
    origins: Mapping[str, str]
    """Either "given" or how the service came by it."""

    @property
    def assumed(self) -> tuple[str, ...]:
        """What the texture class filled in."""
        return tuple(n for n, origin in self.origins.items() if origin.startswith("texture"))


def describe(
    texture: str | None, given: Mapping[str, float], uncertainties: Mapping[str, float]
) -> Soil:
    """Complete a soil description.

    given, uncertainties: by quantity name, SI; an uncertainty that is not stated is zero.
    Raises UnknownName for a texture that is none, ParameterError where the parts contradict.
    """
    _refuse_contradictions(given)
    book = _Book(dict(given), {n: uncertainties.get(n, 0.0) for n in given})
    key = None
    if texture is not None:
        key = texture_key(texture)
        _add_class(book, key)
    _derive(book)
    return Soil(
        texture=key, values=book.values, uncertainties=book.uncertainties, origins=book.origins
    )


class _Book:
    """Values under way; the first to enter a name keeps it."""

    def __init__(self, values: dict[str, float], uncertainties: dict[str, float]) -> None:
        self.values, self.uncertainties = values, uncertainties
        self.origins = dict.fromkeys(values, "given")

    def add(self, name: str, value: float | None, uncertainty: float, origin: str) -> None:
        if value is None or name in self.values:
            return
        self.values[name], self.uncertainties[name] = float(value), float(uncertainty)
        self.origins[name] = origin

    def has(self, *names: str) -> bool:
        return all(name in self.values for name in names)


def _refuse_contradictions(given: Mapping[str, float]) -> None:
    parts = [given[n] for n in ("sand", "silt", "clay") if n in given]
    total = sum(parts)
    short = len(parts) == 3 and total < 1.0 - CLOSURE
    if total > 1.0 + CLOSURE or short:
        detail = f"sand, silt and clay must add up to 1, found {total:g}"
        raise ParameterError("soil", [Complaint("clay", detail, ("soil",))])


def _refuse_no_pores(dense: float, solid: float, origin: str) -> None:
    if dense < solid:
        return
    detail = (
        f"bulk_density {dense / 1e3:g} g/cm3 is not below the density of the solids, "
        f"particle_density {solid / 1e3:g} g/cm3 ({origin}): no pores would be left"
    )
    raise ParameterError("soil", [Complaint("bulk_density", detail, ("soil", "bulk_density"))])


def _add_class(book: _Book, key: str) -> None:
    origin = f"texture {key}"
    mean = TEXTURES[key]
    if not book.has("silt"):
        book.add("sand", _rest_of(mean, book.values.get("clay")), mean.sand_u, origin)
        book.add("clay", mean.clay, mean.clay_u, origin)
    if not book.has("porosity"):
        book.add("bulk_density", mean.bulk_density, mean.bulk_density_u, origin)
    if not book.has("organic_matter"):
        book.add("particle_density", mean.particle_density, mean.particle_density_u, origin)
    book.add("organic_matter", mean.organic_matter, mean.organic_matter_u, origin)


def _rest_of(mean: TextureClass, clay: float | None) -> float | None:
    """The class's sand, as a share of what a clay content of the caller's own leaves."""
    if clay is None or mean.sand is None or mean.clay is None:
        return mean.sand
    return mean.sand / (1.0 - mean.clay) * max(1.0 - clay, 0.0)


def _derive(book: _Book) -> None:
    value, u = book.values, book.uncertainties
    for name, other in (("silt", "sand"), ("sand", "silt")):
        if book.has("clay", other):
            rest = max(1.0 - value["clay"] - value[other], 0.0)
            book.add(name, rest, np.hypot(u["clay"], u[other]), f"1 - clay - {other}")
    if book.has("organic_matter"):
        organic = value["organic_matter"]
        mixed = 1.0 / ((1.0 - organic) / PARTICLE_DENSITY + organic / ORGANIC_DENSITY)
        book.add("particle_density", mixed, PARTICLE_DENSITY_U, "2.65 and 1.4 g/cm3, by mass")
    book.add("particle_density", PARTICLE_DENSITY, PARTICLE_DENSITY_U, "mineral soil, 2.65 g/cm3")
    solid = value["particle_density"]
    if book.has("bulk_density"):
        _refuse_no_pores(value["bulk_density"], solid, book.origins["particle_density"])
        dry = value["bulk_density"] / solid
        spread = np.hypot(u["bulk_density"] / solid, dry * u["particle_density"] / solid)
        book.add("porosity", 1.0 - dry, spread, "1 - bulk_density / particle_density")
    elif book.has("porosity"):
        dense = (1.0 - value["porosity"]) * solid
        spread = np.hypot(u["porosity"] * solid, dense * u["particle_density"] / solid)
        book.add("bulk_density", dense, spread, "(1 - porosity) particle_density")
    if book.has("clay"):
        surface = float(banin_amiel_1970.specific_surface(value["clay"]))
        spread = surface * banin_amiel_1970.RELATIVE_UNCERTAINTY
        book.add("specific_surface", surface, spread, "clay, Banin and Amiel (1970)")
    if book.has("specific_surface", "bulk_density"):
        layer = float(
            bound_water.monolayer_content(value["bulk_density"], value["specific_surface"])
        )
        spread = layer * bound_water.RELATIVE_UNCERTAINTY
        book.add("bound_water_content", layer, spread, "one molecular layer on the surface")
