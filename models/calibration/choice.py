"""Which form the pairs ask for: the corrected criterion of Akaike (Hurvich and Tsai, 1989).

The formula is from memory.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from models.calibration.calibration import Calibration, calibrate
from models.calibration.forms import FORMS
from models.calibration.pairs import Pairs, lacking, refuse, refuse_form
from models.errors import ParameterError

ENOUGH = 2.0
"""Difference of the criterion below which the form with fewer coefficients is taken."""

CLEARLY = 10.0
"""Difference of the criterion that leaves the worse form next to no support."""


@dataclass(frozen=True, slots=True, eq=False)
class Candidate:
    """A form that could be fitted."""

    calibration: Calibration
    criterion: float
    """Smaller is better; infinite where there are too few pairs to tell."""
    unusable: str
    """Why a mixing model does not take its coefficients; empty: it does."""


def choose_form(pairs: Pairs) -> tuple[Candidate, Sequence[Candidate]]:
    """The form that is taken, and all that could be fitted.

    Of the forms that a mixing model takes, that with the fewest coefficients within ENOUGH of the
    smallest criterion; where none is taken, of all of them.
    Raises ParameterError where the pairs tell not even a line.
    """
    refuse(pairs)
    refuse_form(pairs, FORMS["square-root"])
    candidates = []
    for form in FORMS.values():
        if lacking(pairs, form) or pairs.levels <= form.size:
            continue
        try:
            found = calibrate(pairs, form)
        except ParameterError:
            continue  # a form that does not settle is none of those to choose from
        candidates.append(Candidate(found, criterion(found), form.unusable(found.coefficients)))
    if not candidates:
        found = calibrate(pairs, FORMS["square-root"])
        alone = Candidate(found, criterion(found), found.form.unusable(found.coefficients))
        return alone, [alone]
    usable = [one for one in candidates if not one.unusable] or candidates
    best = min(one.criterion for one in usable)
    near = [one for one in usable if one.criterion <= best + ENOUGH]
    return min(near, key=lambda one: (one.calibration.form.size, one.criterion)), candidates


def better_form(found: Calibration) -> Calibration | None:
    """The form that the pairs would have chosen, where they speak clearly against this one."""
    chosen, _ = choose_form(found.pairs)
    if criterion(found) - chosen.criterion > CLEARLY and not chosen.unusable:
        return chosen.calibration
    return None


def criterion(found: Calibration) -> float:
    """Of residuals with their stated ratios and an open variance; infinite for too few pairs."""
    n, parameters = found.pairs.count, found.form.size + 1
    if n - parameters - 1 <= 0:
        return float("inf")
    squares = max(found.scatter.chi_square, 1e-12 * n)
    fitted = n * np.log(squares / n) - float(np.sum(np.log(found.fit.weights)))
    return float(fitted + 2.0 * parameters * n / (n - parameters - 1))
