"""A soil's own curve from pairs of permittivity and water content, for use as its mixing model."""

from models.calibration.calibration import Band, Calibration, calibrate
from models.calibration.choice import Candidate, better_form, choose_form
from models.calibration.forms import FORMS, Form
from models.calibration.pairs import Pairs, Shared
from models.calibration.practice import advice_of, largest_residual
from models.calibration.reuse import Reuse, reuse

__all__ = [
    "FORMS",
    "Band",
    "Calibration",
    "Candidate",
    "Form",
    "Pairs",
    "Reuse",
    "Shared",
    "advice_of",
    "better_form",
    "calibrate",
    "choose_form",
    "largest_residual",
    "reuse",
]
