"""Permittivity spectra: relaxation terms, equivalent circuits, views, and the soil behind them."""

from models.spectrum.interpretation import Interpretation, Question, interpret
from models.spectrum.spectrum import Spectrum, spectrum_of

__all__ = ["Interpretation", "Question", "Spectrum", "interpret", "spectrum_of"]
