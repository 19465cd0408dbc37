"""What more than three standards say about noise, and about one another."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from models.reflection.sweep_flags import MARGIN
from models.reflection.tip.calibration import Calibration, scale
from models.reflection.tip.sample import Sample

USUAL_NOISE = 0.005
"""Reflection that a careful measurement repeats to; worse is no noise."""
NOTHING = 1e-15


@dataclass(frozen=True, slots=True)
class Misfit:
    """Residuals of the standards beyond three, and the noise that follows."""

    known: bool
    """Whether anything at all tells the noise."""
    noise: float
    """Median standard uncertainty of each part of a standard's reflection, as it is used."""
    factor: float
    """What the spread of the calibration is to be multiplied by."""
    value: float
    """Reduced chi-square where noise was stated, else the residual reflection; NaN: no residual."""
    limit: float
    """Of the value, what is not known of the standards' media included."""
    stated: bool

    @property
    def consistent(self) -> bool:
        """Whether the standards agree, as far as more than three of them can tell."""
        return not self.value > self.limit


def judged(calibration: Calibration, samples: Sequence[Sample], *, stated: bool) -> Misfit:
    """Noise of a calibration: as stated, as the residuals show it, as repeats of samples do.

    stated: whether the spread of the calibration is in units of reflection, or relative.

    Stated noise that is far too small for the residuals is widened by their ratio.
    """
    freedom = calibration.degrees_of_freedom
    median = float(np.nanmedian(calibration.spread))
    if freedom <= 0:
        if stated:
            return Misfit(
                known=True, noise=median, factor=1.0, value=np.nan, limit=np.nan, stated=stated
            )
        scatter = [s.scatter for s in samples if np.isfinite(s.scatter)]
        noise = float(np.median(scatter)) if scatter else 0.0
        return Misfit(
            known=bool(scatter), noise=noise, factor=max(noise, NOTHING), value=np.nan,
            limit=np.nan, stated=stated,
        )  # fmt: skip
    reduced = calibration.chi_square / freedom
    media = _of_media(calibration) / freedom
    chance = 1 + MARGIN * np.sqrt(2 / freedom)
    if not stated:
        noise = float(np.sqrt(reduced))
        limit = float(np.sqrt(USUAL_NOISE**2 + MARGIN**2 * media))
        return Misfit(known=True, noise=noise, factor=max(noise, NOTHING), value=noise, limit=limit,
                      stated=stated)  # fmt: skip
    limit = float(chance + MARGIN**2 * media)
    factor = float(np.sqrt(reduced / (1 + media))) if reduced > limit else 1.0
    return Misfit(known=True, noise=median * factor, factor=factor, value=reduced, limit=limit,
                  stated=stated)  # fmt: skip


def _of_media(calibration: Calibration) -> float:
    """Chi-square that one standard uncertainty of everything unknown of the media makes."""
    frequency, aperture = calibration.frequency, calibration.aperture
    unit, terms = scale(frequency, aperture), calibration.fitted.terms
    rows = terms.gradient(calibration.true)
    total = 0.0
    for place, standard in enumerate(calibration.standards):
        if standard.known is None:
            continue
        with np.errstate(all="ignore"):
            relative, slope = aperture.admittance(standard.known.permittivity, frequency)
            turn = 2 * unit * slope / np.square(1 + relative * unit)
            off = terms.slope(calibration.true[place]) * turn
            left = -np.einsum("nft,ft->nf", rows, calibration.fitted.response[:, :, place])
        left[place] += 1.0
        for variation in standard.known.variations:
            weighted = left * off * variation / calibration.spread
            weighted = np.where(np.isfinite(weighted), weighted, 0.0)
            pull = np.real(np.einsum("nfp,nf->p", np.conj(calibration.jacobian), weighted))
            explained = float(pull @ calibration.covariance @ pull)
            total += max(float(np.square(np.abs(weighted)).sum()) - explained, 0.0)
    return total
