"""Everything this package raises.

ModelError
    UnknownName        no member of that registry has that key
    UnknownUnit        no such unit, or one of the wrong dimension
    ParameterError     a parameter is missing, unknown, or out of its range
    ReadingError       the columns of a request do not fit together
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass


class ModelError(ValueError):
    """The request cannot be computed as asked; the message says what to change."""


class UnknownName(ModelError):
    """No member of that registry has that key."""

    def __init__(self, family: str, key: str, known: Iterable[str]) -> None:
        super().__init__(f"no {family} is called {key!r}; choose one of {', '.join(known)}")
        self.family, self.key = family, key


class UnknownUnit(ModelError):
    """No such unit, or one of the wrong dimension."""

    def __init__(self, quantity: str, unit: str, known: Iterable[str]) -> None:
        super().__init__(f"{quantity} cannot be in {unit!r}; it takes {', '.join(known)}")
        self.quantity, self.unit = quantity, unit


@dataclass(frozen=True, slots=True)
class Complaint:
    """One thing that is wrong, the name it is about, and the steps to its place in a request."""

    name: str
    detail: str
    place: tuple[str, ...] = ()


class ParameterError(ModelError):
    """A parameter is missing, unknown, or out of its range."""

    def __init__(self, owner: str, complaints: Sequence[Complaint]) -> None:
        super().__init__(f"{owner}: " + "; ".join(c.detail for c in complaints))
        self.owner, self.complaints = owner, tuple(complaints)


class ReadingError(ModelError):
    """The columns of a request do not fit together."""
