"""From the words of a request about S-parameters to what a two-port cell is asked."""

from collections.abc import Mapping

from models.conversion import refuse_units
from models.reflection.two_port.estimate import Parameters, TwoPortQuery
from models.relation import ComplexArray
from service.schemas.lengths import too_long
from service.sweeps.bodies import ScatteringBody, TwoPortSweep
from service.sweeps.columns import Axes, Axis, checked_axis, network, spread_of
from service.sweeps.values import Place, complex_of, refuse, refuse_large

LONGEST: Mapping[str, float] = {"sample_length": 1.0, "holder_length": 5.0, "air_before": 5.0}
"""m, beyond which a length was written in another unit."""
NAMES = ("s11", "s21", "s12", "s22")
PARTNERS = {"s12": "s21", "s22": "s11"}
"""What stands in for an S-parameter that was not measured: samples are symmetric."""


def two_port_question(body: ScatteringBody) -> TwoPortQuery:
    """What is asked. Raises ModelError with the place of each complaint."""
    refuse_units(body.units)
    axes = Axes(body.frequency, body.units)
    parameters = _parameters(body.sample, axes)
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
    return TwoPortQuery(
        frequency=axes.hertz,
        parameters=parameters,
        both_ways=body.sample.touchstone is not None
        or not (body.sample.s12 is None or body.sample.s22 is None),
        spread=spread_of(given, size, at),
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


def _parameters(body: TwoPortSweep, axes: Axes) -> Parameters:
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
    return _from_columns(body, axes)


def _from_file(text: str, axes: Axes) -> Parameters:
    place: Place = ("sample", "touchstone")
    held = network(text, 2, place)
    axes.settle(Axis(checked_axis(held, place), place), ("sample",))
    s = held.parameters
    refuse_large(s, place)
    return s[:, 0, 0], s[:, 1, 0], s[:, 0, 1], s[:, 1, 1]


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
