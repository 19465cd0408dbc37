"""What the lines before the data of a Touchstone file say: options and keywords."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

import numpy as np

from service.formats.errors import FormatError, shown

HERTZ: Mapping[str, float] = {"HZ": 1.0, "KHZ": 1e3, "MHZ": 1e6, "GHZ": 1e9}
FORMS = ("DB", "MA", "RI")
LARGEST_IMPEDANCE = 1e6
"""ohm"""
PARAMETERS = ("S", "Y", "Z", "G", "H")


@dataclass(slots=True)
class Header:
    """What the lines before the data say."""

    unit: str = "GHZ"
    option_line: int = 1
    form: str = "MA"
    impedance: float = 50.0
    options: bool = False
    version: str = "1.1"
    ports: int | None = None
    points: int | None = None
    points_line: int = 1
    ended: bool = False
    order: str = "21_12"
    matrix: str = "full"
    references: list[float] = field(default_factory=list)
    references_line: int = 1

    @property
    def scale(self) -> float:
        """Hz in the unit of frequency."""
        return HERTZ[self.unit]


def cells_of(line: str, number: int) -> list[float]:
    """Numbers of a line. Raises FormatError."""
    try:
        cells = [float(cell) for cell in line.split()]
    except ValueError:
        raise FormatError(
            "numbers", shown(line), line=number, mend="comments start with !"
        ) from None
    if not np.isfinite(cells).all():
        raise FormatError("finite numbers", shown(line), line=number)
    return cells


def read_options(line: str, number: int, header: Header) -> None:
    """Unit, parameter, format and R, in any order; only the first such line counts."""
    if header.options:
        return
    header.options, header.option_line = True, number
    words = iter(line[1:].upper().split())
    for word in words:
        if word in HERTZ:
            header.unit = word
        elif word in FORMS:
            header.form = word
        elif word == "R":
            header.impedance = _positive(next(words, ""), number)
        elif word in PARAMETERS and word != "S":
            raise FormatError("S-parameters", f"{word}-parameters", line=number,
                              mend="export S-parameters")  # fmt: skip
        elif word != "S":
            raise FormatError("a unit, S, a format and R", shown(word), line=number,
                              mend="# Hz S RI R 50")  # fmt: skip


def _positive(word: str, number: int) -> float:
    try:
        value = float(word)
    except ValueError:
        value = -1.0
    if not 0 < value < LARGEST_IMPEDANCE:
        raise FormatError("an impedance in ohm above 0 after R", shown(word), line=number)
    return value


def _whole(value: str, number: int) -> int:
    if not value.isdecimal():
        raise FormatError("a whole number", shown(value), line=number)
    return int(value[:9])


def _one_of(value: str, known: tuple[str, ...], number: int) -> str:
    if value not in known:
        raise FormatError(f"one of {', '.join(known)}", shown(value), line=number)
    return value


def read_keyword(name: str, value: str, number: int, header: Header) -> None:
    """What a keyword in brackets says, its name in lower case. Raises FormatError."""
    if name == "mixed-mode order":
        raise FormatError("single-ended ports", "[Mixed-Mode Order]", line=number)
    read = KEYWORDS.get(name)
    if read is None:
        raise FormatError("a keyword of Touchstone 2.0", shown(f"[{name}]"), line=number,
                          mend="comments start with !")  # fmt: skip
    read(header, value, number)


def _version(header: Header, value: str, number: int) -> None:
    _one_of(value, ("2.0", "2.1"), number)
    header.version = "2.0"


def _ports(header: Header, value: str, number: int) -> None:
    header.ports = _whole(value, number)


def _points(header: Header, value: str, number: int) -> None:
    header.points, header.points_line = _whole(value, number), number


def _order(header: Header, value: str, number: int) -> None:
    header.order = _one_of(value, ("21_12", "12_21"), number)


def _matrix(header: Header, value: str, number: int) -> None:
    header.matrix = _one_of(value.lower(), ("full", "lower", "upper"), number)


def _reference(header: Header, value: str, number: int) -> None:
    header.references += cells_of(value, number)
    header.references_line = number


def _nothing(header: Header, value: str, number: int) -> None:
    """What is said there is not needed."""


KEYWORDS: Mapping[str, Callable[[Header, str, int], None]] = MappingProxyType({
    "version": _version, "number of ports": _ports, "number of frequencies": _points,
    "two-port data order": _order, "matrix format": _matrix, "reference": _reference,
    "network data": _nothing,
    "number of noise frequencies": _nothing,
})  # fmt: skip
"""Every keyword before the data, and what is done with it."""
