"""The caller's own polynomial of at most third degree, refused where it does not increase."""

import numpy as np
from numpy.typing import ArrayLike

from models.errors import Complaint, ParameterError
from models.mixing.empirical.practice import UNFROZEN
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.inverse import increasing_inverse
from models.relation import Array, Citation, Parameter, Range, column, ranges

KEY = "polynomial"
PERMITTIVITY = Range(1.0, 81.0)
"""From air to water: where the polynomial has to increase."""
FAR = 1000.0
"""No permittivity beyond plus or minus this is looked for."""


def to_water_content(
    permittivity: ArrayLike, /, *, constant: ArrayLike, linear: ArrayLike,
    quadratic: ArrayLike = 0.0, cubic: ArrayLike = 0.0,
) -> Array:  # fmt: skip
    """Water content by the caller's calibration.

    permittivity: elementwise, apparent; NaN beyond a turn of the polynomial.
    constant, linear, quadratic, cubic: m3/m3, scalar or one per row.
    Raises ParameterError when no row's polynomial increases over permittivity 1 to 81; where
        only some do, the others are NaN.
    """
    c0, c1, c2, c3 = _increasing(constant, linear, quadratic, cubic)
    lowest, highest = _branch(c1, c2, c3)
    k = column(permittivity)
    return _value(np.where((lowest <= k) & (k <= highest), k, np.nan), c0, c1, c2, c3)


def to_permittivity(
    water_content: ArrayLike, /, *, constant: ArrayLike, linear: ArrayLike,
    quadratic: ArrayLike = 0.0, cubic: ArrayLike = 0.0,
) -> Array:  # fmt: skip
    """Apparent permittivity by the caller's calibration.

    water_content: elementwise, m3/m3; NaN beyond a turn of the polynomial.
    constant, linear, quadratic, cubic: m3/m3, scalar or one per row.
    Raises ParameterError as ``to_water_content`` does.
    """
    c0, c1, c2, c3 = _increasing(constant, linear, quadratic, cubic)
    lowest, highest = _branch(c1, c2, c3)
    return increasing_inverse(lambda k: _value(k, c0, c1, c2, c3), water_content, lowest, highest)


def complaints(
    constant: ArrayLike, linear: ArrayLike, quadratic: ArrayLike = 0.0, cubic: ArrayLike = 0.0
) -> list[Complaint]:
    """What is wrong with coefficients of which no row increases over permittivity 1 to 81.

    constant, linear, quadratic, cubic: m3/m3, scalar or one per row.
    """
    del constant  # shifts the polynomial, and turns nothing
    slope = _least_slope(column(linear), column(quadratic), column(cubic))
    if slope.size == 0 or not np.all(slope <= 0):
        return []
    detail = (
        f"takes coefficients that let water content increase over permittivity {PERMITTIVITY}; "
        f"with these its slope falls to {np.max(slope):.3g}"
    )
    return [Complaint("linear", detail)]


def _increasing(*coefficients: ArrayLike) -> tuple[Array, Array, Array, Array]:
    """The coefficients, NaN where they do not increase."""
    if wrong := complaints(*coefficients):
        raise ParameterError(KEY, wrong)
    c0, c1, c2, c3 = (column(c) for c in coefficients)
    return np.where(_least_slope(c1, c2, c3) > 0, c0, np.nan), c1, c2, c3


@np.errstate(all="ignore")
def _least_slope(c1: Array, c2: Array, c3: Array) -> Array:
    """The least slope on the way from air to water."""
    bend = -c2 / (3 * c3)
    bend = np.where(np.isfinite(bend), bend, PERMITTIVITY.low)
    places = (
        PERMITTIVITY.low,
        np.clip(bend, PERMITTIVITY.low, PERMITTIVITY.high),
        PERMITTIVITY.high,
    )
    return np.minimum.reduce([c1 + k * (2 * c2 + k * 3 * c3) for k in places])


@np.errstate(all="ignore")
def _branch(c1: Array, c2: Array, c3: Array) -> tuple[Array, Array]:
    """The ends of the increasing branch that holds the way from air to water."""
    half = -(c2 + np.copysign(np.sqrt(c2**2 - 3 * c1 * c3), c2))
    turns = np.stack(np.broadcast_arrays(half / (3 * c3), c1 / half))
    lower = np.where((turns < PERMITTIVITY.low) & (turns > -FAR), turns, -FAR)
    upper = np.where((turns > PERMITTIVITY.high) & (turns < FAR), turns, FAR)
    return lower.max(axis=0), upper.min(axis=0)


@np.errstate(over="ignore", invalid="ignore")
def _value(k: Array, c0: Array, c1: Array, c2: Array, c3: Array) -> Array:
    return c0 + k * (c1 + k * (c2 + k * c3))


POLYNOMIAL = MixingModel(
    key=KEY,
    title="The caller's own polynomial in permittivity",
    equation="theta = constant + linear Ka + quadratic Ka^2 + cubic Ka^3",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    fitted_by_caller=True,
    parameters=(
        Parameter(name="constant", meaning="water content where Ka is 0", range=Range(-1.0, 1.0)),
        Parameter(name="linear", meaning="coefficient of Ka", range=Range(-1.0, 1.0)),
        Parameter(
            name="quadratic", meaning="coefficient of Ka^2", range=Range(-0.1, 0.1), default=0.0
        ),
        Parameter(
            name="cubic", meaning="coefficient of Ka^3", range=Range(-0.01, 0.01), default=0.0
        ),
    ),
    discrepancy=Discrepancy(
        standard_uncertainty=0.02,
        reason="a calibration of unknown care; name the standard error of yours to replace it",
    ),
    validity=ranges(
        apparent_permittivity=(PERMITTIVITY.low, PERMITTIVITY.high),
        water_content=(0.0, 1.0),
        temperature=UNFROZEN,
    ),
    source=Citation(
        authors="Topp, G. C.; Davis, J. L.; Annan, A. P.",
        year=1980,
        title="Electromagnetic determination of soil water content: measurements in coaxial "
        "transmission lines",
        where="Water Resources Research 16(3), 574-582",
        equation="the form of eq. 7",
        doi="10.1029/WR016i003p00574",
        note="the form only: the coefficients are the caller's",
    ),
)
