"""Dielectric mixing models: water content and permittivity, each from the other."""

from models.mixing.empirical import EMPIRICAL
from models.mixing.family import MixingModel
from models.mixing.physical import PHYSICAL
from models.registry import Registry

MIXING_MODELS: Registry[MixingModel] = Registry("mixing model", *EMPIRICAL, *PHYSICAL)
