"""What pore-water models take: worked out for each reading, or known of the soil."""

from models.mixing.phases import soil_property
from models.quantity import QUANTITIES
from models.relation import Parameter, Range


def _of_reading(name: str) -> Parameter:
    """The parameter of that name in the vocabulary, worked out for each reading."""
    quantity = QUANTITIES[name]
    return Parameter(name=name, meaning=quantity.meaning, range=quantity.gate_si, supplied=True)


WATER_CONTENT = _of_reading("water_content")
REAL_PERMITTIVITY = _of_reading("real_permittivity")
TEMPERATURE = _of_reading("temperature")
FREQUENCY = _of_reading("frequency")

POROSITY = soil_property("porosity")
CLAY = soil_property("clay")
SAND = soil_property("sand")
BULK_DENSITY = soil_property("bulk_density")
PARTICLE_DENSITY = soil_property("particle_density", default=2650.0, default_u=50.0)

SURFACE = Range(0.0, 0.3)
"""S/m. The heaviest clays reach 0.14: 0.44 is a loam in dS/m."""
SURFACE_CONDUCTIVITY = Parameter(
    name="surface_conductivity",
    meaning="of the soil through the surfaces of its solids alone, at 25 Cel; estimated "
    "from clay where it is not given",
    range=SURFACE,
)
CEMENTATION_EXPONENT = Parameter(
    name="cementation_exponent",
    meaning="m, how fast conduction falls with porosity; estimated from texture where it is not "
    "given",
    range=Range(1.0, 4.0), default=1.5, default_u=0.15,
)  # fmt: skip
SATURATION_EXPONENT = Parameter(
    name="saturation_exponent",
    meaning="n, how fast conduction falls as the pores empty; 1.3 to 2.5",
    range=Range(0.5, 5.0), default=2.0, default_u=0.3,
)  # fmt: skip
