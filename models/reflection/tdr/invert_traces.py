"""Traces by inversion of the whole line, one after another, in the form of a measurement."""

from collections.abc import Mapping
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from models.errors import Complaint, ParameterError
from models.flags import BIT
from models.reflection.tdr.agreement import begins_of
from models.reflection.tdr.apparent import LOW_EXCUSED
from models.reflection.tdr.bench import DESCRIBED_U, Bench, Record, experiment, guess, identified
from models.reflection.tdr.calibration import rise_of
from models.reflection.tdr.measure import Known, Measured, conductivity
from models.reflection.tdr.whole.experiment import Experiment
from models.reflection.tdr.whole.identification import Identified, described
from models.reflection.tdr.whole.inversion import Inversion, invert, invert_layers
from models.reflection.tdr.whole.medium import Medium

FREQUENCY = 1e9
"""Hz, at which the fitted permittivity is stated unless the caller says another."""
AIR = Medium(1.0006)


def by_whole_trace(
    record: Record,
    bench: Bench,
    known: Known,
    *,
    frequency: float = FREQUENCY,
    terms: int | None = None,
    sections: int = 1,
    inserted: float | None = None,
) -> Measured:
    """Permittivity and conductivity of the medium that explains each trace.

    frequency: Hz, at which the permittivity is stated. terms: relaxations; None: as few as explain
    the trace. sections: media along the rods, 1 or 2; of two the columns are the lower one, whose
    conductivity is its own. inserted: m, of the rods in the medium, the rest in air.
    Raises ParameterError when neither calibration traces nor the description tell the system.
    """
    flags = np.zeros(record.trace.count, dtype=np.uint64)
    begins = begins_of(record.trace, bench.begin)
    system = known() or _described(record, bench, np.flatnonzero(~begins.strange))
    rough, levels = conductivity(record, bench, lambda: system, flags, begins)
    asked = Asked(terms, sections, inserted)
    rows: list[dict[str, float]] = []
    details: list[Mapping[str, object]] = []
    for row in range(record.trace.count):
        if flags[row] & BIT["no-end-reflection"]:
            rows.append(dict.fromkeys(COLUMNS, np.nan))
            details.append({})
            continue
        start = float(np.nan_to_num(rough["bulk_conductivity"][row], nan=0.02))
        trace = experiment(record, row, system.system.spread)
        found = _inverted(trace, system, start, bench.length, asked)
        rows.append(_row(found, frequency))
        details.append(_detail(found, frequency, bench.length))
        if found.too_simple or not np.isfinite(found.reduced_chi_square):
            flags[row] |= BIT["model-too-simple"]
    columns = {name: np.array([row[name] for row in rows]) for name in rows[0]}
    chi_square = columns.pop("reduced_chi_square")
    value, spread = columns["apparent_permittivity"], columns["apparent_permittivity_u"]
    lost = ~(spread <= UNSEEN * value) | (value < LEAST)
    lost |= (flags & BIT["no-end-reflection"]) > 0
    flags[lost] |= BIT["no-end-reflection"]
    columns = {name: np.where(lost, np.nan, cells) for name, cells in columns.items()}
    figures = {"reduced_chi_square": chi_square, **levels}
    return Measured(columns, figures, flags, begins, tuple(details))


class Asked(NamedTuple):
    """How the rods are divided into media, as ``by_whole_trace`` has it."""

    terms: int | None
    sections: int
    inserted: float | None


def _inverted(
    trace: Experiment, system: Identified, start: float, length: float, asked: Asked
) -> Inversion:
    """One trace. start: S/m, where the conductivity is looked for first. length: of the rods, m."""
    if asked.inserted is not None and asked.inserted < length:
        share = 1.0 - asked.inserted / length
        return invert_layers(
            trace, system, conductivity=start / (1.0 - share), share=share, fixed=True, first=AIR
        )
    if asked.sections == 2:
        return invert_layers(trace, system, conductivity=start, share=0.5, fixed=False)
    return invert(trace, system, conductivity=start, terms=asked.terms)


COLUMNS = ("apparent_permittivity", "apparent_permittivity_u", "apparent_permittivity_u_shared",
           "real_permittivity", "real_permittivity_u", "imaginary_permittivity",
           "imaginary_permittivity_u", "frequency", "bulk_conductivity", "bulk_conductivity_u",
           "bulk_conductivity_u_shared", "reduced_chi_square")  # fmt: skip
USUAL_BEGIN = (1e-8, 2e-10)
"""s, of the first reflection and its rise, where no trace shows one."""
LEAST = 1.0 - LOW_EXCUSED
"""Apparent permittivity below which there is none, however uncertain."""
UNSEEN = 0.5
"""Relative standard uncertainty of Ka from which the trace does not show the probe's end at all."""


def _described(record: Record, bench: Bench, rows: NDArray[np.intp]) -> Identified:
    """The system as it is described, its delays from the first rise of the traces.

    rows: of traces that begin as such. Raises ParameterError that names what the description lacks.
    """
    probe = bench.probe
    lacking = [
        Complaint(name, f"{name} is missing: a whole trace needs it, or calibration traces in air "
                  "and water", ("probe", name))
        for name, given in (("probe_impedance", probe.impedance), ("head", probe.head),
                            ("cable", probe.cable_length))
        if given is None
    ]  # fmt: skip
    if lacking:
        raise ParameterError("probe", lacking)
    arrival, rise = rise_of((record.trace.rows(rows),)) if rows.size else USUAL_BEGIN
    return described(guess(bench, arrival, rise), DESCRIBED_U)


def _row(found: Inversion, frequency: float) -> dict[str, float]:
    """Columns of one trace: of the last layer."""
    last = len(found.layers.media) - 1
    medium = found.layers.media[last]
    value, u, shared = found.apparent(frequency, last)
    eps, real_u, loss_u = found.permittivity(frequency, last)
    place = sum(len(m.names) for m in found.layers.media) - 1
    relative, relative_shared = found.relative(place)
    return {
        "apparent_permittivity": value,
        "apparent_permittivity_u": u,
        "apparent_permittivity_u_shared": shared,
        "real_permittivity": eps.real,
        "real_permittivity_u": real_u,
        "imaginary_permittivity": -eps.imag,
        "imaginary_permittivity_u": loss_u,
        "frequency": frequency,
        "bulk_conductivity": medium.conductivity,
        "bulk_conductivity_u": medium.conductivity * relative,
        "bulk_conductivity_u_shared": medium.conductivity * relative_shared,
        "reduced_chi_square": found.reduced_chi_square,
    }


def _detail(found: Inversion, frequency: float, length: float) -> Mapping[str, object]:
    """Parameters, their covariance, and every section on its own."""
    sections = []
    for k, (medium, share) in enumerate(zip(found.layers.media, found.layers.shares, strict=True)):
        value, u, _ = found.apparent(frequency, k)
        sections.append(
            {
                "length": share * length,
                "apparent_permittivity": value,
                "apparent_permittivity_u": u,
                "bulk_conductivity": medium.conductivity,
                "static_permittivity": medium.static,
                "high_permittivity": medium.high,
                "relaxation_strengths": medium.strengths,
                "relaxation_times": medium.times,
            }
        )
    return {
        "sections": sections,
        "parameters": found.names,
        "values": found.layers.values,
        "covariance": found.covariance,
        "converged": found.converged,
    }


def system_behind(bench: Bench) -> Known:
    """The system from calibration traces, worked out at most once; None where there are none."""
    kept: list[Identified] = []

    def known() -> Identified | None:
        if bench.calibration.air is None or bench.calibration.water is None:
            return None
        if not kept:
            kept.append(identified(bench))
        return kept[0]

    return known
