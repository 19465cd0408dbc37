"""What can be said about a spectrum and its interpretation, each with the number behind it."""

from dataclasses import dataclass

import numpy as np

from models.flags import Flag
from models.registry import Registry
from models.relation import Array
from models.spectrum.choice import CLOSE, Choice
from models.spectrum.doubts import doubts
from models.spectrum.fit import Fit
from models.spectrum.spectrum import Spectrum

SPECTRUM_FLAGS: Registry[Flag] = Registry(
    "flag",
    Flag(key="loss-below-zero", condition="Single points of a spectrum have a loss below zero.",
         text="Some points have a loss below zero; they were kept as noise.",
         reason="Noise about a small loss falls on both sides of zero; cutting it off would make a "
         "loss of it.", keeps_number=True),
    Flag(key="term-not-resolved", condition="The strength or time of a relaxation is known to no "
         "better than 30 %, it is tied to another parameter by a correlation above 0.995, or two "
         "relaxation times are within a factor of 3.",
         text="The spectrum does not tell this term from others.",
         reason="Its numbers describe the curve together with the others, not a process of its "
         "own.", keeps_number=True),
    Flag(key="term-outside-band", condition="A relaxation frequency lies outside the band.",
         text="The term relaxes outside the band.",
         reason="Its numbers are those of a tail, and rest on the kind of the term.",
         keeps_number=True),
    Flag(key="conduction-not-resolved", condition="The conductivity is known to no better than "
         "30 %.", text="The conductivity cannot be told from zero, or from a slow relaxation.",
         reason="Conduction is told from a relaxation only well below all relaxation frequencies.",
         keeps_number=True),
    Flag(key="infinite-permittivity-not-resolved", condition="The permittivity above all "
         "relaxations is known to no better than 30 %.",
         text="The band ends below the fastest relaxation.",
         reason="The part of its strength beyond the band cannot be seen.", keeps_number=True),
    Flag(key="electrode-polarisation", condition="The form holds polarised electrodes.",
         text="At its lower end the spectrum is about the electrodes as well; the terms are those "
         "behind them.", reason="Charge in front of blocking electrodes looks like a huge slow "
         "relaxation.", keeps_number=True),
    Flag(key="forms-alike", condition="Another form is within 2 of the chosen one in AICc.",
         text="Several forms describe the spectrum about equally well.",
         reason="What they disagree about is in the band of the curve, not in that of the "
         "parameters.", keeps_number=True),
    Flag(key="residuals-above-noise", condition="The reduced chi-square is above 1 by more than "
         "four of its standard deviations.",
         text="The form does not describe the spectrum to within the stated noise.",
         reason="Too simple a form, or a noise stated too small: the uncertainties are widened by "
         "the root of the reduced chi-square.", keeps_number=True),
    Flag(key="residuals-not-random", condition="Neighbouring residuals are correlated beyond four "
         "standard deviations.",
         text="What the form leaves over is no noise: neighbouring points are off the same way.",
         reason="Too simple a form, or points that were smoothed before they came: bands are too "
         "narrow then.", keeps_number=True),
    Flag(key="bound-water-not-resolved", condition="Bound water is less than two of its standard "
         "uncertainties from the fit.",
         text="The band does not tell bound water from none.",
         reason="Bound water shows between the relaxations of interfaces and of free water; the "
         "band may not reach there.", keeps_number=True),
    Flag(key="mixing-model-misfit", condition="The best soil leaves more than twice the "
         "residuals of the relaxation terms, and more than 0.1 % of |eps|.",
         text="The mixing model does not describe the whole band.",
         reason="What it leaves over went into whatever parameter could take it; water content "
         "leans on the upper end of the band.", keeps_number=True),
)  # fmt: skip

OF_CURVE = frozenset({
    "conjugated", "loss-below-zero", "electrode-polarisation", "residuals-above-noise",
    "residuals-not-random",
})  # fmt: skip
"""Flags that bear on the fitted curve; the others are about its terms, or stand in its band."""
RUNS = 4.0
"""Standard deviations of a correlation of neighbours beyond which residuals are no noise."""
ALIKE = 2.0


@dataclass(frozen=True, slots=True)
class Finding:
    """One flag, and the sentence with its number."""

    flag: str
    text: str


def of_spectrum(spectrum: Spectrum) -> list[Finding]:
    """What the points themselves show."""
    found = []
    count = len(spectrum.frequency)
    if spectrum.conjugated:
        text = "Most of the loss came below zero: every point was conjugated, once"
        found.append(Finding("conjugated", text))
    negative = int(np.count_nonzero(spectrum.permittivity.imag > 0))
    if negative:
        text = f"{negative} of {count} points have a loss below zero"
        found.append(Finding("loss-below-zero", text))
    return found


def of_fit(fit: Fit) -> list[Finding]:
    """What a fit resolves, and whether it suits."""
    found = []
    for doubt in doubts(fit):
        whose = (
            "" if doubt.term is None else f"Term {doubt.term + 1} ({fit.form.terms[doubt.term]}): "
        )
        found.append(Finding(doubt.flag, f"{whose}{doubt.reason}"))
    if fit.form.electrode:
        share = float(np.abs(fit.vector[fit.form.place("electrode_exponent")]))
        text = (
            f"Polarised electrodes are in the form, a constant phase element with 1 - {share:.3g}"
        )
        found.append(Finding("electrode-polarisation", text))
    if fit.misfit:
        text = f"The reduced chi-square is {fit.reduced_chi_square:.3g} at the stated noise"
        found.append(Finding("residuals-above-noise", text))
    tied = neighbours(fit.residuals)
    if fit.relative_residual > 1e-5 and tied > RUNS:
        text = f"Neighbouring residuals are correlated, {tied:.1f} standard deviations above chance"
        found.append(Finding("residuals-not-random", text))
    return found


def of_choice(choice: Choice) -> list[Finding]:
    """Whether other forms would do as well."""
    chosen = choice.fit.form
    own = next((o.difference for o in choice.alternatives if o.fit.form == chosen), 0.0)
    others = [o.fit.form.title for o in choice.alternatives
              if abs(o.difference - own) <= ALIKE and o.fit.form != chosen]  # fmt: skip
    if not others:
        return []
    text = (
        f"{chosen.title} was chosen as the simplest form within {CLOSE:g} of the smallest AICc; "
        f"within {ALIKE:g} of it are {', '.join(others)}"
    )
    return [Finding("forms-alike", text)]


def neighbours(residuals: Array) -> float:
    """Correlation of neighbouring residuals, in standard deviations of that of pure noise.

    residuals: shape (2, n), both parts.
    """
    count = residuals.shape[1]
    if count < 8:
        return 0.0
    ratios = [float(np.sum(part[1:] * part[:-1]) / max(np.sum(part * part), 1e-300))
              for part in residuals]  # fmt: skip
    return max(ratios) * float(np.sqrt(count))
