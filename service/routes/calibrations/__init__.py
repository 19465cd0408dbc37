"""Routes of calibrations."""

from service.routes.calibrations.calibrations import router

__all__ = ["router"]
