"""Conductivity of the pore water from that of the soil, and of the saturated paste extract."""

from models.registry import Registry
from models.salinity.archie_1942 import ARCHIE_1942
from models.salinity.complex_refractive import COMPLEX_REFRACTIVE
from models.salinity.family import PoreWaterModel
from models.salinity.hilhorst_2000 import HILHORST_2000
from models.salinity.malicki_walczak_1999 import MALICKI_WALCZAK_1999
from models.salinity.mualem_friedman_1991 import MUALEM_FRIEDMAN_1991
from models.salinity.rhoades_1976 import RHOADES_1976
from models.salinity.rhoades_1989 import RHOADES_1989
from models.salinity.waxman_smits_1968 import WAXMAN_SMITS_1968

PORE_WATER_MODELS: Registry[PoreWaterModel] = Registry(
    "pore-water model",
    HILHORST_2000,
    RHOADES_1976,
    RHOADES_1989,
    MALICKI_WALCZAK_1999,
    MUALEM_FRIEDMAN_1991,
    ARCHIE_1942,
    WAXMAN_SMITS_1968,
    COMPLEX_REFRACTIVE,
)
DEFAULT_PORE_WATER_MODEL = RHOADES_1989.key
"""Needs no coefficient that texture and density do not give, and knows conduction along surfaces:
compared by Kargas and Kerkides (2012), closer than the straight line in permittivity."""
