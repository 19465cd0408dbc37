"""From the words of a request about reflections to what a tip, a line or a cell is asked."""

from collections.abc import Mapping
from typing import Any

import numpy as np
from pydantic import TypeAdapter, ValidationError

from models.advisories import Advice
from models.conversion import refuse_units
from models.reflection.line.cell import ENDS
from models.reflection.line.estimate import IDEAL, LineQuery, Read
from models.reflection.line.gaps import CoaxialGap
from service.errors import Unprocessable
from service.faults import problems_of
from service.schemas.lengths import in_metres, too_long
from service.sweeps.bodies import LENGTHS, ReflectionsBody, SampleBody, StandardBody
from service.sweeps.columns import Axes, Sweep, one_port
from service.sweeps.phases import columns_of, refuse_ahead, suspicion
from service.sweeps.references import References
from service.sweeps.values import Place, refuse

LONGEST_LENGTH = 1.0
"""m, beyond which a length was written in another unit."""
MOST_SAMPLES = 200
ALIASES: Mapping[str, str] = {"open": "air"}
"""Before a tip an open end is the tip in air."""


def body_of(document: Mapping[str, Any], adapter: TypeAdapter[Any]) -> Any:
    """The checked body of a request. Raises Unprocessable with a pointer to every fault."""
    document = in_metres(document, LENGTHS)
    try:
        return adapter.validate_python(document)
    except ValidationError as error:
        faults = problems_of(error, document, adapter)
        raise Unprocessable("the request holds what cannot be used", faults) from None


def samples_of(body: ReflectionsBody) -> list[SampleBody]:
    """The samples of a request, however many were sent."""
    return body.sample if isinstance(body.sample, list) else [body.sample]


def line_question(body: ReflectionsBody) -> tuple[LineQuery, tuple[Advice, ...]]:
    """What is asked of a filled line or a cell, and what is to be said of how it was sent.

    Raises ModelError with the place of each complaint.
    """
    axes, bodies = start(body)
    if isinstance(body.sample, list):
        raise refuse("a line or a cell takes one sample at a time", ("sample",))
    (sample,) = bodies
    refuse_twice(body.standards, tip=False)
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
    sent = columns_of(sample, sample.short, sample.open)
    if body.kind == "filled-line" and not (standards or line.air_length):
        for one in sent:
            refuse_ahead(one, ("sample", "reflection"))
    query = LineQuery(
        frequency=axes.hertz,
        reads=reads,
        standards=standards,
        length=metres(line.sample_length, LONGEST_LENGTH, ("line", "sample_length")),
        length_u=line.sample_length_u or 0.0,
        air=line.air_length,
        air_u=line.air_length_u or 0.0,
        guess=None if line.guess is None else complex(line.guess),
        gap=None if gaps is None else CoaxialGap(**gaps.model_dump()),
        grain_size=sample.grain_size,
        gap_width=line.gap_width,
        largest_relative_uncertainty=body.largest_relative_uncertainty,
    )
    return query, (*axes.references.advice, *suspicion(sent))


def start(body: ReflectionsBody) -> tuple[Axes, list[SampleBody]]:
    """The axis to settle on, and the samples of a request."""
    refuse_units(body.units)
    bodies = samples_of(body)
    if not 1 <= len(bodies) <= MOST_SAMPLES:
        raise refuse(f"expected 1 to {MOST_SAMPLES} samples, found {len(bodies)}", ("sample",))
    references = References(None if body.kind == "tip" else body.line.impedance)
    return Axes(body.frequency, body.units, references), bodies


def refuse_twice(standards: list[StandardBody], *, tip: bool) -> None:
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


def refuse_ends(sample: SampleBody, place: Place) -> None:
    """Refuse the ends of a cell where there is no cell."""
    for end in ENDS:
        if getattr(sample, end) is not None:
            raise refuse(f"{end} is of a cell; this request is not of one", (*place, end))


def metres(value: float | None, most: float, place: Place) -> float | None:
    """A length in metres; one beyond any apparatus was written in another unit."""
    if detail := too_long(value, most):
        raise refuse(detail, place)
    return value


def _line_reads(body: ReflectionsBody, sample: SampleBody, axes: Axes) -> dict[str, Read]:
    if body.kind == "filled-line":
        refuse_ends(sample, ("sample",))
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
