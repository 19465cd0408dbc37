"""The vocabulary: every quantity by its one name, with symbol, unit, meaning and physical gate.

JSON keys, CSV headers, query parameters, catalogue entries, unit conversion and the README table
are all derived from here. Gates are what is physically possible, in the unit of the API; a value
outside is a fault of the logger, of a unit or of a typing hand.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from math import log
from types import MappingProxyType

from models.relation import Range
from models.units import UNITS, Unit, units_of

SUFFIXES: Mapping[str, str] = MappingProxyType({
    "_u": "standard uncertainty (k = 1)",
    "_u_shared": "the part of it that all readings of the same soil and probe share",
    "_lower": "lower end of the coverage interval",
    "_upper": "upper end of the coverage interval",
})  # fmt: skip

TINY = 1e-30
STANDARD_GRAVITY = 9.80665
"""m/s2; kN/m3 over g/cm3."""
BANDED = ("", *SUFFIXES)
"""Suffixes of an estimated quantity, in the order of the answer."""


def band_names(quantity: str) -> tuple[str, ...]:
    """The columns an estimated quantity has."""
    return tuple(quantity + suffix for suffix in BANDED)


@dataclass(frozen=True, slots=True)
class Quantity:
    """One word of the vocabulary."""

    name: str
    symbol: str
    unit: str
    """UCUM code of the unit the API uses unless a request names another."""
    meaning: str
    gate: Range | None = None
    """What is physically possible, in ``unit``."""
    lookalikes: tuple[str, ...] = ()
    """Units that people send by mistake, most likely first."""
    typical: float | None = None
    """A usual value in SI, to tell which of several units was meant; None: the first that fits."""
    follows: str = ""
    """A quantity in whose unit it is told, too, where a caller names no other for it."""

    @property
    def key(self) -> str:
        """The name, as registries call it."""
        return self.name

    @property
    def dimension(self) -> str:
        """Of its unit; empty for text."""
        return UNITS[self.unit].dimension if self.unit else ""

    @property
    def units(self) -> tuple[Unit, ...]:
        """Every unit it may be given in."""
        return units_of(self.dimension) if self.unit else ()

    @property
    def gate_si(self) -> Range:
        """The gate in SI (temperature: Cel); everything where there is none."""
        if self.gate is None:
            return Range(-float("inf"), float("inf"))
        unit = UNITS[self.unit]
        return Range(float(unit.to_si(self.gate.low)), float(unit.to_si(self.gate.high)))

    def aside(self, si_value: float) -> str:
        """The end of a sentence about an impossible density that is possible as unit weight."""
        density = si_value / UNITS["g/cm3"].scale / STANDARD_GRAVITY
        if self.dimension != "density" or self.gate is None or self.gate.excludes(density):
            return ""
        return f": that looks like a unit weight in kN/m3; send it over 9.80665, {density:.4g}"

    def likely_unit(self, si_value: float, unit: str, gate: Range | None = None) -> str | None:
        """The unit that would bring a value within the gate, where one is a usual mistake.

        ``si_value`` was read as being in ``unit``, and is outside. gate: in SI, where it is known
        to be narrower than the quantity's own.
        """
        possible = gate or self.gate_si
        written = float(UNITS[unit].from_si(si_value))
        meant = {
            code: float(UNITS[code].to_si(written)) for code in self.lookalikes if code != unit
        }
        fits = [code for code, value in meant.items() if not possible.excludes(value)]
        if not possible.excludes(si_value):
            return None
        if not fits or self.typical is None:
            return next(iter(fits), None)
        usual = self.typical
        return min(fits, key=lambda code: abs(log(max(meant[code], TINY) / usual)))


_FRACTION = Range(0.0, 1.0)
_CONDUCTIVITY = ("uS/cm", "mS/m", "S/m")

QUANTITIES: Mapping[str, Quantity] = MappingProxyType({q.name: q for q in (
    Quantity("time", "", "", "moment of the measurement, RFC 3339 with offset; "
             "estimates pass it on as it was sent"),
    Quantity("depth", "z", "m", "below the surface, positive down", Range(-1.0, 1000.0),
             ("cm", "mm")),
    Quantity("apparent_permittivity", "Ka", "1",
             "from travel time, or a sensor's single number; Ka = (Re sqrt(eps))^2",
             Range(1.0, 200.0)),
    Quantity("real_permittivity", "eps'", "1", "real part of eps = eps' - j eps''",
             Range(1.0, 200.0)),
    Quantity("imaginary_permittivity", "eps''", "1",
             "loss, >= 0, conduction included, of eps = eps' - j eps''", Range(0.0, 20000.0)),
    Quantity("frequency", "f", "Hz", "of the measurement, or effective frequency",
             Range(1e6, 1e11), ("MHz", "GHz", "kHz"), typical=3e8),
    Quantity("travel_time", "t", "ns", "two-way, along the rods", Range(0.0, 1000.0), ("ps", "s")),
    Quantity("temperature", "T", "Cel", "of the soil", Range(-40.0, 60.0), ("K", "[degF]")),
    Quantity("bulk_conductivity", "sigma_b", "dS/m",
             "of the soil as a whole, at soil temperature", Range(0.0, 20.0), _CONDUCTIVITY,
             typical=0.05),
    Quantity("bulk_conductivity_25", "sigma_b25", "dS/m",
             "of the soil as a whole, brought to 25 Cel", Range(0.0, 40.0), _CONDUCTIVITY),
    Quantity("water_content", "theta", "m3/m3", "volumetric, liquid water", _FRACTION, ("%",)),
    Quantity("conduction_correction", "", "m3/m3", "by how much correcting the apparent "
             "permittivity for conduction lowered the water content", Range(-1.0, 1.0), ("%",),
             follows="water_content"),
    Quantity("model_spread", "", "m3/m3", "standard deviation between mixing models whose ranges "
             "hold the reading", Range(0.0, 1.0), ("%",),
             follows="water_content"),
    Quantity("gravimetric_water_content", "w", "kg/kg", "of dry mass", Range(0.0, 20.0), ("%",)),
    Quantity("degree_of_saturation", "S_r", "1", "share of the pores filled with water",
             _FRACTION, ("%",)),
    Quantity("pore_water_conductivity", "sigma_w", "dS/m", "of the water in the pores, at 25 Cel",
             Range(0.0, 300.0), _CONDUCTIVITY),
    Quantity("saturation_extract_conductivity", "sigma_e", "dS/m",
             "of the saturated paste extract, at 25 Cel", Range(0.0, 200.0), _CONDUCTIVITY),
    Quantity("bound_water_content", "theta_b", "m3/m3", "where a model resolves it",
             _FRACTION, ("%",)),
    Quantity("sand", "S", "kg/kg", "mass fraction of sand", _FRACTION, ("%",)),
    Quantity("silt", "Si", "kg/kg", "mass fraction of silt", _FRACTION, ("%",)),
    Quantity("clay", "C", "kg/kg", "mass fraction of clay", _FRACTION, ("%",)),
    Quantity("organic_matter", "OM", "kg/kg", "mass fraction of organic matter",
             _FRACTION, ("%",)),
    Quantity("bulk_density", "rho_b", "g/cm3", "dry mass over total volume", Range(0.03, 2.7),
             ("kg/m3",)),
    Quantity("particle_density", "rho_s", "g/cm3", "mass over volume of the solids",
             Range(1.0, 6.0), ("kg/m3",)),
    Quantity("porosity", "phi", "m3/m3", "pore volume over total volume; 1 - rho_b/rho_s when "
             "not given", Range(0.05, 0.99), ("%",)),
    Quantity("solid_permittivity", "eps_s", "1", "of the solids", Range(1.5, 30.0)),
    Quantity("specific_surface", "A_s", "m2/g", "surface over mass of the solids",
             Range(0.0, 1000.0), ("m2/kg",)),
    Quantity("saturation_percentage", "SP", "kg/kg",
             "water content of the saturated paste: 0.45, not 45", Range(0.05, 10.0), ("%",)),
    Quantity("surface_conductivity", "sigma_s", "dS/m", "of the soil along the surfaces of its "
             "solids alone, at 25 Cel", Range(0.0, 3.0), _CONDUCTIVITY),
    Quantity("field_capacity", "theta_fc", "m3/m3", "water content at field capacity",
             _FRACTION, ("%",)),
    Quantity("wilting_point", "theta_wp", "m3/m3", "water content at the wilting point",
             _FRACTION, ("%",)),
    Quantity("probe_length", "L", "m", "of the rods", Range(0.005, 10.0), ("cm", "mm"), 0.2),
    Quantity("probe_constant", "Kp", "1/m", "bulk conductivity over conductance",
             Range(0.1, 1000.0), ("1/cm",)),
    Quantity("water_permittivity", "eps_w", "1", "of the pore water, real or apparent as the "
             "mixing model takes it; computed from temperature and frequency unless given",
             Range(40.0, 100.0)),
    Quantity("static_permittivity", "eps_static", "1", "below all relaxations of a spectrum"),
    Quantity("infinite_permittivity", "eps_inf", "1", "above all relaxations of a spectrum"),
    Quantity("relaxation_strength", "", "1", "permittivity below a relaxation less that above"),
    Quantity("relaxation_time", "tau", "ns", "of one term of a spectrum"),
    Quantity("relaxation_frequency", "", "Hz", "1 / (2 pi tau), of one term of a spectrum"),
)})  # fmt: skip

READING = (
    "time", "depth", "apparent_permittivity", "real_permittivity", "imaginary_permittivity",
    "frequency", "travel_time", "temperature", "bulk_conductivity",
)  # fmt: skip
"""What a reading may carry."""

SOIL = (
    "sand", "silt", "clay", "organic_matter", "bulk_density", "particle_density", "porosity",
    "solid_permittivity", "specific_surface", "bound_water_content", "saturation_percentage",
    "field_capacity", "wilting_point",
)  # fmt: skip
"""What describes a soil, besides its texture class."""

PROBE = ("frequency", "probe_length", "probe_constant")
"""What describes a probe."""

NOISE = ("apparent_permittivity", "real_permittivity", "imaginary_permittivity", "travel_time",
         "temperature", "bulk_conductivity", "frequency")  # fmt: skip
"""Quantities of a reading whose standard uncertainty a probe may state for all its readings."""
