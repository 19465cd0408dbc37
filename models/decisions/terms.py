"""The words of decisions: what they add to the vocabulary, with units, meanings and gates.

Gates are what is physically possible or can be meant, in the unit of the API; a value outside is a
fault of a unit or of a typing hand.
"""

from collections.abc import Mapping
from types import MappingProxyType

from models.quantity import QUANTITIES, Quantity
from models.relation import Range

_CONDUCTIVITY = ("uS/cm", "mS/m", "S/m")
_SHARE = Range(0.01, 0.99)

TERMS: Mapping[str, Quantity] = MappingProxyType({q.name: q for q in (
    Quantity("root_depth", "Zr", "m", "depth of the root zone", Range(0.01, 10.0), ("cm", "mm"),
             typical=1.0),
    Quantity("depletion_fraction", "p", "1", "share of the total available water that is readily "
             "available", _SHARE, ("%",)),
    Quantity("crop_evapotranspiration", "ETc", "mm/d", "of the crop, a day", Range(0.01, 25.0)),
    Quantity("efficiency", "Ea", "1", "share of the applied water that gets to the root zone",
             Range(0.05, 1.0), ("%",)),
    Quantity("leaching_requirement", "LR", "1", "share of the applied water that is to pass below "
             "the roots", Range(0.0, 0.95), ("%",)),
    Quantity("leaching_fraction", "LF", "1", "share of the applied water that does pass below the "
             "roots", _SHARE, ("%",)),
    Quantity("application_limit", "", "mm", "most that the irrigation system gives at once",
             Range(0.1, 1000.0), ("m",)),
    Quantity("storage", "S", "mm", "water in the root zone, per area"),
    Quantity("total_available_water", "TAW", "mm", "between field capacity and wilting point"),
    Quantity("readily_available_water", "RAW", "mm", "the part of it that roots take without "
             "stress"),
    Quantity("depletion", "Dr", "mm", "missing to field capacity, from 0 to the total available "
             "water: the net depth of a refill"),
    Quantity("gross_refill", "", "mm", "the depletion with losses and leaching: what is to be "
             "applied"),
    Quantity("application", "", "mm", "the gross refill, at most application_limit"),
    Quantity("stress_coefficient", "Ks", "1", "evapotranspiration over that without lack of water"),
    Quantity("days_left", "", "d", "until the readily available water is used up at the stated "
             "evapotranspiration, without rain; 0 where it is used up"),
    Quantity("salt_storage", "", "kg/m2", "dissolved salt in the root zone, per area"),
    Quantity("water_conductivity", "ECw", "dS/m", "of the water applied, at 25 Cel",
             Range(0.001, 60.0), _CONDUCTIVITY, typical=0.1),
    Quantity("target_extract_conductivity", "ECe", "dS/m", "of the saturated paste extract that "
             "the crop is to have, at 25 Cel", Range(0.05, 60.0), _CONDUCTIVITY, typical=0.2),
    Quantity("target_yield", "", "1", "relative yield that the target is to allow",
             Range(0.1, 1.0), ("%",)),
    Quantity("salt_threshold", "a", "dS/m", "extract conductivity up to which yield is whole",
             Range(0.05, 60.0), _CONDUCTIVITY, typical=0.3),
    Quantity("salt_slope", "b", "1/(dS/m)", "share of the yield lost for each dS/m beyond the "
             "threshold", Range(0.001, 1.0), ("%/(dS/m)",)),
    Quantity("evapotranspiration", "ET", "mm", "of the crop, over the season or any other time; "
             "applied_water is over the same", Range(0.1, 5000.0), ("m",)),
    Quantity("applied_water", "AW", "mm", "so that the crop has its own and the rest leaches"),
    Quantity("soil_water_conductivity", "ECsw", "dS/m", "of the soil water at the top of each "
             "quarter of the root zone and at its bottom, at 25 Cel"),
    Quantity("mean_extract_conductivity", "ECe", "dS/m", "of the saturated paste extract, mean of "
             "the root zone after long use of the water, at 25 Cel"),
    Quantity("concentration_factor", "X", "1", "mean extract conductivity over that of the water"),
    Quantity("relative_yield", "Yr", "1", "by threshold and slope, over that without salt"),
    Quantity("curved_yield", "Yr", "1", "relative yield by the smooth curve"),
    Quantity("void_ratio", "e", "1", "pore volume over that of the solids"),
    Quantity("air_content", "", "m3/m3", "air volume over total volume; below 0: more water than "
             "pores"),
    Quantity("total_density", "rho_t", "g/cm3", "mass with water over total volume",
             Range(0.5, 4.0), ("kg/m3",)),
    Quantity("zero_air_density", "", "g/cm3", "dry density that this soil would have at this "
             "gravimetric water content without air"),
    Quantity("largest_bulk_density", "rho_d,max", "g/cm3", "largest dry density of a reference "
             "test", Range(0.3, 3.0), ("kg/m3",)),
    Quantity("compaction", "", "1", "dry density over the largest one"),
    Quantity("apparent_permittivity_20", "Ka", "1", "apparent permittivity brought to 20 Cel"),
    Quantity("standard_conductivity", "", "dS/m", "bulk conductivity adjusted to that of the pore "
             "water for which c and d hold", Range(0.0, 20.0), _CONDUCTIVITY, typical=0.05),
)})  # fmt: skip

WORDS: Mapping[str, Quantity] = MappingProxyType({**QUANTITIES, **TERMS})
"""The vocabulary and what decisions add to it."""
