"""From the words of a request about S-parameters to what a two-port cell is asked."""

from collections.abc import Mapping

import numpy as np

from models.advisories import Advice
from models.conversion import refuse_units
from models.reflection.two_port.estimate import Parameters, TwoPortQuery
from models.relation import Array, ComplexArray
from service.schemas.lengths import too_long
from service.sweeps.bodies import ScatteringBody, TwoPortSweep
from service.sweeps.columns import Axes, Axis, checked_axis, network, spread_of
from service.sweeps.phases import refuse_fast, suspicion
from service.sweeps.references import References
from service.sweeps.values import Place, complex_of, refuse, refuse_large

LONGEST: Mapping[str, float] = {"sample_length": 1.0, "holder_length": 5.0, "air_before": 5.0}
"""m, beyond which a length was written in another unit."""
NAMES = ("s11", "s21", "s12", "s22")
PARTNERS = {"s12": "s21", "s22": "s11"}
"""What stands in for an S-parameter that was not measured: samples are symmetric."""


def two_port_question(body: ScatteringBody) -> tuple[TwoPortQuery, tuple[Advice, ...]]:
    """What is asked, and what is to be said of how it was sent.

    Raises ModelError with the place of each complaint.
    """
    refuse_units(body.units)
    axes = Axes(body.frequency, body.units, References(body.line.impedance))
    parameters, growth = _parameters(body.sample, axes)
    if not parameters[1].any():
        detail = (
            "every s21 is 0: nothing passed through the sample; expected a sweep with both ports "
            "connected, through a sample short enough to let some of it through"
        )
        raise refuse(detail, ("sample", "s21" if body.sample.touchstone is None else "touchstone"))
    size = axes.hertz.size
    own = body.sample.reflection_u
    at: Place = ("reflection_u",) if own is None else ("sample", "reflection_u")
    given = body.reflection_u if own is None else own
    line = body.line
    _refuse_lengths(body)
    said = (*axes.references.advice, *_phases(body, axes))
    spread = spread_of(given, size, at)
    query = TwoPortQuery(
        frequency=axes.hertz,
        parameters=parameters,
        both_ways=body.sample.touchstone is not None
        or not (body.sample.s12 is None or body.sample.s22 is None),
        spread=None if spread is None else spread * growth,
        length=line.sample_length,
        length_u=line.sample_length_u or 0.0,
        holder=line.holder_length,
        holder_u=line.holder_length_u or 0.0,
        before=line.air_before,
        method=body.method,
        guess=None if line.guess is None else complex(line.guess),
        grain_size=body.sample.grain_size,
        gap_width=line.gap_width,
        largest_relative_uncertainty=body.largest_relative_uncertainty,
    )
    return query, said


def _phases(body: ScatteringBody, axes: Axes) -> tuple[Advice, ...]:
    """An advisory where phases may be radians. Raises Unprocessable where they must be."""
    through = body.sample.s21
    if through is not None:
        length = body.line.holder_length or body.line.sample_length
        refuse_fast(through, axes.hertz, length, ("sample", "s21"))
    sent = [getattr(body.sample, name) for name in NAMES]
    return suspicion([one for one in sent if one is not None])


def _parameters(body: TwoPortSweep, axes: Axes) -> tuple[Parameters, Array]:
    """S-parameters, and by how much their noise grew in reading, shape (f,)."""
    sent = [name for name in NAMES if getattr(body, name) is not None]
    if body.touchstone is not None:
        extra = [*sent, *(["frequency"] if body.frequency is not None else [])]
        if extra:
            detail = f"a Touchstone file brings {extra[0]}: leave it out"
            raise refuse(detail, ("sample", extra[0]))
        return _from_file(body.touchstone, axes)
    for name in ("s11", "s21"):
        if name not in sent:
            raise refuse(f"{name} is missing: give s11 and s21, or touchstone", ("sample", name))
    columns = _from_columns(body, axes)
    return columns, np.ones(axes.hertz.size)


def _from_file(text: str, axes: Axes) -> tuple[Parameters, Array]:
    place: Place = ("sample", "touchstone")
    held = network(text, 2, place)
    axes.settle(Axis(checked_axis(held, place), place), ("sample",))
    refuse_large(held.parameters, place)
    s, growth = axes.references.brought(held)
    return (s[:, 0, 0], s[:, 1, 0], s[:, 0, 1], s[:, 1, 1]), growth


def _from_columns(body: TwoPortSweep, axes: Axes) -> Parameters:
    here: Place = ("sample", "frequency")
    axis = None if body.frequency is None else Axis(axes.checked(body.frequency, here), here)
    hertz = axes.settle(axis, ("sample",))
    columns: dict[str, ComplexArray] = {}
    for name in NAMES:
        column = getattr(body, name)
        if column is None:
            columns[name] = columns[PARTNERS[name]]
            continue
        columns[name] = complex_of(column, ("sample", name))
        if columns[name].size != hertz.size:
            detail = f"has {columns[name].size} values where frequency has {hertz.size}"
            raise refuse(detail, ("sample", name))
    return columns["s11"], columns["s21"], columns["s12"], columns["s22"]


def _refuse_lengths(body: ScatteringBody) -> None:
    """Lengths in metres, a sample no longer than its holder."""
    line = body.line
    for name, most in LONGEST.items():
        if detail := too_long(getattr(line, name), most):
            raise refuse(detail, ("line", name))
    if line.holder_length is None:
        if line.air_before is not None:
            raise refuse("air_before needs holder_length", ("line", "holder_length"))
        return
    if line.holder_length < line.sample_length:
        raise refuse("the holder is shorter than the sample", ("line", "holder_length"))
    air = line.holder_length - line.sample_length
    if line.air_before is not None and line.air_before > air * (1 + 1e-9):
        detail = f"holder and sample leave {air:g} m of air, found {line.air_before:g} before it"
        raise refuse(detail, ("line", "air_before"))
    if body.sample.touchstone is None and body.sample.s22 is None and line.air_before is None:
        detail = "the position of the sample follows from s11 and s22: give s22, or air_before"
        raise refuse(detail, ("sample", "s22"))
