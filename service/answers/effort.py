"""What one request may cost: draws and validations are refused before they begin, never cut off."""

from models.estimate.beside.validation import DRAWS, MOST_ROWS
from models.mixing import MIXING_MODELS
from service.errors import Unprocessable
from service.faults import Fault
from service.schemas.estimates import ALL, EstimatesSettings, model_name


def refuse_effort(settings: EstimatesSettings, readings: int, drawn_values: int) -> None:
    """Refuse more draws than one request may have.

    readings: how many there are, or have come so far.
    drawn_values: the limit on draws times readings times models.
    Raises Unprocessable, which names what would be accepted.
    """
    asked = settings.propagation
    if asked.method == "monte-carlo":
        models = len(MIXING_MODELS) if model_name(settings) == ALL else 1
        most = drawn_values // (readings * models)
        if asked.draws > most:
            detail = (
                f"{asked.draws} draws of {readings} readings"
                f"{f' by {models} models' if models > 1 else ''} are more than the {drawn_values} "
                f"drawn values one request may have; ask for at most {most} draws, for fewer "
                "readings at a time, or for first-order, whose bands are the equation's own "
                "quantiles where it bends"
            )
            raise Unprocessable(detail, [Fault(detail, "#/propagation/draws")])
    if settings.validate_first_order and readings > MOST_ROWS:
        detail = (
            f"validate draws {DRAWS} times for each reading and takes at most {MOST_ROWS} "
            f"readings, found {readings}: send some that stand for all"
        )
        raise Unprocessable(detail, [Fault(detail, "#/validate")])
