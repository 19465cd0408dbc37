"""Electrical conductivity of water: temperature, dissolved salt, and the loss it makes."""

from models.conductivity.corwin_lesch_2005 import CORWIN_LESCH_2005
from models.conductivity.family import TemperatureCompensation
from models.conductivity.iso_7888 import ISO_7888
from models.conductivity.linear import LINEAR
from models.registry import Registry

TEMPERATURE_COMPENSATIONS: Registry[TemperatureCompensation] = Registry(
    "temperature compensation", CORWIN_LESCH_2005, ISO_7888, LINEAR
)
DEFAULT_COMPENSATION = CORWIN_LESCH_2005.key
