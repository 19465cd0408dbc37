"""From the words of a request about reflections to what a tip, a line or a cell is asked."""

from collections.abc import Mapping
from typing import Any

import numpy as np
from pydantic import TypeAdapter, ValidationError

from models.conversion import refuse_units
from models.reflection.line.cell import ENDS
from models.reflection.line.estimate import IDEAL, LineQuery, Read
from models.reflection.line.gaps import CoaxialGap
from models.reflection.tip.aperture import MODELS, Geometry, Model
from models.reflection.tip.calibration import Standard
from models.reflection.tip.estimate import TipQuery
from models.reflection.tip.sample import Sample
from models.relation import Array
from service.errors import Unprocessable
from service.faults import hint, problems_of
from service.sweeps.bodies import ReflectionsBody, SampleBody, StandardBody
from service.sweeps.columns import Axes, Place, Sweep, one_port, refuse
from service.sweeps.media import known_of

LONGEST_RADIUS, LONGEST_LENGTH = 0.05, 20.0
"""m, beyond which a length was written in another unit."""
MOST_SAMPLES = 200
ALIASES: Mapping[str, str] = {"open": "air"}
"""Before a tip an open end is the tip in air."""


def body_of(document: Mapping[str, Any], adapter: TypeAdapter[Any]) -> Any:
    """The checked body of a request. Raises Unprocessable with a pointer to every fault."""
    try:
        return adapter.validate_python(document)
    except ValidationError as error:
        faults = problems_of(error, document, adapter)
        raise Unprocessable("the request holds what cannot be used", faults) from None


def samples_of(body: ReflectionsBody) -> list[SampleBody]:
    """The samples of a request, however many were sent."""
    return body.sample if isinstance(body.sample, list) else [body.sample]


def tip_question(body: ReflectionsBody) -> TipQuery:
    """What is asked of a tip. Raises ModelError with the place of each complaint."""
    axes, bodies = _start(body)
    _refuse_twice(body.standards, tip=True)
    if len(body.standards) < 3:
        detail = f"a tip needs three standards or more, found {len(body.standards)}"
        raise refuse(detail, ("standards",))
    many = isinstance(body.sample, list)
    read = []
    for n, sample in enumerate(bodies):
        at: Place = ("sample", n) if many else ("sample",)
        _refuse_ends(sample, at)
        read.append((sample, at, one_port(sample, axes, body.reflection_u, at)))
    sweeps = [
        one_port(standard, axes, body.reflection_u, ("standards", n))
        for n, standard in enumerate(body.standards)
    ]
    geometry = _geometry(body)
    standards = tuple(
        _tip_standard(standard, sweep, axes, geometry, n)
        for n, (standard, sweep) in enumerate(zip(body.standards, sweeps, strict=True))
    )
    return TipQuery(
        frequency=axes.hertz,
        standards=standards,
        standard_spread=_spreads(sweeps),
        samples=tuple(_tip_sample(*item, geometry) for item in read),
        model=_model(body, geometry, len(standards)),
        geometry=geometry,
        largest_relative_uncertainty=body.largest_relative_uncertainty,
    )


def _spreads(sweeps: list[Sweep]) -> Array | None:
    """Of all standards; None where nothing tells it of any.

    A standard that was read once among others that were repeated is as noisy as one of theirs.
    """
    spreads = [sweep.spread for sweep in sweeps]
    known = [spread for spread in spreads if spread is not None]
    if not known:
        return None
    if len(known) < len(spreads) and any(sweep.stated is not None for sweep in sweeps):
        detail = "state reflection_u of this standard too, once for all, or of none"
        raise refuse(detail, ("standards", spreads.index(None), "reflection_u"))
    single = np.nanmedian([sweep.repeats.scatter for sweep in sweeps])
    size = known[0].size
    return np.stack([np.full(size, single) if row is None else row for row in spreads])


def line_question(body: ReflectionsBody) -> LineQuery:
    """What is asked of a filled line or a cell. Raises ModelError with each complaint's place."""
    axes, bodies = _start(body)
    if isinstance(body.sample, list):
        raise refuse("a line or a cell takes one sample at a time", ("sample",))
    (sample,) = bodies
    _refuse_twice(body.standards, tip=False)
    reads = _line_reads(body, sample, axes)
    standards = {}
    for n, standard in enumerate(body.standards):
        if standard.name not in IDEAL:
            detail = f"a line takes {', '.join(IDEAL)} as standards, found {standard.name!r}"
            raise refuse(detail, ("standards", n, "name"))
        sweep = one_port(standard, axes, body.reflection_u, ("standards", n))
        standards[standard.name] = _line_read(sweep)
    if standards and len(standards) < len(IDEAL):
        missing = ", ".join(name for name in IDEAL if name not in standards)
        raise refuse(f"{missing} is missing: give short, open and load, or none", ("standards",))
    line = body.line
    gaps = line.air_gaps
    return LineQuery(
        frequency=axes.hertz,
        reads=reads,
        standards=standards,
        length=_metres(line.sample_length, LONGEST_LENGTH, ("line", "sample_length")),
        length_u=line.sample_length_u or 0.0,
        air=line.air_length,
        air_u=line.air_length_u or 0.0,
        guess=None if line.guess is None else complex(line.guess),
        gap=None if gaps is None else CoaxialGap(**gaps.model_dump()),
        grain_size=sample.grain_size,
        gap_width=line.gap_width,
        largest_relative_uncertainty=body.largest_relative_uncertainty,
    )


def _start(body: ReflectionsBody) -> tuple[Axes, list[SampleBody]]:
    refuse_units(body.units)
    bodies = samples_of(body)
    if not 1 <= len(bodies) <= MOST_SAMPLES:
        raise refuse(f"expected 1 to {MOST_SAMPLES} samples, found {len(bodies)}", ("sample",))
    return Axes(body.frequency, body.units), bodies


def _refuse_twice(standards: list[StandardBody], *, tip: bool) -> None:
    """One standard under one name: repeats of it are a list of sweeps."""
    seen: dict[tuple[Any, ...], int] = {}
    for n, standard in enumerate(standards):
        name = ALIASES.get(standard.name, standard.name) if tip else standard.name
        what = (name, standard.temperature, standard.conductivity_25)
        if what in seen:
            first = standards[seen[what]].name
            detail = (
                f"{standard.name!r} is already standard {seen[what] + 1} ({first!r}): send its "
                "repeats as a list in reflection or touchstone"
            )
            raise refuse(detail, ("standards", n, "name"))
        seen[what] = n


def _refuse_ends(sample: SampleBody, place: Place) -> None:
    for end in ENDS:
        if getattr(sample, end) is not None:
            raise refuse(f"{end} is of a cell; this request is not of one", (*place, end))


def _geometry(body: ReflectionsBody) -> Geometry | None:
    aperture = body.aperture
    if aperture.inner_radius is None and aperture.outer_radius is None:
        return None
    for name in ("inner_radius", "outer_radius"):
        if getattr(aperture, name) is None:
            raise refuse(f"{name} is missing beside the other radius", ("aperture", name))
        _metres(getattr(aperture, name), LONGEST_RADIUS, ("aperture", name))
    return Geometry(
        float(aperture.inner_radius or 0), float(aperture.outer_radius or 0),
        aperture.fill_permittivity,
    )  # fmt: skip


def _metres(value: float | None, most: float, place: Place) -> float | None:
    if value is not None and value > most:
        detail = f"expected at most {most:g} m, found {value:g}; in mm? send {value / 1000:g}"
        raise refuse(detail, place)
    return value


def _model(body: ReflectionsBody, geometry: Geometry | None, standards: int) -> Model | None:
    name = body.aperture.model
    if name is None:
        return None
    for key in MODELS:
        if name == key:
            if key == "fitted" and standards < 4:
                detail = f"a fitted aperture needs four standards or more, found {standards}"
                raise refuse(detail, ("aperture", "model"))
            if geometry is None and key in {"radiating", "aperture-field"}:
                detail = f"{key} needs inner_radius and outer_radius, in m"
                raise refuse(detail, ("aperture", "inner_radius"))
            return key
    detail = f"no aperture model is called {name[:80]!r}{hint(name, MODELS)}; " + ", ".join(MODELS)
    raise refuse(detail, ("aperture", "model"))


def _tip_standard(
    body: StandardBody, sweep: Sweep, axes: Axes, geometry: Geometry | None, place: int
) -> Standard:
    at: Place = ("standards", place)
    if body.name == "load" and geometry is None:
        detail = "a load before a tip needs C0: give aperture.inner_radius and outer_radius in m"
        raise refuse(detail, (*at, "name"))
    if body.name in {"short", "load"}:
        return Standard(body.name, sweep.repeats.mean, None, IDEAL[body.name])
    return Standard(body.name, sweep.repeats.mean, known_of(body, axes.hertz, axes.units, at))


def _tip_sample(body: SampleBody, place: Place, sweep: Sweep, geometry: Geometry | None) -> Sample:
    for name in ("grain_size", "thickness", "air_gap"):
        value = getattr(body, name)
        _metres(value, LONGEST_LENGTH if name == "thickness" else LONGEST_RADIUS, (*place, name))
        if value is not None and geometry is None:
            detail = f"{name} is judged by the aperture: give its inner_radius and outer_radius"
            raise refuse(detail, (*place, name))
    from_scatter = sweep.repeats.spread is not None
    return Sample(
        read=sweep.repeats.mean,
        spread=sweep.spread,
        freedom=sweep.repeats.degrees_of_freedom if from_scatter else np.inf,
        scatter=sweep.repeats.scatter,
        grain_size=body.grain_size,
        thickness=body.thickness,
        gap=body.air_gap,
        gap_u=body.air_gap_u or 0.0,
    )


def _line_reads(body: ReflectionsBody, sample: SampleBody, axes: Axes) -> dict[str, Read]:
    if body.kind == "filled-line":
        _refuse_ends(sample, ("sample",))
        return {"endless": _line_read(one_port(sample, axes, body.reflection_u, ("sample",)))}
    if sample.reflection is not None or sample.touchstone is not None:
        detail = "a cell is read with its end shorted or open: send sample.short, sample.open"
        raise refuse(detail, ("sample",))
    if body.line.sample_length is None:
        raise refuse("a cell needs its sample_length, in m", ("line", "sample_length"))
    reads: dict[str, Read] = {}
    for end in ENDS:
        sweep = getattr(sample, end)
        if sweep is not None:
            read = one_port(sweep, axes, body.reflection_u, ("sample", end))
            reads[end] = _line_read(read)
    if not reads:
        raise refuse("a cell needs sample.short or sample.open, or both", ("sample",))
    return reads


def _line_read(sweep: Sweep) -> Read:
    scattered = sweep.repeats.spread is not None
    freedom = sweep.repeats.degrees_of_freedom if scattered else np.inf
    return Read(sweep.repeats.mean, sweep.spread, freedom)
