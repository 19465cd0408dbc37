"""From the words of a request to what a coaxial tip is asked."""

import numpy as np

from models.advisories import Advice
from models.reflection.line.estimate import IDEAL
from models.reflection.tip.aperture import MODELS, Geometry, Model
from models.reflection.tip.calibration import Standard
from models.reflection.tip.estimate import TipQuery
from models.reflection.tip.sample import Sample
from models.relation import Array
from service.faults import hint
from service.sweeps.bodies import ReflectionsBody, SampleBody, StandardBody
from service.sweeps.columns import Axes, Sweep, one_port
from service.sweeps.media import known_of
from service.sweeps.phases import columns_of, suspicion
from service.sweeps.question import LONGEST_LENGTH, metres, refuse_ends, refuse_twice, start
from service.sweeps.values import Place, refuse

LONGEST_RADIUS = 0.05
"""m, beyond which a radius was written in another unit."""


def tip_question(body: ReflectionsBody) -> tuple[TipQuery, tuple[Advice, ...]]:
    """What is asked of a tip, and what is to be said of how it was sent.

    Raises ModelError with the place of each complaint.
    """
    axes, bodies = start(body)
    refuse_twice(body.standards, tip=True)
    if len(body.standards) < 3:
        detail = f"a tip needs three standards or more, found {len(body.standards)}"
        raise refuse(detail, ("standards",))
    many = isinstance(body.sample, list)
    read = []
    for n, sample in enumerate(bodies):
        at: Place = ("sample", n) if many else ("sample",)
        refuse_ends(sample, at)
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
    query = TipQuery(
        frequency=axes.hertz,
        standards=standards,
        standard_spread=_spreads(sweeps),
        samples=tuple(_tip_sample(*item, geometry) for item in read),
        model=_model(body, geometry, len(standards)),
        geometry=geometry,
        largest_relative_uncertainty=body.largest_relative_uncertainty,
    )
    return query, (*axes.references.advice, *suspicion(columns_of(*bodies)))


def _spreads(sweeps: list[Sweep]) -> Array | None:
    """Of all standards; None where nothing tells it of any.

    A standard that was read once among others that were repeated is as noisy as one of theirs.
    """
    spreads = [sweep.spread for sweep in sweeps]
    known = [spread for spread in spreads if spread is not None]
    if not known:
        return None
    if len(known) == len(spreads):
        return np.stack(known)
    if any(sweep.stated is not None for sweep in sweeps):
        detail = "state reflection_u of this standard too, once for all, or of none"
        raise refuse(detail, ("standards", spreads.index(None), "reflection_u"))
    single = np.nanmedian([sweep.repeats.scatter for sweep in sweeps])
    size = known[0].size
    return np.stack([np.full(size, single) if row is None else row for row in spreads])


def _geometry(body: ReflectionsBody) -> Geometry | None:
    aperture = body.aperture
    if aperture.inner_radius is None and aperture.outer_radius is None:
        return None
    for name in ("inner_radius", "outer_radius"):
        if getattr(aperture, name) is None:
            raise refuse(f"{name} is missing beside the other radius", ("aperture", name))
        metres(getattr(aperture, name), LONGEST_RADIUS, ("aperture", name))
    return Geometry(
        float(aperture.inner_radius or 0), float(aperture.outer_radius or 0),
        aperture.fill_permittivity,
    )  # fmt: skip


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
        metres(value, LONGEST_LENGTH if name == "thickness" else LONGEST_RADIUS, (*place, name))
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
