"""What can be said of a sweep, frequency by frequency or as a whole, with the number behind it."""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.flagging import Bits, any_of
from models.flags import Flag, Flags
from models.registry import Registry
from models.relation import Array, column

MARGIN = 3.0
"""Standard uncertainties by which a bound must be broken."""


SWEEP_FLAGS: Registry[Flag] = Registry(
    "sweep flag",
    Flag(key="reflection-above-one", condition="The reflection at the reference plane exceeds "
         "1, or more power leaves a two-port than enters it, by more than three standard "
         "uncertainties and 0.02.",
         text="More comes back than went in.",
         reason="Degrees read as radians, a poor calibration, or cables that moved.",
         keeps_number=True),
    Flag(key="negative-loss", condition="The loss is below zero by more than three standard "
         "uncertainties.",
         text="A medium that gives energy is none: the loss has the wrong sign here.",
         reason="Calibration, a standard that is not what it is taken for, or noise that was "
         "not stated.",
         keeps_number=True),
    Flag(key="conjugated", condition="Loss is of the wrong sign as sent and of the right one "
         "after conjugating every reflection.",
         text="The sweeps were written for exp(-j w t): all of them were conjugated, once.",
         reason="Two time conventions are in use; phase falls with frequency in one and rises "
         "in the other.",
         keeps_number=True),
    Flag(key="below-vacuum", condition="The permittivity is below 1 by more than three standard "
         "uncertainties and 0.1.",
         text="Less than the permittivity of nothing: no medium has it.",
         reason="A length in another unit (mm for m), radians read as degrees, a poor "
         "calibration, a record of something else.", keeps_number=False),
    Flag(key="above-water", condition="From 0.1 GHz on the real part exceeds 88, that of water at "
         "0 Cel, by more than three standard uncertainties.",
         text="No soil, and nothing that holds water, has a permittivity above that of water.",
         reason="Standards that were mistaken for one another, a wrong branch or length, or a "
         "sweep of something else.",
         keeps_number=True),
    Flag(key="rises-with-frequency", condition="The real part is higher than at some lower "
         "frequency, by more than three standard uncertainties of both and 10 % of |eps|.",
         text="The real part of what only relaxes and conducts never rises with frequency.",
         reason="Noise that was not stated, a resonance of the cell or cable, standards that "
         "were mistaken for one another, a wrong branch, or a column that is no reflection.",
         keeps_number=True),
    Flag(key="port-not-passive", condition="Directivity or source match, as the standards tell "
         "them, exceed 1 in the median over frequency.",
         text="No cable or connector does what these standards say: two of them are probably "
         "mistaken for one another.",
         reason="What stands between analyser and aperture only loses power; three standards "
         "have no other way of contradicting one another.",
         keeps_number=True),
    Flag(key="standards-too-close", condition="An error of 0.001 in the standards' "
         "reflections changes the permittivity by more than 5 %.",
         text="The standards are too much alike here to tell permittivities apart.",
         reason="At low frequency a tip reads air and water nearly alike; short of that, two "
         "standards are the same.",
         keeps_number=True),
    Flag(key="standards-inconsistent", condition="More than three standards contradict one "
         "another beyond what noise and the stated uncertainties explain.",
         text="One of the standards is not what it is taken for, or the aperture model does "
         "not hold; uncertainties are widened by the misfit.",
         reason="A bad short, another liquid, a wrong temperature, a bubble, a moved cable.",
         keeps_number=True),
    Flag(key="no-root", condition="No permittivity gives this reflection, or only "
         "one above a million.",
         text="The equation has no answer here.",
         reason="The reflection is outside the domain of the model, or two standards are one.",
         keeps_number=False),
    Flag(key="too-uncertain", condition="The relative standard uncertainty exceeds the limit "
         "of the caller.",
         text="Less certain than was asked for.",
         reason="The limit is the caller's own.",
         keeps_number=False),
    Flag(key="outside-standard-range", condition="Frequency or temperature is outside the "
         "range of the source of a standard's permittivity.",
         text="The permittivity of a standard is less well known here.",
         reason="Its equation goes on smoothly; give its permittivity to be sure.",
         keeps_number=True),
    Flag(key="grain-size", condition="The largest grain is more than a fiftieth of the "
         "aperture or of the gap between the conductors.",
         text="Grains are not small beside what the field spans: repeat with the sample "
         "packed anew.",
         reason="Common practice: a mixture is one medium when its parts are at least 50 "
         "times smaller than the transverse dimension.",
         keeps_number=True),
    Flag(key="sample-thickness", condition="A tip's sample is thinner than where what lies "
         "behind it changes the reading by 1 %; a filled line taken as endless is shorter "
         "than 2.3 attenuation lengths; a two-port sample is longer than 4.6 of them.",
         text="The thickness of the sample does not suit its loss, or the aperture.",
         reason="Endless means that less than 1 % comes back from the end; a sample that "
         "passes less than 1 % is measured by its face alone.",
         keeps_number=True),
    Flag(key="electrically-short", condition="The sample is thinner than a hundredth of the "
         "wavelength in it.",
         text="The sample is electrically short: reflection errors weigh more here.",
         reason="What a wave does on the way through is not much more than the noise.",
         keeps_number=True),
    Flag(key="half-wave", condition="The sample reflects less than 0.05 where it is a whole "
         "number of half wavelengths long.",
         text="Reflection vanishes here: permittivity and permeability cannot be told apart.",
         reason="Only their product is seen in what passes; with a permeability of 1 it is "
         "enough.",
         keeps_number=True),
    Flag(key="air-gap", condition="An air gap of 10 um, or of what was stated, changes the "
         "real part by more than 1 %.",
         text="An air gap matters: press the sample on, or take fluid ones.",
         reason="A tip sees first what touches it; a gap along a conductor is in series with "
         "the sample.",
         keeps_number=True),
    Flag(key="branch-uncertain", condition="The number of whole wavelengths in the sample "
         "does not follow from the sweep: steps in frequency are too long, or its first "
         "point is too high.",
         text="The phase may be a whole turn off.",
         reason="Phase repeats; give a guess of the permittivity, or sweep from lower down.",
         keeps_number=True),
    Flag(key="magnetic", condition="The permeability differs from 1 by more than three "
         "standard uncertainties and 0.05 in the middle of the band.",
         text="What was read contradicts a permeability of 1: the sample is magnetic, or its "
         "length, its position or an end of the cell is not as described.",
         reason="Iron oxides; a sample of another length looks just like that: two reads tell "
         "two numbers of it.",
         keeps_number=True),
    Flag(key="permeability-below-one", condition="The real part of the permeability is below 1 by "
         "more than three standard uncertainties and 0.2 in the middle of the band.",
         text="No soil has a permeability so far below 1: check the length of the sample.",
         reason="A length that is too long halves both constants alike; what is left of the "
         "permittivity is no measurement.", keeps_number=False),
    Flag(key="not-shorted", condition="The cell that is called shorted reflects like an "
         "open end or a capacitance, by more than three standard uncertainties and 0.05, where "
         "even one full of water is shorter than a sixth of a wavelength.",
         text="The shorted cell reads like an open one: check which end was on.",
         reason="A short behind a short stretch of anything is an inductance.",
         keeps_number=True),
    Flag(key="not-symmetric", condition="S11 and S22 at the faces of the sample differ by more "
         "than three standard uncertainties and 0.02 in the root mean square; by 0.05 where none "
         "was stated.",
         text="The two reflections contradict the position of the sample, or its symmetry.",
         reason="air_before or holder_length as of another set-up, planes that are not at the "
         "faces, a sample that is packed unevenly.", keeps_number=True),
    Flag(key="not-reciprocal", condition="S21 and S12 differ by more than three standard "
         "uncertainties and 0.02 in the root mean square; by 0.05 where none was stated.",
         text="What passes one way is not what passes the other way.",
         reason="No soil does that: a calibration of one direction alone, columns of another "
         "order, a cable that moved.", keeps_number=True),
)  # fmt: skip

_BITS = Bits(SWEEP_FLAGS)
BIT: Mapping[str, np.uint64] = _BITS.bit
_WITHHOLD = _BITS.those(lambda key: not SWEEP_FLAGS[key].keeps_number)


@dataclass(frozen=True, slots=True)
class Finding:
    """One check of practice: the number that was found beside the one that is looked for."""

    key: str
    """Of the flag that it raises when it does not hold."""
    holds: bool
    value: float
    limit: float
    unit: str
    about: str
    """What the number is, in words."""
    frequencies: tuple[float, float] | None = None
    """Hz, between which it does not hold; None: everywhere, or nowhere."""


def at_most(
    key: str,
    about: str,
    values: ArrayLike,
    limit: float,
    frequency: Array | None = None,
    *,
    unit: str = "1",
) -> Finding:
    """The largest of the values beside what it should not exceed, and where it does."""
    found = np.atleast_1d(column(values))
    known = found[~np.isnan(found)]
    worst = float(known.max()) if known.size else float("nan")
    bad = found > limit
    where = None if frequency is None else between(frequency, bad)
    return Finding(key, not bad.any(), worst, limit, unit, about, where)


def at_least(
    key: str,
    about: str,
    values: ArrayLike,
    limit: float,
    frequency: Array | None = None,
    *,
    unit: str = "1",
) -> Finding:
    """The smallest of the values beside what it should not fall below, and where it does."""
    found = at_most(key, about, -column(values), -limit, frequency, unit=unit)
    return replace(found, value=-found.value, limit=limit)


def raised(flags: Flags, where: NDArray[np.bool_], key: str) -> None:
    """Set a flag, in place, where it applies."""
    flags[where] |= BIT[key]


def keys_of(mask: int) -> tuple[str, ...]:
    """The flags of one frequency's bits."""
    return _BITS.names(mask)


def withheld(flags: Flags) -> NDArray[np.bool_]:
    """Frequencies that must not have a number."""
    return any_of(flags, _WITHHOLD)


def between(frequency: Array, where: NDArray[np.bool_]) -> tuple[float, float] | None:
    """Lowest and highest frequency of those that are marked."""
    marked = frequency[where]
    return (float(marked.min()), float(marked.max())) if marked.size else None
