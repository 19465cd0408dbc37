"""From what a reading carries to the one permittivity its mixing model speaks of."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.constants import speed_of_light

from models.mixing.apparent import conduction_loss, to_apparent, to_real
from models.quantity import QUANTITIES
from models.readings import Readings
from models.relation import Array

VACUUM = 1.0
"""Nothing has less: below it there was no reading."""
SHARED = "_u_shared"
"""Suffix of the part of an uncertainty that readings of one probe share, SI: columns of raw records
only."""
KINDS = ("apparent_permittivity", "real_permittivity", "travel_time")


@dataclass(frozen=True, slots=True)
class Permittivity:
    """Values with the two parts of their standard uncertainty, shape (n,); NaN: none."""

    value: Array
    per_reading: Array
    shared: Array
    loss: Array | None
    """Total eps'' where it is known, from the reading or from its bulk conductivity."""
    loss_u: Array | None = None
    """Standard uncertainty of the loss, per reading."""
    conduction_only: NDArray[np.bool_] | None = None
    """Where the loss is that of the bulk conductivity alone, relaxation not included."""
    from_loss: Array | None = None
    """By how much one standard uncertainty of the loss moves the value; None: not at all."""
    uncorrected: Array | None = None
    """Apparent permittivity before its correction for loss, where one was made."""
    shared_by: str = "probe_length"
    """What the shared part comes from."""

    @property
    def of_reading(self) -> Array:
        """Per-reading standard uncertainty, that of the loss included."""
        if self.from_loss is None:
            return self.per_reading
        return np.sqrt(np.square(self.per_reading) + np.square(self.from_loss))


def kinds_in(names: Iterable[str]) -> tuple[str, ...]:
    """Which kinds of permittivity the columns hold."""
    held = set(names)
    return tuple(kind for kind in KINDS if kind in held)


def permittivity_of(
    readings: Readings,
    kind: str,
    frequency: Array,
    probe: Mapping[str, float],
    *,
    correct: bool,
) -> Permittivity:
    """The ``kind`` ("apparent" or "real") of permittivity of each reading.

    frequency: scalar or shape (n,), Hz; NaN where nobody said it: conduction then tells no loss.
    probe: values and ``_u`` of the probe, SI.
    correct: whether loss is taken out of an apparent permittivity; not for a model that takes the
    loss itself, or whose curve holds it.

    A row's own column of that kind comes first, then the other kind, converted with the row's
    loss (exact; with no loss known the two are equal). A curve of Ka was made in soils of little
    loss: it gets eps' = Ka - eps''^2 / (4 Ka), the Ka that this soil would have without loss.
    """
    loss, loss_u = _loss(readings, frequency, probe)
    apparent = _apparent(readings, probe)
    real = _real(readings, probe)
    if apparent is None:
        apparent = _Part.nothing(readings.count)
    if kind == "apparent" and not correct:
        if real is not None:
            known = np.zeros(readings.count) if loss is None else np.nan_to_num(loss)
            apparent = apparent.or_else(replace(real, value=to_apparent(real.value, known)))
        return Permittivity(
            apparent.value,
            apparent.per_reading,
            apparent.shared,
            loss,
            loss_u,
            _conduction_only(readings),
            shared_by=_shared_by(readings),
        )
    uncorrected = from_loss = None
    if loss is not None and loss_u is not None:
        uncorrected = apparent.value
        apparent, from_loss = _without_loss(apparent, np.nan_to_num(loss), np.nan_to_num(loss_u))
    if real is not None:
        own = ~np.isnan(real.value)
        if kind == "apparent":
            own &= np.isnan(apparent.value)
        apparent = real.or_else(apparent) if kind == "real" else apparent.or_else(real)
        if uncorrected is not None and from_loss is not None:
            uncorrected = np.where(own, real.value, uncorrected)
            from_loss = np.where(own, 0.0, from_loss)
    return Permittivity(
        apparent.value,
        apparent.per_reading,
        apparent.shared,
        loss,
        loss_u,
        _conduction_only(readings),
        from_loss,
        uncorrected,
        _shared_by(readings),
    )


@dataclass(frozen=True, slots=True)
class _Part:
    """A column and the two parts of its standard uncertainty."""

    value: Array
    per_reading: Array
    shared: Array

    @classmethod
    def nothing(cls, count: int) -> "_Part":
        return cls(np.full(count, np.nan), np.zeros(count), np.zeros(count))

    def or_else(self, other: "_Part") -> "_Part":
        """The other's rows where this one has no number."""
        lacking = np.isnan(self.value)
        return _Part(
            np.where(lacking, other.value, self.value),
            np.where(lacking, other.per_reading, self.per_reading),
            np.where(lacking, other.shared, self.shared),
        )


def _shared_by(readings: Readings) -> str:
    """The calibration of the probe and its method, where raw records tell what they leave open."""
    calibrated = any(name.endswith(SHARED) for name in readings.columns)
    return "probe_calibration" if calibrated else "probe_length"


def _without_loss(apparent: _Part, loss: Array, loss_u: Array) -> tuple[_Part, Array]:
    """Real part: eps' = Ka - eps''^2 / (4 Ka), and what one u of the loss does to it."""
    ratio = loss / (2.0 * apparent.value)
    gain = 1.0 + np.square(ratio)
    real = to_real(apparent.value, loss)
    real = np.where(real >= VACUUM, real, np.nan)
    part = _Part(real, gain * apparent.per_reading, gain * apparent.shared)
    return part, -ratio * loss_u


def _real(readings: Readings, probe: Mapping[str, float]) -> _Part | None:
    """Real part as given."""
    if "real_permittivity" not in readings.columns:
        return None
    return _given(readings, "real_permittivity", probe)


def _given(readings: Readings, name: str, probe: Mapping[str, float]) -> _Part:
    """A column as it came; what raw records of one probe share of its uncertainty stands apart."""
    u, told = noise_of(readings, name, probe), readings.columns.get(f"{name}{SHARED}")
    if told is None:
        return _Part(readings.columns[name], u, np.zeros_like(u))
    shared = np.minimum(np.nan_to_num(told), u)
    return _Part(readings.columns[name], np.sqrt(np.square(u) - np.square(shared)), shared)


def noise_of(readings: Readings, name: str, probe: Mapping[str, float]) -> Array:
    """Per-reading standard uncertainty: the row's own, else the probe's, else zero."""
    stated = probe.get(f"{name}_u", 0.0)
    own = readings.columns.get(f"{name}_u")
    if own is None:
        return np.full(readings.count, stated)
    return np.where(np.isnan(own), stated, own)


def _apparent(readings: Readings, probe: Mapping[str, float]) -> _Part | None:
    """Apparent permittivity as given, else from the travel time along the rods."""
    direct = None
    if "apparent_permittivity" in readings.columns:
        direct = _given(readings, "apparent_permittivity", probe)
    time, length = readings.columns.get("travel_time"), probe.get("probe_length")
    if time is None or length is None:
        return direct
    index = speed_of_light * time / (2.0 * length)
    index_u = speed_of_light * noise_of(readings, "travel_time", probe) / (2.0 * length)
    shared = 2.0 * np.square(index) * probe.get("probe_length_u", 0.0) / length
    value = np.square(index)
    value = np.where(QUANTITIES["apparent_permittivity"].gate_si.excludes(value), np.nan, value)
    timed = _Part(value, 2.0 * index * index_u, shared)
    return timed if direct is None else direct.or_else(timed)


def _loss(
    readings: Readings, frequency: Array, probe: Mapping[str, float]
) -> tuple[Array | None, Array | None]:
    """Total eps'' as measured, else what the bulk conductivity makes of it; and its u."""
    measured = readings.columns.get("imaginary_permittivity")
    conductivity = readings.columns.get("bulk_conductivity")
    measured_u = noise_of(readings, "imaginary_permittivity", probe)
    if conductivity is None:
        return measured, None if measured is None else measured_u
    conducted = conduction_loss(conductivity, frequency)
    from_bulk = conduction_loss(noise_of(readings, "bulk_conductivity", probe), frequency)
    from_frequency = conducted * noise_of(readings, "frequency", probe) / frequency
    conducted_u = np.sqrt(np.square(from_bulk) + np.square(from_frequency))
    if measured is None:
        return conducted, conducted_u
    lacking = np.isnan(measured)
    return np.where(lacking, conducted, measured), np.where(lacking, conducted_u, measured_u)


def _conduction_only(readings: Readings) -> NDArray[np.bool_] | None:
    """Rows whose loss was not measured as such; None: nothing tells the loss of any row."""
    if "bulk_conductivity" not in readings.columns:
        return None
    measured = readings.columns.get("imaginary_permittivity")
    return np.ones(readings.count, dtype=bool) if measured is None else np.isnan(measured)
