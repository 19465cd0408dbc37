"""What an answer to POST /v1/waveforms tells: rows, what they were read from, the probe as used."""

from collections.abc import Iterator, Mapping, Sequence
from types import MappingProxyType
from typing import Any

import numpy as np

from models.advisories import Advice, advise
from models.conversion import Units, from_si
from models.flags import slugs_of
from models.quantity import QUANTITIES
from models.reflection.tdr.bench import Bench
from models.reflection.tdr.calibration import SUSPECT_LENGTH
from models.reflection.tdr.circuit import circuit, contradicting_constant, stated_constant
from models.reflection.tdr.doubts.levels import doubts
from models.reflection.tdr.probe import Rods, System
from models.relation import Array
from models.uncertainty.coverage import coverage_factor
from service.waveforms.bodies import WaveformBody
from service.waveforms.measuring import Answered

FIGURE_UNITS: Mapping[str, str] = MappingProxyType({
    "start_by_tangents": "ns", "start_by_steepest_slope": "ns", "end_by_tangents": "ns",
    "end_by_steepest_slope": "ns", "permittivity_by_tangents": "1",
    "permittivity_by_steepest_slope": "1", "rise_time": "ns", "expected_rise_time": "ns",
    "signal_to_noise": "1", "smoothing": "ns", "noise": "1", "late_level": "1", "late_level_u": "1",
    "late_level_from": "ns", "reduced_chi_square": "1",
})  # fmt: skip
"""Of what the numbers were read from."""
BANDED = ("apparent_permittivity", "bulk_conductivity")
FLOORS: Mapping[str, float] = MappingProxyType(
    {"apparent_permittivity": 1.0, "bulk_conductivity": 0.0}
)
"""No medium has less: bands end there."""
WAYS: Mapping[bool | None, str] = MappingProxyType({True: "goes upwards", False: "goes downwards",
                                                  None: "lies"})  # fmt: skip
"""Of a first reflection."""
USED: Mapping[bool, str] = MappingProxyType({
    True: "A whole trace is read with the line that these traces tell",
    False: "The one as described was used, and what lies between both is in the band of the "
           "conductivity",
})  # fmt: skip
"""Of two probe constants that contradict each other, for a whole trace or not."""
SCALES: Mapping[str, float] = MappingProxyType({"ns": 1e9, "1": 1.0})


def rows_of(
    found: Answered, bodies: Sequence[WaveformBody], units: Units, probability: float
) -> list[dict[str, Any]]:
    """One object per waveform, null where there is no number."""
    columns = banded(found.columns, probability)
    told = {name: _plain(from_si(name, values, units)) for name, values in columns.items()}
    seen = {
        name: _plain(values * SCALES[FIGURE_UNITS[name]]) for name, values in found.figures.items()
    }
    rows: list[dict[str, Any]] = []
    for place, body in enumerate(bodies):
        row: dict[str, Any] = {
            name: value for name in ("time", "depth") if (value := getattr(body, name)) is not None
        }
        row |= {name: values[place] for name, values in told.items()}
        row["read_from"] = {name: values[place] for name, values in seen.items()}
        if place in found.details:
            row["whole_trace"] = _detail(found.details[place], units)
        row["flags"] = list(slugs_of(int(found.flags[place])))
        rows.append(row)
    return rows


def banded(columns: Mapping[str, Array], probability: float) -> dict[str, Array]:
    """The columns, and the ends of the coverage interval after each quantity that has a band."""
    k = coverage_factor(probability)
    full: dict[str, Array] = {}
    for name, values in columns.items():
        full[name] = values
        stem = name.removesuffix("_u_shared")
        if stem != name and stem in BANDED:
            value, u = columns[stem], columns[f"{stem}_u"]
            full[f"{stem}_lower"] = np.maximum(value - k * u, np.minimum(value, FLOORS[stem]))
            full[f"{stem}_upper"] = value + k * u
    return full


def _plain(values: Array) -> list[float | None]:
    """As JSON has it: null for NaN and what is not finite."""
    return [value if np.isfinite(value) else None for value in values.tolist()]


def _detail(detail: Mapping[str, Any], units: Units) -> dict[str, Any]:
    """Sections, parameters and covariance of one inversion."""
    sections = []
    for section in detail["sections"]:
        shown = dict(section)
        for name in ("bulk_conductivity",):
            shown[name] = float(from_si(name, section[name], units))
        shown["relaxation_strengths"] = list(section["relaxation_strengths"])
        shown["relaxation_times"] = [1e9 * time for time in section["relaxation_times"]]
        sections.append(shown)
    return {
        "sections": sections,
        "parameters": list(detail["parameters"]),
        "values": np.asarray(detail["values"]).tolist(),
        "covariance": np.asarray(detail["covariance"]).tolist(),
        "converged": bool(detail["converged"]),
    }


def probe_echo(found: Answered, units: Units) -> dict[str, Any]:
    """The probe as it was used, calibrated values included."""
    bench = found.bench
    echo: dict[str, Any] = {"probe_length": float(from_si("probe_length", bench.length, units))}
    if bench.timing is not None:
        echo |= bench.timing.told
    between = circuit(bench, _late_begin(found), found.system)
    if between is not None:
        for name, known in (("probe_constant", between.constant),
                            ("series_resistance", between.series_resistance),
                            ("open_level", between.open_level)):  # fmt: skip
            echo |= {name: known.value, f"{name}_u": known.standard_uncertainty}
    if found.system is not None:
        echo["line"] = _line(found.system.system)
        chi_square = found.system.reduced_chi_square
        echo["line"]["reduced_chi_square"] = chi_square if np.isfinite(chi_square) else None
    return echo


def _late_begin(found: Answered) -> float:
    """Two-way time, s, from which the last of the late levels was read."""
    return float(np.nanmax(found.figures["late_level_from"]))


def _line(system: System) -> dict[str, Any]:
    """The line that calibration traces tell, s and ohm as ns and Ohm."""
    return {
        "rise_time": 1e9 * system.rise_time,
        "cable_impedance": system.cable.impedance,
        "cable_delay": 1e9 * system.cable.delay,
        "cable_resistance": system.cable.resistance,
        "cable_skin_resistance": system.cable.skin_resistance,
        "head_impedance": system.head.impedance,
        "head_delay": 1e9 * system.head.delay,
        "probe_impedance": system.rods.impedance,
        "probe_length": system.rods.length,
    }


def advice_of(bench: Bench, found: Answered) -> list[Advice]:
    """What the caller should know of how the probe was described."""
    said: list[Advice] = []
    if bench.timing is None or bench.calibration.air is None or bench.calibration.water is None:
        said.append(advise("probe-not-calibrated"))
    else:
        length = bench.timing.told["effective_length"]
        if abs(length / bench.length - 1) > SUSPECT_LENGTH:
            said.append(advise("effective-length", length=f"{length:.4g}",
                               own=f"{bench.length:.4g}"))  # fmt: skip
    if bench.calibration.short is None and bench.probe.series_resistance is None:
        said.append(advise("series-resistance-assumed"))
    leans = found.whole or stated_constant(bench) is None
    if found.system is not None and found.system.misses and leans:
        said.append(advise("calibration-misfit", times=f"{found.system.missed_by:.3g}"))
    said += _of_begins(bench, found)
    if circuit(bench, _late_begin(found), found.system) is None:
        said.append(advise("probe-constant-missing"))
    said += _of_constants(bench, found)
    return said


def _of_constants(bench: Bench, found: Answered) -> Iterator[Advice]:
    """Whether the probe constant is another one than traces in air and in water tell."""
    shown, stated = contradicting_constant(bench, found.system), stated_constant(bench)
    if shown is None or stated is None:
        return
    impedance = Rods.of_constant(shown.value, bench.length).impedance
    yield advise("probe-constant-contradicted", stated=f"{stated.value:.4g}",
                 shown=f"{shown.value:.4g}", impedance=f"{impedance:.4g}",
                 used=USED[found.whole])  # fmt: skip


def _of_begins(bench: Bench, found: Answered) -> Iterator[Advice]:
    """What the beginnings of the waveforms tell: of their line, scale and axis."""
    begin, begins = bench.begin, found.begins
    strange = np.flatnonzero(begins.strange)
    if begin is not None and strange.size:
        first = float(begins.time[strange[0]])
        theirs = f"at {_in_ns(first)} ns" if np.isfinite(first) else "nowhere"
        yield advise("unlike-calibration", count=strange.size, time=_in_ns(begin.time),
                     level=f"{begin.level:+.3f}", way=WAYS[begin.upwards],
                     theirs=theirs)  # fmt: skip
    if doubted := list(doubts(bench, begins)):
        yield advise("level-suspected", found="; ".join(doubted))
    for code, which in found.doubted.items():
        if which.any():
            yield advise(code, count=int(which.sum()))


def _in_ns(time: float) -> str:
    return f"{time * SCALES['ns']:.4g}"


def units_of(
    columns: Mapping[str, Array], figures: Mapping[str, Array], units: Units
) -> dict[str, str]:
    """The unit of every number of the rows."""
    stems = {name.removesuffix("_u_shared").removesuffix("_u") for name in columns}
    told = {name: units.get(name, QUANTITIES[name].unit) for name in QUANTITIES if name in stems}
    return {**told, **{name: FIGURE_UNITS[name] for name in figures}}
