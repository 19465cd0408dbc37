"""Permittivity of water and of ice; ``WATER_MODELS`` holds every model of liquid water."""

from models.registry import Registry
from models.water.family import WaterModel
from models.water.iapws_1997 import IAPWS_1997
from models.water.kaatze_1989 import KAATZE_1989
from models.water.meissner_wentz_2012 import MEISSNER_WENTZ_2012
from models.water.peyman_2007 import PEYMAN_2007
from models.water.stogryn_1971 import STOGRYN_1971
from models.water.turner_kneifel_cadeddu_2016 import TURNER_KNEIFEL_CADEDDU_2016
from models.water.wyman_ingalls_1938 import WYMAN_INGALLS_1938

WATER_MODELS: Registry[WaterModel] = Registry(
    "water model",
    PEYMAN_2007,
    KAATZE_1989,
    TURNER_KNEIFEL_CADEDDU_2016,
    MEISSNER_WENTZ_2012,
    IAPWS_1997,
    WYMAN_INGALLS_1938,
    STOGRYN_1971,
)
DEFAULT_WATER = PEYMAN_2007.key
