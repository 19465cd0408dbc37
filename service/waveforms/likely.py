"""Numbers of a probe that were written in another unit: what was found, expected, and meant."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from models.errors import Complaint, ParameterError

Place = tuple[int | str, ...]


@dataclass(frozen=True, slots=True)
class Gate:
    """What a number can be, and how it is often written instead."""

    low: float
    high: float
    unit: str
    others: Mapping[str, float]
    """Units by code, each with what it is in ``unit``."""

    def fault(self, name: str, value: float) -> str:
        """What is wrong with a value; empty: nothing."""
        if self.low <= value <= self.high:
            return ""
        meant = [(code, value * scale) for code, scale in self.others.items()
                 if self.low <= value * scale <= self.high]  # fmt: skip
        looks = f"; looks like {meant[0][0]}: send {meant[0][1]:.6g}" if meant else ""
        return (
            f"expected {name} from {self.low:g} to {self.high:g} {self.unit}, found {value:g}"
            f"{looks}"
        )


_SHORT = {"mm": 1e-3, "cm": 1e-2}
_LONG = {"cm": 1e-2, "mm": 1e-3}
GATES: Mapping[Place, Gate] = {
    ("probe", "probe_impedance"): Gate(10.0, 1000.0, "Ohm", {"kOhm": 1e3}),
    ("probe", "instrument_impedance"): Gate(10.0, 1000.0, "Ohm", {"kOhm": 1e3}),
    ("probe", "rise_time"): Gate(0.005, 20.0, "ns", {"ps": 1e-3, "s": 1e9}),
    ("probe", "probe_offset"): Gate(0.0, 3.0, "m", _SHORT),
    ("probe", "series_resistance"): Gate(0.0, 200.0, "Ohm", {"mOhm": 1e-3}),
    ("probe", "cable", "length"): Gate(0.0, 500.0, "m", _LONG),
    ("probe", "cable", "impedance"): Gate(10.0, 1000.0, "Ohm", {"kOhm": 1e3}),
    ("probe", "head", "length"): Gate(0.0, 1.0, "m", _SHORT),
    ("probe", "head", "impedance"): Gate(10.0, 1000.0, "Ohm", {"kOhm": 1e3}),
    ("probe", "rods", "diameter"): Gate(1e-4, 0.1, "m", _SHORT),
    ("probe", "rods", "spacing"): Gate(1e-3, 0.5, "m", _SHORT),
    ("inserted_length",): Gate(0.0, 10.0, "m", _SHORT),
    ("frequency",): Gate(1e6, 1e11, "Hz", {"GHz": 1e9, "MHz": 1e6, "kHz": 1e3}),
}  # fmt: skip
"""By the steps to it in the settings of a request."""


def refuse_unlikely(settings: Any, place: Place = ()) -> None:
    """Refuse what no probe is, with the unit that was probably meant.

    settings: a checked body. place: the steps to it in the request.
    Raises ParameterError with every complaint.
    """
    complaints = [
        Complaint(str(steps[-1]), detail, tuple(map(str, (*place, *steps))))
        for steps, value in _stated(settings)
        if (detail := GATES[steps].fault(str(steps[-1]), value))
    ]
    if complaints:
        raise ParameterError("probe", complaints)


def _stated(settings: Any) -> Iterator[tuple[Place, float]]:
    for steps in GATES:
        value = settings
        for step in steps:
            value = None if value is None else getattr(value, str(step))
        if value is not None:
            yield steps, float(value)
