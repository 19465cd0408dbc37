"""Mixing models with a physics of their own: one file per published source."""

from models.mixing.family import MixingModel
from models.mixing.physical.bruggeman import BRUGGEMAN
from models.mixing.physical.complex_refractive import COMPLEX_REFRACTIVE
from models.mixing.physical.crim import CRIM
from models.mixing.physical.de_loor_1968 import DE_LOOR_1968
from models.mixing.physical.dobson_1985 import DOBSON_1985
from models.mixing.physical.hanai_bruggeman import HANAI_BRUGGEMAN
from models.mixing.physical.maxwell_garnett import MAXWELL_GARNETT
from models.mixing.physical.mironov_2009 import MIRONOV_2009
from models.mixing.physical.peplinski_1995 import PEPLINSKI_1995
from models.mixing.physical.power_law import POWER_LAW
from models.mixing.physical.roth_1990 import ROTH_1990
from models.mixing.physical.sihvola import SIHVOLA

PHYSICAL: tuple[MixingModel, ...] = (
    POWER_LAW,
    ROTH_1990,
    CRIM,
    COMPLEX_REFRACTIVE,
    MIRONOV_2009,
    MAXWELL_GARNETT,
    BRUGGEMAN,
    DE_LOOR_1968,
    SIHVOLA,
    HANAI_BRUGGEMAN,
    DOBSON_1985,
    PEPLINSKI_1995,
)
