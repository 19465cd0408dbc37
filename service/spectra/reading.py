"""Spectra as the raw records of readings: the fitted curve at one frequency, and conduction."""

from collections.abc import Mapping
from typing import Any

import numpy as np

from models.conversion import Units
from models.errors import ParameterError
from models.flags import BIT, Flags
from models.relation import Array
from models.spectrum import Interpretation, interpret
from models.spectrum.doubts import CONDUCTION
from models.spectrum.flags import OF_CURVE
from models.spectrum.interpretation import whole_curve
from models.units import UNITS
from service.errors import Unprocessable
from service.faults import Fault, pointer
from service.spectra.answer import doubted_phases
from service.spectra.bodies import SpectraBody
from service.spectra.question import body_of, question_of, sent_spectrum

Place = tuple[int | str, ...]
AT = "at_frequency"
USUAL = 1e9
"""Hz, at which a spectrum is read unless the request says where, or the nearest it reaches."""
PROBABILITY = 0.95
"""Of a band whose ends are not taken."""
MOST = 50
"""Raw spectra in one request."""
SHARED: Place = ("raw_records", "spectrum")
KEPT = ("model", "cell")
"""What spectra of one request have in common."""
TAKEN = ("real_permittivity", "real_permittivity_u", "imaginary_permittivity",
         "imaginary_permittivity_u", "frequency", "bulk_conductivity",
         "bulk_conductivity_u")  # fmt: skip


def columns_of_spectra(
    records: Mapping[int, Any],
    count: int,
    where: Mapping[int, Place],
    settings: Any,
    units: Units,
) -> tuple[Mapping[str, Array], Flags, Mapping[str, Any]]:
    """Columns in SI, flags, and what was said on the way.

    records: parsed JSON by row, each a ``spectrum`` of /v1/spectra. where: the steps to each.
    settings: model and cell as that path takes them, and the frequency to read the curves at.
    Raises Unprocessable with the place of what cannot be used.
    """
    shared = {} if settings is None else settings
    if not isinstance(shared, Mapping):
        raise _refusal("expected an object", SHARED)
    strangers = [name for name in shared if name not in {AT, *KEPT}]
    if strangers:
        known = ", ".join((AT, *KEPT))
        raise _refusal(f"unknown key {strangers[0][:80]}; known are {known}",
                       (*SHARED, strangers[0]))  # fmt: skip
    if len(records) > MOST:
        detail = f"expected at most {MOST} raw spectra in a request, found {len(records)}"
        raise _refusal(detail, ("readings",))
    at = _frequency(shared.get(AT), units)
    columns = {name: np.full(count, np.nan) for name in TAKEN}
    remarks = []
    flags = np.zeros(count, dtype=np.uint64)
    said: dict[str, dict[str, str]] = {}
    for row, record in records.items():
        document = {"spectrum": record, **{n: shared[n] for n in KEPT if n in shared}}
        if "frequency" in units:
            document["units"] = {"frequency": units["frequency"]}
        found, doubted = _interpreted(document, where[row])
        said |= {one["text"]: one for one in doubted}
        for name, value in _values(found, at).items():
            columns[name][row] = value
        told = list(dict.fromkeys(finding.flag for finding in found.findings))
        remarks.append({"row": row, "form": found.choice.fit.form.title, "flags": told})
        if OF_CURVE & set(told):
            flags[row] |= BIT["raw-record-flagged"]
    return columns, flags, {**shared, "remarks": remarks, "advisories": list(said.values())}


def _frequency(at: Any, units: Units) -> float | None:
    if at is None:
        return None
    if isinstance(at, bool) or not isinstance(at, int | float) or not at > 0:
        raise _refusal("expected a frequency above 0", (*SHARED, AT))
    return float(UNITS.get(units.get("frequency", "Hz"), UNITS["Hz"]).to_si(at))


def _interpreted(
    document: Mapping[str, Any], place: Place
) -> tuple[Interpretation, list[dict[str, str]]]:
    """The fit of one record, and advisories about how it was sent.

    Where it is refused, the places are those of the readings.
    """
    try:
        body: SpectraBody = body_of(document)
        cell = body.cell.capacitance if body.cell else None
        if body.spectrum is None:
            raise _refusal("spectrum is missing", place)
        spectrum = sent_spectrum(body.spectrum, body.units, cell)
        return interpret(spectrum, question_of(body)), doubted_phases(body)
    except Unprocessable as error:
        faults = [Fault(f.detail, _moved(f.pointer, place)) for f in error.errors]
        raise Unprocessable(error.detail, faults) from None
    except ParameterError as error:
        faults = [Fault(c.detail, _moved(pointer(c.place), place)) for c in error.complaints]
        raise Unprocessable(str(error), faults) from None


def _moved(told: str, place: Place) -> str:
    first, _, rest = told.removeprefix("#/").partition("/")
    steps = tuple(step for step in rest.split("/") if step)
    return pointer((*place, *steps) if first == "spectrum" else (*SHARED, first, *steps))


def _values(found: Interpretation, at: float | None) -> dict[str, float]:
    """Permittivity of the fitted curve, and the conductivity that was told from it."""
    fit = found.choice.fit
    low, high = float(fit.spectrum.frequency.min()), float(fit.spectrum.frequency.max())
    read_at = min(max(USUAL, low), high) if at is None else at
    if not low <= read_at <= high:
        ends = f"{low:g} to {high:g} Hz"
        raise _refusal(f"the spectrum spans {ends}, found {read_at:g} Hz", (*SHARED, AT))
    band = whole_curve(found.choice, PROBABILITY, np.array([read_at]))
    told = {
        "frequency": read_at,
        "real_permittivity": float(band.real[0]),
        "real_permittivity_u": float(band.real_u[0]),
        "imaginary_permittivity": max(float(band.loss[0]), 0.0),
        "imaginary_permittivity_u": float(band.loss_u[0]),
    }
    sigma = next((one for one in found.parameters if one.name == "bulk_conductivity"), None)
    if sigma is not None and CONDUCTION not in {finding.flag for finding in found.findings}:
        told |= {
            "bulk_conductivity": sigma.value,
            "bulk_conductivity_u": sigma.standard_uncertainty,
        }
    return told


def _refusal(detail: str, place: Place) -> Unprocessable:
    return Unprocessable(detail, [Fault(detail, pointer(place))])
