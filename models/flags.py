"""Every flag a row can carry: its slug, its condition, what it says, and whether a number remains.

A column of flags is a column of uint64, one bit a slug, so that a million rows are flagged by a
few array operations. ``unreadable``, ``missing`` and ``out-of-gate`` name the quantity they are
about: ``missing:temperature``.
"""

from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import NDArray

from models.flagging import Bits, Flag, Flags, any_of
from models.quantity import READING
from models.registry import Registry

__all__ = ["BIT", "FLAGS", "SLUGS", "Flag", "Flags", "slugs_of", "withheld", "without_pore_water"]


FLAGS: Registry[Flag] = Registry(
    "flag",
    Flag(key="unreadable", condition="Text that is no number and no usual word for having none.",
         text="The cell cannot be read as a number.", keeps_number=False, names_quantity=True,
         reason="A guess at what was meant would look like a measurement."),
    Flag(key="missing", condition="The cell is empty, null, or one of NaN, NA, N/A, #N/A, null, "
         "none, INF, -INF, M, -, --, --- in any case.",
         text="The logger gave no value.",
         reason="The row has no number where the chosen model needs the value.",
         keeps_number=True, names_quantity=True),
    Flag(key="out-of-gate", condition="Outside the gate of the quantity; of times, of the rods.",
         text="The value is physically impossible and was not used.",
         reason="Numeric sentinels such as -9999, a broken probe, or a unit that was not named. "
         "The row has no number where the chosen model needs the value.",
         keeps_number=True, names_quantity=True),
    Flag(key="unreadable-row", condition="A CSV row has more or fewer cells than the header, or an "
         "NDJSON line is not a JSON object, or one that says a key twice.",
         text="The row cannot be taken apart into cells.",
         reason="Which cell belongs to which column would be a guess.", keeps_number=False),
    Flag(key="unusable-uncertainty", condition="A column <quantity>_u holds text that is no "
         "number, a number below zero, or one wider than all that is possible.",
         text="An uncertainty cannot be used, and so the value beside it was not.",
         reason="Without it the value would pass for exact; an advisory names the column. The row "
         "has no number where the chosen model needs the value.", keeps_number=True),
    Flag(key="no-permittivity", condition="The row holds none of apparent_permittivity, "
         "real_permittivity, travel_time.",
         text="There is nothing to convert.",
         reason="Water content follows from a permittivity.", keeps_number=False),
    Flag(key="permittivity-above-water", condition="The permittivity exceeds that of water at "
         "the row's temperature (at 0 Cel where none is given) by more than its own coverage "
         "interval.",
         text="The permittivity is higher than that of water.",
         reason="No soil is above water: conduction, a fault, or no permittivity at all.",
         keeps_number=False),
    Flag(key="outside-bounds", condition="The permittivity lies outside the Hashin-Shtrikman "
         "bounds of any water content between dry and saturated, for the stated porosity and "
         "solids with their uncertainties.",
         text="No arrangement of these solids, air and water has this permittivity.",
         reason="Wrong porosity, an air gap along the rods, or conduction that raises the "
         "apparent permittivity.", keeps_number=True),
    Flag(key="outside-model-range", condition="Permittivity, water content, temperature, "
         "frequency or a soil property is outside the range the model's source vouches for.",
         text="Outside the conditions in which the equation was established.",
         reason="The band is widened with the distance in permittivity and frequency, and for "
         "clay and organic matter.", keeps_number=True),
    Flag(key="low-frequency", condition="The frequency is below 0.3 GHz in a soil whose clay "
         "content is above 0.05, or not known, and neither the model's coefficients nor its "
         "standard error are the caller's own.",
         text="At this frequency clay raises the permittivity: the equation reads too wet. The "
         "band reaches further down than up.",
         reason="Published laboratory pairs at 50 MHz in clay: curves made at 0.5 to 1 GHz read "
         "0.07 to 0.17 m3/m3 too wet.", keeps_number=True),
    Flag(key="lossy", condition="Correcting the apparent permittivity for conduction lowers the "
         "water content by more than 0.01 m3/m3.",
         text="Conduction made the soil look wetter than it is; the correction is in the answer "
         "and half of it in the band.",
         reason="Ka = eps'/2 (1 + sqrt(1 + tan^2 delta)): loss raises Ka above eps'.",
         keeps_number=True),
    Flag(key="conduction-not-corrected", condition="The model holds the conduction of the soils it "
         "was made from and takes no other; correcting for the loss of this reading would lower "
         "the water content by more than 0.01 m3/m3.",
         text="Nothing was corrected for the conduction of this reading; half of what it may come "
         "to is in the lower end of the band.",
         reason="How much of the loss such a model already holds is not known: of a soil that "
         "conducts more than its own did it reads too much water.",
         keeps_number=True),
    Flag(key="loss-missing", condition="The model needs the loss of the soil, and the row holds "
         "neither imaginary_permittivity nor bulk_conductivity with a frequency.",
         text="Give imaginary_permittivity or bulk_conductivity for this model.",
         reason="Water content and pore-water conductivity are found together from a complex "
         "permittivity.", keeps_number=False),
    Flag(key="too-lossy", condition="The loss is so large that no real permittivity is left: "
         "eps'' > 2 Ka, or the model has no physical root.",
         text="Too lossy for this model at this frequency.",
         reason="Above this loss the reading no longer holds the water content.",
         keeps_number=False),
    Flag(key="no-solution", condition="The model has no water content for this permittivity.",
         text="The equation has no answer here.",
         reason="The permittivity is outside the domain of the equation.", keeps_number=False),
    Flag(key="no-model-in-range", condition="All models were asked, and none whose declared range "
         "and soil hold this reading answers it.",
         text="No model that holds here answers: each is shown by itself, and none has weight.",
         reason="Each model's own flags say what it lacks or where it ends.", keeps_number=False),
    Flag(key="drier-than-dry", condition="The equation alone gives less than zero, by no more "
         "than the band explains.",
         text="Cannot be told from dry: the most probable value is 0.",
         reason="The band is that of the equation, restricted to what is physically possible.",
         keeps_number=True),
    Flag(key="wetter-than-pores", condition="The equation alone gives more than the porosity.",
         text="Saturated as far as can be told: the value is the porosity, or lies within the "
         "coverage interval of the porosity.",
         reason="Water content cannot exceed the pores; how many there are is itself uncertain.",
         keeps_number=True),
    Flag(key="inconsistent", condition="The equation gives less than zero or more than the "
         "porosity by more than three times its standard uncertainty.",
         text="Reading and soil description cannot both be right.",
         reason="A wrong porosity, an air gap, a sensor out of the ground, or another model's "
         "permittivity.", keeps_number=False),
    Flag(key="band-from-curvature", condition="A first order would put an end of the band wrong by "
         "more than 1.5 per cent of its half-width, or the mixing model is said to be exact.",
         text="The band follows the curve of the equation: inverse first-order reliability.",
         reason="Rows without this flag and without band-from-draws have a first-order band.",
         keeps_number=True),
    Flag(key="band-from-draws", condition="The equation bends so much within its uncertainty, or "
         "leaves its domain, that only draws tell the band.",
         text="The band is that of shared quasi-random draws.",
         reason="The same draws for every row: the same reading always gets the same band.",
         keeps_number=True),
    Flag(key="draws-left-out", condition="More than one in twenty of the draws asked for gave no "
         "water content, or an impossible one, or no conductivity of pore water.",
         text="The band is that of the draws that are left, and reaches to the value.",
         reason="Near the ends of the range part of the stated uncertainty is impossible; much of "
         "it says that reading, soil and model disagree.", keeps_number=True),
    Flag(key="frozen", condition="The temperature is at or below 0 Cel.",
         text="Unfrozen water only: ice is not seen as water.",
         reason="The permittivity of ice is 3.2, that of water 88; salt is driven out of ice into "
         "what is left of the water.", keeps_number=True, keeps_pore_water=False),
    Flag(key="near-freezing", condition="The temperature is above 0 and at most 1 Cel.",
         text="Some of the water may be ice.",
         reason="A probe and its soil are rarely at one temperature.", keeps_number=True),
    Flag(key="too-dry-for-pore-water", condition="The water content is below what the pore-water "
         "model needs for a path: 0.10 for hilhorst-2000, 0.12 for malicki-walczak-1999, its own "
         "threshold for rhoades-1976, 0.05 for the others.",
         text="Too dry to tell the conductivity of the pore water.",
         reason="Water that is not continuous does not conduct as the equation says.",
         keeps_number=True, keeps_pore_water=False),
    Flag(key="offset-too-close", condition="The real permittivity is less than 3 above the offset "
         "of hilhorst-2000.",
         text="The permittivity is too near the offset of the pore-water model.",
         reason="The offset alone leaves half of the answer open.",
         keeps_number=True, keeps_pore_water=False),
    Flag(key="below-surface-conduction", condition="The soil conducts no better than its surfaces "
         "would alone, or the pore water would conduct less than nothing.",
         text="The bulk conductivity leaves nothing for the pore water.",
         reason="Surface conduction estimated too high, a broken conductivity reading, or very "
         "fresh water.", keeps_number=True, keeps_pore_water=False),
    Flag(key="outside-pore-water-range", condition="Water content, bulk conductivity, temperature, "
         "frequency or a soil property is outside the range of the pore-water model.",
         text="Outside the conditions in which the pore-water equation was established.",
         reason="Its stated error need not hold here.", keeps_number=True),
    Flag(key="no-pore-water", condition="The pore-water model has no answer for this row, or lacks "
         "its temperature.",
         text="There is no number for the conductivity of the pore water.",
         reason="Outside the domain of the equation.",
         keeps_number=True, keeps_pore_water=False),
    Flag(key="no-upper-end", condition="Of the errors that are possible, more than the band leaves "
         "out above leave the pore-water model without an end (a permittivity at its offset, water "
         "content at zero), or the end would be above 25 S/m, what saturated brine conducts.",
         text="These readings tell no upper end for pore water or extract: it is empty.",
         reason="Division by what may be zero; a finite end would be made up.", keeps_number=True),
    Flag(key="no-lower-end", condition="Of the errors that are possible, more than the band leaves "
         "out below leave no salt at all: surfaces alone would conduct as the soil does.",
         text="The conductivity of the pore water, or of the extract, cannot be told from none: "
         "the lower end of its band is 0.",
         reason="Surface conduction and bulk conductivity are each known to a width, and differ by "
         "less than both.", keeps_number=True),
    Flag(key="pore-water-from-draws", condition="The chain from the reading to the pore water, or "
         "to the extract, bends so much within its uncertainty that only draws tell the band.",
         text="The band of pore water or extract is that of shared quasi-random draws.",
         reason="In rows without this flag bands are first order where nothing bends, else the "
         "curve of each input, taken together by inverse first-order reliability.",
         keeps_number=True),
    Flag(key="outside-water-range", condition="The temperature or frequency is outside the range "
         "of the water model.",
         text="The permittivity of water is less well known here.",
         reason="Each water model has its own range, Kaatze (1989) from -4.1 to 60 Cel; "
         "outside, it goes on smoothly and counts as known to 2 %.", keeps_number=True),
    Flag(key="no-end-reflection", condition="No rise in the trace stands out from noise and from "
         "its surroundings where the rods may end, its permittivity would be below 1 or above 90, "
         "the trace begins unlike its calibration, or it is that of a short.",
         text="The end of the rods cannot be seen in the trace.",
         reason="Conduction takes it (a whole trace does without), the rods begin elsewhere (give "
         "probe_offset, head, or air and water), or this is no such trace.", keeps_number=False),
    Flag(key="record-too-short", condition="The level still changes by more than 0.002, and by "
         "more than noise, over the last tenth, or will by that much as reflections return.",
         text="The reflection had not settled when the record ended: the conductivity is that of "
         "its end, with what is to come in its uncertainty.",
         reason="Conductivity follows from the level after all reflections have died away: a "
         "record of more than three round trips.", keeps_number=True),
    Flag(key="model-too-simple", condition="The fit leaves a reduced chi-square above 1.5.",
         text="The model does not explain the trace to its noise: the soil relaxes in more ways, "
         "is layered, or the probe is not as described. Uncertainties are widened by the misfit.",
         reason="A wrong model can fit well where it looks and be far off in permittivity.",
         keeps_number=True),
    Flag(key="not-estimated", condition="A stored reading is from a time for which no one soil and "
         "probe are on record, or what is on record does not suffice, or its raw record cannot be "
         "read.",
         text="There is nothing on record by which to estimate this reading.",
         reason="Installations say which soil a probe was in; advisories say what is lacking.",
         keeps_number=False),
    Flag(key="raw-record-flagged", condition="The row's sweep or spectrum has flags of its own.",
         text="The raw record is doubtful: advisories, or remarks of raw_records, name its flags.",
         reason="What is amiss with a sweep shows no more in what is taken from it.",
         keeps_number=True),
)  # fmt: skip

_NAMING = tuple(key for key, flag in FLAGS.items() if flag.names_quantity)
_NAMED = tuple(name for name in READING if name != "time")

SLUGS: tuple[str, ...] = (
    *(f"{key}:{name}" for key in _NAMING for name in _NAMED),
    *(key for key in FLAGS if key not in _NAMING),
)
"""Every slug a row can carry, in the order they are written."""

_BITS = Bits(SLUGS)
BIT: Mapping[str, np.uint64] = _BITS.bit


def slugs_of(mask: int) -> tuple[str, ...]:
    """The slugs of one row's bits."""
    return _BITS.names(mask)


def withheld(flags: Flags) -> NDArray[np.bool_]:
    """Rows that must not have a number, whatever the model could say."""
    return any_of(flags, _WITHHOLD)


def without_pore_water(flags: Flags) -> NDArray[np.bool_]:
    """Rows that must not have a conductivity of their pore water."""
    return any_of(flags, _WITHHOLD | _NO_PORE_WATER)


def _kept_back(keeps: Callable[[Flag], bool]) -> np.uint64:
    return _BITS.those(lambda slug: not keeps(FLAGS[slug.partition(":")[0]]))


_WITHHOLD = _kept_back(lambda flag: flag.keeps_number)
_NO_PORE_WATER = _kept_back(lambda flag: flag.keeps_pore_water)
