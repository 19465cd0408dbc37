"""Sweeps as the raw records of readings: permittivity at one frequency, for an estimate."""

from collections.abc import Callable, Mapping, Sequence
from types import MappingProxyType
from typing import Any, NamedTuple

import numpy as np

from models.advisories import Advice, advise
from models.conversion import Units
from models.errors import ParameterError
from models.flags import BIT, Flags
from models.quantity import QUANTITIES
from models.reflection.estimates import SweepEstimate
from models.reflection.line.estimate import estimate_line
from models.reflection.sweep_flags import MARGIN, SWEEP_FLAGS, keys_of
from models.reflection.tip.estimate import estimate_permittivity
from models.reflection.two_port.estimate import estimate_constants
from models.relation import Array
from models.units import UNITS
from service.errors import Unprocessable
from service.faults import Fault, pointer
from service.sweeps.answer import tip_advice, two_port_advice
from service.sweeps.bodies import REFLECTIONS, SCATTERING
from service.sweeps.question import body_of, line_question
from service.sweeps.tip import tip_question
from service.sweeps.two_port import two_port_question
from service.sweeps.values import Place, refuse

AT = "at_frequency"
MOST, MOST_SEARCHED = 200, 40
"""Raw sweeps in one request; fewer where each of them is searched for its roots."""
TAKEN = ("real_permittivity", "real_permittivity_u", "imaginary_permittivity",
         "imaginary_permittivity_u", "frequency")  # fmt: skip
NO_NUMBER: Mapping[str, str] = MappingProxyType({
    "below-vacuum": "out-of-gate:real_permittivity",
    "no-root": "no-solution",
    "too-uncertain": "no-permittivity",
})  # fmt: skip
"""What a row is flagged by where the sweep is flagged so and has no number."""
Answer = tuple[Mapping[str, Array], Flags, Mapping[str, Any], Mapping[str, Array]]
Records = Mapping[int, Any]
Where = Mapping[int, Place]
Document = Mapping[str, Any]


class Told(NamedTuple):
    """An estimate, and what is to be said of it."""

    estimate: SweepEstimate
    said: tuple[Advice, ...]


Ask = Callable[[Document], Told]
Held = tuple[int, Told, int]
"""Row of a reading, what it is part of, and its place among the samples of that."""


def columns_of_reflections(
    records: Records, count: int, where: Where, settings: Any, units: Units
) -> Answer:
    """Columns in SI, flags, what was said on the way, and what repeated sweeps share.

    One calibration is for all records.

    records: parsed JSON by row, each a ``sample`` of /v1/reflections. where: the steps to each.
    settings: what that request holds beside them, and the frequency to read the spectra at.
    Raises ModelError or Unprocessable with the place of what cannot be used.
    """
    place: Place = ("raw_records", "reflection")
    at, shared = _settings(settings, len(records), units, place)
    shared.setdefault("kind", "tip")
    rows = list(records)
    if shared["kind"] == "tip":
        document = {**shared, "sample": [records[row] for row in rows]}
        found = _asked(_of_tip, document, place, [where[row] for row in rows])
        return _columns([(row, found, n) for n, row in enumerate(rows)], count, at, place)
    return _columns(_one_by_one(_of_line, records, where, shared, place), count, at, place)


def columns_of_scattering(
    records: Records, count: int, where: Where, settings: Any, units: Units
) -> Answer:
    """The same of S-parameters: each record is a ``sample`` of /v1/scattering."""
    place: Place = ("raw_records", "scattering")
    at, shared = _settings(settings, len(records), units, place)
    return _columns(_one_by_one(_of_two_ports, records, where, shared, place), count, at, place)


def _of_tip(document: Document) -> Told:
    query, said = tip_question(body_of(document, REFLECTIONS))
    found = estimate_permittivity(query)
    return Told(found.estimate, (*said, *tip_advice(found)))


def _of_line(document: Document) -> Told:
    query, said = line_question(body_of(document, REFLECTIONS))
    return Told(estimate_line(query).estimate, said)


def _of_two_ports(document: Document) -> Told:
    query, said = two_port_question(body_of(document, SCATTERING))
    found = estimate_constants(query)
    return Told(found.estimate, (*said, *two_port_advice(found, query.length)))


def _one_by_one(
    ask: Ask, records: Records, where: Where, shared: Document, place: Place
) -> list[Held]:
    return [
        (row, _asked(ask, {**shared, "sample": record}, place, [where[row]]), 0)
        for row, record in records.items()
    ]


def _settings(
    settings: Any, count: int, units: Units, place: Place
) -> tuple[float, dict[str, Any]]:
    """The frequency to read at, Hz, and the rest of a request for spectra."""
    if not isinstance(settings, dict):
        name = pointer(place).removeprefix("#/").replace("/", ".")
        raise refuse(f"give {name}: {AT}, and what its own path takes beside a sample", place)
    most = MOST_SEARCHED if settings.get("kind") == "cell" else MOST
    if count > most:
        raise refuse(f"expected at most {most} raw sweeps in a request, found {count}", place)
    shared = {name: value for name, value in settings.items() if name != AT}
    for name in ("sample", "units"):
        if name in shared:
            raise refuse(f"{name} stands in the readings or the request", (*place, name))
    known = {q: code for q, code in units.items() if q in {"frequency", "temperature"}}
    at = settings.get(AT)
    if isinstance(at, bool) or not isinstance(at, int | float):
        raise refuse(f"{AT} is missing: the frequency at which to read the spectrum", (*place, AT))
    unit = UNITS.get(known.get("frequency", "Hz"), UNITS["Hz"])
    hertz = float(unit.to_si(at))
    gate = QUANTITIES["frequency"].gate_si
    if gate.excludes(hertz):
        raise refuse(f"expected a frequency in {gate} Hz, found {at:g} {unit.code}", (*place, AT))
    return hertz, {**shared, "units": known}


def _asked(ask: Ask, document: Document, place: Place, samples: Sequence[Place]) -> Told:
    """The answer; where it is refused, the places are those of the readings and raw_records."""
    try:
        return ask(document)
    except Unprocessable as error:
        faults = [Fault(f.detail, _moved(f.pointer, place, samples)) for f in error.errors]
        raise Unprocessable(error.detail, faults) from None
    except ParameterError as error:
        faults = [Fault(c.detail, _moved(pointer(c.place), place, samples))
                  for c in error.complaints]  # fmt: skip
        raise Unprocessable(error, faults) from None


def _moved(told: str, place: Place, samples: Sequence[Place]) -> str:
    steps = told.removeprefix("#/").split("/")
    if steps[0] != "sample":
        return pointer((*place, *steps)) if steps != [""] else pointer(place)
    if len(steps) > 1 and steps[1].isdecimal() and int(steps[1]) < len(samples):
        return pointer((*samples[int(steps[1])], *steps[2:]))
    return pointer((*samples[0], *steps[1:]))


def _columns(held: Sequence[Held], count: int, at: float, place: Place) -> Answer:
    """Spectra at one frequency; a loss below zero by no more than noise is read as none."""
    columns = {name: np.full(count, np.nan) for name in TAKEN}
    shared = np.full(count, np.nan)
    flags = np.zeros(count, dtype=np.uint64)
    remarks: list[dict[str, Any]] = []
    for row, (found, _), n in held:
        if not found.frequency[0] <= at <= found.frequency[-1]:
            ends = f"{found.frequency[0]:g} to {found.frequency[-1]:g}"
            raise refuse(f"the sweeps span {ends} Hz, found {at:g} Hz", (*place, AT))
        values, told = _reading(found, n, at)
        if np.isnan(values["real_permittivity"]):
            flags[row] |= BIT[_why_none(told)]
        for name, value in values.items():
            columns[name][row] = value
        shared[row] = float(np.interp(at, found.frequency, found.band.real_shared[n]))
        if told:
            remarks.append({"row": row, "flags": told})
        if SWEEP_FLAGS.keys() & set(told):
            flags[row] |= BIT["raw-record-flagged"]
    echo = {AT: at, "remarks": remarks, "advisories": _advisories(held)}
    return columns, flags, echo, {"real_permittivity": shared}


def _advisories(held: Sequence[Held]) -> list[dict[str, str]]:
    """What is to be said of all sweeps, each sentence once."""
    said = dict.fromkeys(advice for _, told, _ in held for advice in told.said)
    if not all(told.estimate.noise_known for _, told, _ in held):
        advice = advise("no-uncertainty-stated", names="reflection", example="reflection_u")
        said[advice] = None
    if any(told.estimate.conjugated for _, told, _ in held):
        said[Advice("conjugated", SWEEP_FLAGS["conjugated"].text)] = None
    return [{"code": advice.code, "text": advice.text} for advice in said]


def _reading(found: SweepEstimate, place: int, at: float) -> tuple[dict[str, float], list[str]]:
    """One spectrum at one frequency, and what is to be said of it."""
    values = _at(found, place, at)
    loss, loss_u = values["imaginary_permittivity"], values["imaginary_permittivity_u"]
    told = sorted(_near(found, place, at))
    if -MARGIN * loss_u <= loss < 0:
        values["imaginary_permittivity"] = 0.0
        told.append("loss-below-zero")
    if found.conjugated:
        told.append("conjugated")
    return values, told


def _why_none(told: Sequence[str]) -> str:
    """The flag of a row whose sweep has no permittivity where it was read."""
    return next((NO_NUMBER[flag] for flag in told if flag in NO_NUMBER), "no-permittivity")


def _at(found: SweepEstimate, place: int, at: float) -> dict[str, float]:
    """Between the two nearest frequencies, straight; uncertainties of neighbours are alike."""
    eps, f = found.permittivity[place], found.frequency
    columns = {
        "real_permittivity": eps.real,
        "real_permittivity_u": found.band.real[place],
        "imaginary_permittivity": -eps.imag,
        "imaginary_permittivity_u": found.band.loss[place],
    }
    between = {name: float(np.interp(at, f, values)) for name, values in columns.items()}
    return {**between, "frequency": at}


def _near(found: SweepEstimate, place: int, at: float) -> set[str]:
    """Flags of the two frequencies that a value lies between."""
    right = min(int(np.searchsorted(found.frequency, at)), found.frequency.size - 1)
    left = right if found.frequency[right] == at else max(right - 1, 0)
    return {key for n in (left, right) for key in keys_of(int(found.flags[place, n]))}
