"""Curves fitted to measured soils: water content and permittivity, each from the other."""

from models.mixing.empirical.curtis_2001 import CURTIS_2001
from models.mixing.empirical.ferre_1996 import FERRE_1996
from models.mixing.empirical.jacobsen_schjonning_1993 import (
    JACOBSEN_SCHJONNING_1993,
    JACOBSEN_SCHJONNING_1993_TEXTURE,
)
from models.mixing.empirical.kellner_lundin_2001 import KELLNER_LUNDIN_2001
from models.mixing.empirical.ledieu_1986 import LEDIEU_1986
from models.mixing.empirical.malicki_1996 import MALICKI_1996
from models.mixing.empirical.polynomial import POLYNOMIAL
from models.mixing.empirical.roth_1992 import ROTH_1992_MINERAL, ROTH_1992_ORGANIC
from models.mixing.empirical.schaap_1997 import SCHAAP_1997
from models.mixing.empirical.square_root import SQUARE_ROOT
from models.mixing.empirical.topp_1980 import TOPP_1980
from models.mixing.empirical.wang_schmugge_1980 import WANG_SCHMUGGE_1980
from models.mixing.family import MixingModel

EMPIRICAL: tuple[MixingModel, ...] = (
    TOPP_1980,
    LEDIEU_1986,
    ROTH_1992_MINERAL,
    ROTH_1992_ORGANIC,
    MALICKI_1996,
    JACOBSEN_SCHJONNING_1993,
    JACOBSEN_SCHJONNING_1993_TEXTURE,
    FERRE_1996,
    SCHAAP_1997,
    KELLNER_LUNDIN_2001,
    CURTIS_2001,
    WANG_SCHMUGGE_1980,
    SQUARE_ROOT,
    POLYNOMIAL,
)
