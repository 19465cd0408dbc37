"""A calibration as the mixing_model of POST /v1/estimates."""

from typing import Any

from models.advisories import Advice
from models.calibration import Calibration, reuse
from models.calibration.advisories import advise


def usable(found: Calibration, probability: float) -> tuple[dict[str, Any] | None, list[Advice]]:
    """The object to send as mixing_model, None where estimates would not take it; what to know."""
    told = reuse(found, probability)
    if told.unusable:
        return None, [advise("calibration-unusable", why=told.unusable)]
    said = advise(
        "calibration-standard-error",
        least=f"{told.least:.3g}",
        most=f"{told.most:.3g}",
        off=f"{told.off:.1%}".removesuffix("%"),
        probability=f"{probability:g}",
    )
    return {"name": found.form.model.key, **told.parameters}, [said]
