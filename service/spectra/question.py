"""From the words of a request to a spectrum and a question in SI."""

from collections.abc import Mapping
from typing import Any

import numpy as np
from pydantic import ValidationError

from models.conversion import Units, refuse_units, to_si, unit_of
from models.errors import Complaint, ParameterError
from models.estimate.basis import ASSUMED_TEMPERATURE_U
from models.estimate.binding import bind
from models.mixing import MIXING_MODELS
from models.relation import Array, ComplexArray, column
from models.spectrum import Question, Spectrum, spectrum_of
from models.spectrum.form import Form
from models.spectrum.relaxation import RELAXATIONS
from models.spectrum.spectrum import LEAST_LOSS
from models.spectrum.views import UNIT_CUBE, VIEWS, permittivity_from
from models.spectrum.water.band import Soil
from models.spectrum.water.mixtures import MIXTURES
from service.errors import Unprocessable
from service.faults import Fault, hint, problems_of
from service.schemas.lengths import in_metres
from service.schemas.query import model_of, soil_of
from service.spectra.bodies import SPECTRA, ComplexNumbers, SpectraBody, SpectrumBody

MOST_POINTS = 10_000
"""Of one spectrum; network analysers sweep far fewer."""
LARGEST_CELL = 1e-3
"""F, of any empty cell."""
PARTS = (("real", "imaginary"), ("magnitude", "degrees"))


def body_of(document: Mapping[str, Any]) -> SpectraBody:
    """The checked body of a request. Raises Unprocessable with a pointer to every fault."""
    document = in_metres(document, frozenset())
    try:
        return SPECTRA.validate_python(document)
    except ValidationError as error:
        faults = problems_of(error, document, SPECTRA)
        raise Unprocessable("the request holds what cannot be used", faults) from None


def sent_spectrum(body: SpectrumBody, units: Units, cell: float | None) -> Spectrum:
    """The spectrum of a request, checked; cell: F, None where none was given.

    Raises ParameterError or Unprocessable with the place of each complaint.
    """
    count = len(body.frequency)
    if count > MOST_POINTS:
        detail = f"expected at most {MOST_POINTS} frequencies, found {count}"
        raise Unprocessable(detail, [Fault(detail, "#/spectrum/frequency")])
    frequency = unit_of("frequency", units).to_si(body.frequency)
    real, loss = _parts(body, frequency, cell)
    real_u, loss_u = (None if given is None else column(given) for given in
                      (body.real_permittivity_u, body.imaginary_permittivity_u))  # fmt: skip
    if body.relative_u is not None:
        if real_u is not None or loss_u is not None:
            detail = "relative_u stands in place of the uncertainties of the parts: send one kind"
            raise Unprocessable(detail, [Fault(detail, "#/spectrum/relative_u")])
        least = LEAST_LOSS * np.hypot(real, loss) if len(real) == len(loss) else 0.0
        real_u, loss_u = (body.relative_u * np.maximum(np.abs(part), least)
                          for part in (real, loss))  # fmt: skip
    return spectrum_of(frequency, real, loss, real_u, loss_u)


def question_of(body: SpectraBody) -> Question:
    """What is asked of the spectrum, in SI. Raises ModelError with the place of each complaint."""
    refuse_units(body.units)
    _refuse_farads(body)
    form = body.model
    settled: Form | None = None
    if form.terms is not None:
        _refuse_strangers(form.terms)
        settled = Form(tuple(form.terms), form.conduction is not False, bool(form.electrode))
    name, parameters, soil = _soil(body)
    return Question(
        form=settled,
        conduction=form.conduction,
        electrode=form.electrode,
        cell=body.cell.capacitance if body.cell else UNIT_CUBE,
        probability=body.coverage_probability,
        soil=soil,
        mixing_model=name,
        parameters=parameters,
    )


def _refuse_farads(body: SpectraBody) -> None:
    """Refuse an empty cell of a capacitance that none has: it was written in another unit."""
    value = body.cell.capacitance if body.cell else LARGEST_CELL
    if value <= LARGEST_CELL:
        return
    detail = (
        f"expected a capacitance of at most {LARGEST_CELL:g} F, found {value:g}; in pF? send "
        f"{value * 1e-12:g}"
    )
    raise Unprocessable(detail, [Fault(detail, "#/cell/capacitance")])


def _refuse_strangers(terms: list[str]) -> None:
    faults = [
        Fault(f"no relaxation is called {term[:80]}{hint(term, RELAXATIONS)}; choose among "
              f"{', '.join(RELAXATIONS)}", f"#/model/terms/{place}")
        for place, term in enumerate(terms) if term not in RELAXATIONS
    ]  # fmt: skip
    if faults:
        raise Unprocessable("the model names terms that are none", faults)


def _parts(body: SpectrumBody, frequency: Array, cell: float | None) -> tuple[Array, Array]:
    """Real part and loss, whichever way they came."""
    plain = [n for n in ("real_permittivity", "imaginary_permittivity")
             if getattr(body, n) is not None]  # fmt: skip
    views = [key for key in VIEWS if getattr(body, key) is not None]
    if len(plain) == 2 and not views:
        return column(body.real_permittivity or []), column(body.imaginary_permittivity or [])
    if plain or len(views) != 1:
        found = ", ".join([*plain, *views]) or "none of them"
        detail = (
            "a spectrum holds real_permittivity and imaginary_permittivity, or one of "
            f"{', '.join(VIEWS)}; found {found}"
        )
        raise Unprocessable(detail, [Fault(detail, "#/spectrum")])
    (key,) = views
    values = complex_of(getattr(body, key), f"#/spectrum/{key}")
    if VIEWS[key].unit != "1" and cell is None:
        detail = f"{key} needs the empty cell: give cell.capacitance in F"
        raise Unprocessable(detail, [Fault(detail, "#/cell")])
    if len(values) != len(frequency):
        detail = f"{key} has {len(values)} values where frequency has {len(frequency)}"
        raise Unprocessable(detail, [Fault(detail, f"#/spectrum/{key}")])
    eps = permittivity_from(key, values, frequency, cell or UNIT_CUBE)
    return eps.real, -eps.imag


def complex_of(body: ComplexNumbers, place: str) -> ComplexArray:
    """Complex numbers from their parts. Raises Unprocessable where the parts are no pair."""
    given = tuple(n for n in ("real", "imaginary", "magnitude", "degrees")
                  if getattr(body, n) is not None)  # fmt: skip
    if given not in PARTS:
        detail = f"expected real and imaginary, or magnitude and degrees; found {given or 'none'}"
        raise Unprocessable(detail, [Fault(detail, place)])
    first, second = (column(getattr(body, name)) for name in given)
    if len(first) != len(second):
        detail = f"{given[0]} has {len(first)} values, {given[1]} {len(second)}"
        raise Unprocessable(detail, [Fault(detail, f"{place}/{given[1]}")])
    if given == PARTS[0]:
        return np.asarray(first + 1j * second, dtype=np.complex128)
    return np.asarray(first * np.exp(1j * np.radians(second)), dtype=np.complex128)


def _soil(body: SpectraBody) -> tuple[str, dict[str, Any], Soil | None]:
    """Mixing model, its parameters, and what is not exact of them."""
    name, given, _ = model_of("mixing_model", MIXING_MODELS, body.mixing_model, body.units)
    if name is None or name not in MIXTURES:
        detail = f"{name} has no spectrum; for a whole band choose {', '.join(MIXTURES)}"
        complaint = Complaint("mixing_model", detail, ("mixing_model",))
        raise ParameterError("mixing_model", [complaint])
    if body.soil is None:
        return name, {}, None
    described = soil_of(body.soil, body.units)
    bound = bind(MIXING_MODELS[name], "mixing_model", given, described)
    _refuse_spheroids(bound.values)
    temperature, temperature_u = _temperature(body)
    uncertain = {n: u for n, u in bound.uncertainties.items() if u > 0 and n in KNOWN}
    soil = Soil(
        uncertainties=uncertain,
        temperature=temperature,
        temperature_u=temperature_u,
        porosity=float(bound.values["porosity"]),
        clay=described.values.get("clay"),
        organic_matter=described.values.get("organic_matter"),
    )
    return name, bound.values, soil


KNOWN = ("porosity", "solid_permittivity", "exponent")
"""Parameters whose uncertainty is carried through an inversion."""


def _refuse_spheroids(values: Mapping[str, Any]) -> None:
    if values.get("aspect_ratio", 1.0) != 1.0:
        detail = "over a whole band maxwell-garnett takes spheres only: leave aspect_ratio out"
        place = ("mixing_model", "aspect_ratio")
        raise ParameterError("mixing_model", [Complaint("aspect_ratio", detail, place)])


def _temperature(body: SpectraBody) -> tuple[float, float]:
    """Cel and K; NaN where neither the spectrum nor the caller's assumption says it."""
    if body.temperature is not None:
        given = {"temperature": body.temperature, "temperature_u": body.temperature_u or 0.0}
        try:
            known = to_si("temperature", given, body.units)
        except ParameterError as error:
            placed = [Complaint(c.name, c.detail, (c.name,)) for c in error.complaints]
            raise ParameterError("request", placed) from None
        return known["temperature"], known["temperature_u"]
    if body.assume.temperature is None:
        return np.nan, 0.0
    spread = body.assume.temperature_u
    given = {"temperature": body.assume.temperature}
    if spread is not None:
        given["temperature_u"] = spread
    known = to_si("assume", given, body.units)
    return known["temperature"], known.get("temperature_u", ASSUMED_TEMPERATURE_U)
