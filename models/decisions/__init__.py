"""Decisions: what is done with an estimate; numbers with bands, never verdicts."""

from models.decisions.crops import CROPS, Crop
from models.decisions.in_place_density import InPlace, OneStep, one_step, two_step
from models.decisions.leaching import Leaching, applied_water, require_leaching
from models.decisions.outcome import Known, Outcome
from models.decisions.root_zone import Depletion, RootZone, deplete
from models.decisions.soil_state import SoilState, soil_state
from models.decisions.yield_response import relative_yield

__all__ = [
    "CROPS",
    "Crop",
    "Depletion",
    "InPlace",
    "Known",
    "Leaching",
    "OneStep",
    "Outcome",
    "RootZone",
    "SoilState",
    "applied_water",
    "deplete",
    "one_step",
    "relative_yield",
    "require_leaching",
    "soil_state",
    "two_step",
]
