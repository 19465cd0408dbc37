"""What the bodies of all decisions are checked against."""

from typing import Any

from pydantic import TypeAdapter

from service.decisions.in_place.bodies import PLACES
from service.decisions.leaching.bodies import LEACHING
from service.decisions.root_zone.bodies import ROOT_ZONES
from service.decisions.soil_state import SOIL_STATES

BODIES: tuple[TypeAdapter[Any], ...] = (ROOT_ZONES, LEACHING, SOIL_STATES, PLACES)
