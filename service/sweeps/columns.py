"""Sweeps as columns: complex numbers, Touchstone text, one frequency axis; checked on the way."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from models.conversion import Units, unit_of
from models.quantity import QUANTITIES
from models.reflection.repeats import Repeated, repeated
from models.relation import Array, ComplexArray, column
from models.units import UNITS
from service.faults import pointer
from service.formats.errors import FormatError
from service.formats.networks import touchstone
from service.formats.networks.options import HERTZ
from service.sweeps.bodies import ComplexColumn, Numbers, OnePortSweep
from service.sweeps.references import References
from service.sweeps.values import Place, complex_of, refuse, refuse_large

MOST_POINTS = 10_001
MOST_REPEATS = 100
SAME = 1e-9


@dataclass(frozen=True, slots=True)
class Axis:
    """A frequency axis and where it stands in the request."""

    hertz: Array
    place: Place


@dataclass(frozen=True, slots=True)
class Sweep:
    """A one-port sweep on the axis of the request."""

    repeats: Repeated
    stated: Array | None
    """Standard uncertainty of each part of one sweep, shape (f,), as stated."""
    count: int

    @property
    def spread(self) -> Array | None:
        """Of the mean: from the scatter where there are several sweeps, else as stated."""
        if self.repeats.spread is not None:
            return self.repeats.spread
        return self.stated


class Axes:
    """What all sweeps of a request share: one axis, of the first that brings one; one impedance."""

    def __init__(self, given: Numbers | None, units: Units, references: References) -> None:
        self.units, self.references = units, references
        self._known: Axis | None = None
        self._common: Axis | None = None
        if given is not None:
            self._common = Axis(self.checked(given, ("frequency",)), ("frequency",))

    @property
    def hertz(self) -> Array:
        """The axis that all sweeps share. Raises Unprocessable where there is none."""
        known = self._known or self._common
        if known is None:
            raise refuse("frequency is missing", ("frequency",))
        return known.hertz

    def checked(self, given: Numbers, place: Place) -> Array:
        """An axis in Hz that rises all along, within what is possible."""
        unit = unit_of("frequency", self.units)
        hertz = unit.to_si(given)
        if not 1 <= hertz.size <= MOST_POINTS:
            raise refuse(f"expected 1 to {MOST_POINTS} frequencies, found {hertz.size}", place)
        return _rising(hertz, unit.code, place)

    def settle(self, own: Axis | None, place: Place) -> Array:
        """The axis of one sweep. Raises Unprocessable where it has another than the others."""
        axis = own or self._common
        if axis is None:
            detail = "frequency is missing: give it here, or once for the whole request"
            raise refuse(detail, (*place, "frequency"))
        if self._known is None:
            self._known = axis
        known = self._known.hertz
        if known.size != axis.hertz.size or np.any(np.abs(axis.hertz - known) > SAME * known):
            first = pointer(self._known.place)
            detail = (
                f"its frequencies are not those of {first}: all sweeps of a calibration are "
                "taken at the same frequencies"
            )
            raise refuse(detail, axis.place)
        return known


def _rising(hertz: Array, code: str, place: Place) -> Array:
    gate = QUANTITIES["frequency"].gate_si
    bad = np.flatnonzero(gate.excludes(hertz))
    if bad.size:
        value = float(hertz[bad[0]])
        meant = QUANTITIES["frequency"].likely_unit(value, code)
        hint = f'; looks like {meant}: send "units": {{"frequency": "{meant}"}}' if meant else ""
        sent = f"{float(UNITS[code].from_si(value)):g} {code}"
        detail = f"expected a frequency in {gate} Hz, found {sent}{hint}"
        raise refuse(detail, (*place, int(bad[0])) if place[-1] == "frequency" else place)
    falls = np.flatnonzero(np.diff(hertz) <= 0)
    if falls.size:
        detail = f"frequency must rise all along; item {int(falls[0]) + 1} does not"
        raise refuse(detail, place)
    return hertz


def one_port(body: OnePortSweep, axes: Axes, common: float | Numbers | None, place: Place) -> Sweep:
    """One sweep with its repeats, on the axis of the request."""
    if (body.reflection is None) == (body.touchstone is None):
        found = "both" if body.reflection is not None else "neither"
        raise refuse(f"expected reflection or touchstone, found {found}", place)
    axis: Axis | None
    growth: Array | float = 1.0
    if body.touchstone is not None:
        axis, sweeps, growth = _files(body, axes.references, (*place, "touchstone"))
    else:
        own = body.frequency
        here = (*place, "frequency")
        axis = None if own is None else Axis(axes.checked(own, here), here)
        sweeps = _columns(body.reflection, (*place, "reflection"))
    hertz = axes.settle(axis, place)
    for n, sweep in enumerate(sweeps):
        if sweep.size != hertz.size:
            many = isinstance(body.reflection, list)
            at = (*place, "reflection", n) if many else (*place, "reflection")
            raise refuse(f"has {sweep.size} values where frequency has {hertz.size}", at)
    own_u = common if body.reflection_u is None else body.reflection_u
    at = ("reflection_u",) if body.reflection_u is None else (*place, "reflection_u")
    stated = spread_of(own_u, hertz.size, at)
    stated = None if stated is None else stated * growth
    return Sweep(repeated(np.stack(sweeps)), stated, len(sweeps))


def spread_of(given: float | Numbers | None, count: int, place: Place) -> Array | None:
    """A standard uncertainty at every frequency; None where none was stated, or it is 0."""
    if given is None:
        return None
    values = column(given)
    if values.ndim and values.size != count:
        raise refuse(f"has {values.size} values where frequency has {count}", place)
    if not np.any(values > 0):
        return None
    if np.any(values <= 0):
        raise refuse("an uncertainty is above 0 at every frequency, or at none", place)
    return np.broadcast_to(values, (count,)).astype(np.float64)


def _files(
    body: OnePortSweep, references: References, place: Place
) -> tuple[Axis, list[ComplexArray], Array]:
    """The axis of a sweep and its repeats, and by how much the noise of one grew in reading."""
    if body.frequency is not None:
        detail = "a Touchstone file brings its frequencies: leave frequency out"
        raise refuse(detail, (*place[:-1], "frequency"))
    texts = [body.touchstone] if isinstance(body.touchstone, str) else list(body.touchstone or ())
    _refuse_count(len(texts), place)
    networks = [network(text, 1, place) for text in texts]
    first = Axis(checked_axis(networks[0], place), place)
    for one in networks[1:]:
        if not np.array_equal(one.frequency, networks[0].frequency):
            raise refuse("repeated sweeps have the same frequencies", place)
    for one in networks:
        refuse_large(one.parameters, place)
    brought = [references.brought(one) for one in networks]
    growth = np.mean([grown for _, grown in brought], axis=0)
    return first, [parameters[:, 0, 0] for parameters, _ in brought], growth


def checked_axis(held: touchstone.Network, place: Place) -> Array:
    """The axis of a file, within what is possible."""
    hertz, gate = held.frequency, QUANTITIES["frequency"].gate_si
    if hertz.size > MOST_POINTS:
        raise refuse(f"expected at most {MOST_POINTS} frequencies, found {hertz.size}", place)
    bad = np.flatnonzero(gate.excludes(hertz))
    if bad.size:
        fitting = [
            unit for unit, scale in HERTZ.items()
            if not gate.excludes(held.as_written * scale).any()
        ]  # fmt: skip
        meant = f"; in {' or '.join(fitting)} all are: change the unit there" if fitting else ""
        detail = (
            f"expected frequencies in {gate} Hz, found {held.as_written[bad[0]]:g} in the unit "
            f"{held.unit} of the option line (line {held.option_line}){meant}"
        )
        raise refuse(detail, place)
    return _rising(hertz, "Hz", place)


def network(text: str, ports: int, place: Place) -> touchstone.Network:
    """A Touchstone file. Raises Unprocessable with the line of what is wrong."""
    try:
        return touchstone.read(text, ports)
    except FormatError as error:
        raise refuse(str(error), place) from None


def _columns(
    given: ComplexColumn | Sequence[ComplexColumn] | None, place: Place
) -> list[ComplexArray]:
    if isinstance(given, ComplexColumn):
        return [complex_of(given, place)]
    columns = list(given or ())
    _refuse_count(len(columns), place)
    return [complex_of(one, (*place, n)) for n, one in enumerate(columns)]


def _refuse_count(count: int, place: Place) -> None:
    if not 1 <= count <= MOST_REPEATS:
        raise refuse(f"expected 1 to {MOST_REPEATS} sweeps, found {count}", place)
