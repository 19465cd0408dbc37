"""Phases that were probably written in radians: certain where physics says so, else told."""

from collections.abc import Iterable
from typing import Protocol

import numpy as np

from models.advisories import Advice, advise
from models.reflection.propagation import turn_through_air
from models.relation import Array, column
from service.sweeps.bodies import ComplexColumn, OnePortSweep
from service.sweeps.values import Place, refuse

FEWEST = 8
"""Points of a sweep from which its phases are judged."""
LARGEST = np.pi + 1e-3
"""Of a phase in radians that runs from -pi to pi."""
LEAST = 0.1
"""Below which, in degrees as in radians, a phase is about nothing."""
BEHIND = 90.0
"""Degrees, least phase of a reflection by what slows a wave more than air does."""


def columns_of(*sweeps: OnePortSweep | None) -> list[ComplexColumn]:
    """What sweeps hold as numbers, repeats one by one."""
    found: list[ComplexColumn] = []
    for sweep in sweeps:
        given = None if sweep is None else sweep.reflection
        found += [given] if isinstance(given, ComplexColumn) else given or []
    return found


class Phased(Protocol):
    """Complex numbers, perhaps by their phases."""

    @property
    def degrees(self) -> list[float] | None:
        """One for each frequency."""


def within_pi(given: Iterable[Phased]) -> float | None:
    """Largest phase where all were sent as degrees and none leaves -pi to pi; else None."""
    phases = [one.degrees for one in given]
    if not phases or any(one is None or len(one) < FEWEST for one in phases):
        return None
    largest = max(float(np.abs(column(one or [])).max()) for one in phases)
    return largest if LEAST < largest <= LARGEST else None


def suspicion(given: Iterable[Phased]) -> tuple[Advice, ...]:
    """An advisory where phases may be radians; empty: they are not."""
    largest = within_pi(given)
    return () if largest is None else (advise("phase-unit-suspected", largest=f"{largest:.4g}"),)


def refuse_ahead(given: ComplexColumn, place: Place) -> None:
    """Refuse phases of a filled line that are within pi: more than air reflects from behind 90."""
    largest = within_pi([given])
    if largest is not None:
        expected = f"a filling turns a reflection by {BEHIND:g} to 180 degrees"
        raise refuse(_radians(largest, expected), (*place, "degrees"))


def refuse_fast(given: ComplexColumn, frequency: Array, length: float, place: Place) -> None:
    """Refuse phases of what passed a length, m, that turn less than nothing would."""
    largest, turn = within_pi([given]), turn_through_air(frequency, length)
    if largest is not None and turn > 2 * LARGEST:
        expected = f"{length:g} m of air alone turn a wave by {turn:.4g} degrees at the end of it"
        raise refuse(_radians(largest, expected), (*place, "degrees"))


def _radians(largest: float, expected: str) -> str:
    return (
        f"no phase leaves -3.1416 to 3.1416 all along the sweep, found {largest:.4g} at most, and "
        f"{expected}: these look like radians; send degrees (radians times 57.29578), or real and "
        "imaginary parts"
    )
