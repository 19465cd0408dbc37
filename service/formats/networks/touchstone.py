"""Touchstone 1.1 and 2.0: S-parameters of one or two ports, as network analysers write them."""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from models.relation import Array, ComplexArray
from service.formats.errors import FormatError
from service.formats.networks.options import (
    HERTZ,
    LARGEST_IMPEDANCE,
    Header,
    cells_of,
    read_keyword,
    read_options,
)

LONGEST = 1_000_000
"""Numbers that a file may hold."""
_KEYWORD = re.compile(r"\[\s*([^\]]*?)\s*\]\s*(.*)")


@dataclass(frozen=True, slots=True)
class Network:
    """What a file holds."""

    frequency: Array
    """Shape (f,), Hz."""
    parameters: ComplexArray
    """Shape (f, n, n): parameters[:, 1, 0] is S21."""
    references: tuple[float, ...]
    """Impedance that each port refers to, ohm."""
    unit: str = "GHZ"
    """Of frequency, as the option line has it."""
    option_line: int = 1
    """Where that stands, counted from 1."""

    @property
    def as_written(self) -> Array:
        """Frequencies in the unit of the file, shape (f,)."""
        return self.frequency / HERTZ[self.unit]

    @property
    def ports(self) -> int:
        """One or two."""
        return self.parameters.shape[1]


def read(text: str, ports: int) -> Network:
    """The S-parameters in a Touchstone file of so many ports, 1 or 2.

    Version 1.1 does not say how many ports it is about: its numbers must fit.
    Raises FormatError with the line of what does not fit, and how to mend it.
    """
    header = Header()
    numbers, lines = _numbers(text, header)
    if not header.options:
        raise FormatError("an option line that starts with #", "none", mend="# Hz S RI R 50")
    if header.ports is not None and header.ports != ports:
        found = f"[Number of Ports] {header.ports}"
        raise FormatError(f"a file of {ports} port{'s' * (ports > 1)}", found)
    width = 1 + 2 * _held(ports, header.matrix)
    rows = _rows(numbers, lines, width, header)
    frequency = rows[:, 0] * header.scale
    _refuse_order(frequency, lines, width, header)
    matrices = _matrices(rows[:, 1:], ports, header)
    references = _references(header, ports)
    return Network(frequency, matrices, references, header.unit, header.option_line)


def _references(header: Header, ports: int) -> tuple[float, ...]:
    """Of each port, ohm: [Reference], else R of the option line, else 50."""
    told = header.references
    if told and len(told) != ports:
        raise FormatError(f"{ports} impedances after [Reference], one for each port",
                          str(len(told)), line=header.references_line)  # fmt: skip
    for one in told:
        if not 0 < one < LARGEST_IMPEDANCE:
            raise FormatError("impedances in ohm above 0 after [Reference]", f"{one:g}",
                              line=header.references_line)  # fmt: skip
    return tuple(told) or (header.impedance,) * ports


def _numbers(text: str, header: Header) -> tuple[Array, Sequence[int]]:
    """All numbers of the network data, and the line each stands on."""
    found: list[float] = []
    lines: list[int] = []
    expecting_references = False
    for number, line in _stripped(text):
        if line.startswith("#"):
            read_options(line, number, header)
            continue
        keyword = _KEYWORD.fullmatch(line)
        if keyword:
            name, value = keyword[1].lower(), keyword[2]
            if name in {"noise data", "end"}:
                header.ended = True
                break
            expecting_references = name == "reference"
            if name == "begin information":
                expecting_references = False
            read_keyword(name, value, number, header)
            continue
        cells = cells_of(line, number)
        if expecting_references:
            header.references += cells
            continue
        found += cells
        lines += [number] * len(cells)
        if len(found) > LONGEST:
            raise FormatError(f"at most {LONGEST} numbers", "more", line=number)
    return np.array(found), lines


def _stripped(text: str) -> Iterator[tuple[int, str]]:
    """Lines that say something, without comments and without what is only information."""
    informing = False
    for number, line in enumerate(text.splitlines(), 1):
        bare = line.partition("!")[0].strip()
        lowered = re.sub(r"\s+", " ", bare).lower()
        if lowered.startswith(("[begin information]", "[end information]")):
            informing = lowered.startswith("[begin")
        elif bare and not informing:
            yield number, bare


def _held(ports: int, matrix: str) -> int:
    return ports * ports if matrix == "full" else ports * (ports + 1) // 2


def _rows(numbers: Array, lines: Sequence[int], width: int, header: Header) -> Array:
    """Shape (f, width). Noise data of version 1.1 follow where frequency falls back."""
    if header.version == "1.1":
        per_line = np.bincount(np.asarray(lines, dtype=int)) if lines else np.zeros(1, int)
        wrong = [n for n in dict.fromkeys(lines) if per_line[n] != width]
        if wrong and _is_noise(numbers, lines, wrong, width, int(per_line[wrong[0]])):
            numbers = numbers[: lines.index(wrong[0])]
        elif wrong:
            found = f"{per_line[wrong[0]]}"
            raise FormatError(f"{width} numbers", found, line=wrong[0],
                              mend="a frequency and two numbers for each S-parameter")  # fmt: skip
    if not numbers.size:
        raise FormatError(f"lines of {width} numbers", "no line of numbers at all", line=None,
                          mend="a frequency and two numbers for each S-parameter")  # fmt: skip
    if numbers.size % width:
        line = lines[-1]
        raise FormatError(f"a multiple of {width} numbers", str(numbers.size), line=line)
    rows = numbers.reshape(-1, width)
    if header.points is not None and header.points != len(rows):
        raise FormatError(f"{header.points} frequencies, as announced here", str(len(rows)),
                          line=header.points_line)  # fmt: skip
    if header.version != "1.1" and header.points is None and not header.ended:
        raise FormatError("[End] or [Number of Frequencies]", "neither: the file may be cut off",
                          line=lines[-1])  # fmt: skip
    return rows


def _is_noise(
    numbers: Array, lines: Sequence[int], wrong: Sequence[int], width: int, held: int
) -> bool:
    place = lines.index(wrong[0])
    return held == 5 and place >= width and numbers[place] <= numbers[place - width]


def _refuse_order(frequency: Array, lines: Sequence[int], width: int, header: Header) -> None:
    if frequency.size > 1 and np.any(np.diff(frequency) <= 0):
        place = int(np.argmax(np.diff(frequency) <= 0)) + 1
        raise FormatError("frequencies that rise", f"{frequency[place] / header.scale:g}",
                          line=lines[place * width])  # fmt: skip


def _matrices(cells: Array, ports: int, header: Header) -> ComplexArray:
    first, second = cells[:, 0::2], cells[:, 1::2]
    if header.form == "RI":
        values = first + 1j * second
    else:
        size = first if header.form == "MA" else 10.0 ** (np.clip(first, -600, 600) / 20)
        values = size * np.exp(1j * np.radians(second))
    if ports == 1:
        return np.asarray(values.reshape(-1, 1, 1))
    if header.matrix != "full":
        values = values[:, [0, 1, 1, 2]]
    matrices = values.reshape(-1, 2, 2)
    # S21 before S12, unless a file of version 2.0 says otherwise.
    ordered = matrices if header.order == "12_21" else matrices.swapaxes(1, 2)
    return np.asarray(ordered)
