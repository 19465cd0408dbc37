"""Routes of decisions: one module a resource."""

from service.routes.decisions.in_place_density import router as in_place_density
from service.routes.decisions.leaching import router as leaching
from service.routes.decisions.root_zone import router as root_zone
from service.routes.decisions.soil_state import router as soil_state

routers = (root_zone, leaching, soil_state, in_place_density)
