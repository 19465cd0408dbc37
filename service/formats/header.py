"""Which columns of a table are ours, and what a caller should know before the first row."""

from collections.abc import Collection, Iterable, Mapping, Sequence
from difflib import get_close_matches
from types import MappingProxyType

from models.quantity import NOISE, PROBE, QUANTITIES, READING, SOIL
from service.formats.errors import HeaderError, shown

NUMBERS = tuple(name for name in READING if QUANTITIES[name].unit)
RECOGNISED = frozenset((*NUMBERS, *(f"{name}_u" for name in NOISE)))
"""Columns that are read as numbers; every other one passes through."""

NEEDED = ("apparent_permittivity", "real_permittivity", "travel_time")
"""One of these makes a row a reading."""

ESTIMATED_FROM = tuple(sorted(RECOGNISED - {"depth"}))
"""Columns that an estimate may rest on."""
LONGEST = 80
"""Characters of a name that are compared."""

FLAGS = "flags"
MOST_COLUMNS = 1000

_DESCRIBES: Mapping[str, str] = MappingProxyType(
    {
        **dict.fromkeys(("texture", *SOIL, *(f"{name}_u" for name in SOIL)), "soil"),
        **{
            spelling: "probe"
            for name in PROBE
            if name not in READING
            for spelling in (name, f"{name}_u")
        },
    }
)
_SYMBOLS = MappingProxyType({QUANTITIES[name].symbol.lower(): name for name in NUMBERS})
_SYMBOL = MappingProxyType({name: QUANTITIES[name].symbol.casefold() for name in NUMBERS})
_WIDTHS = ("_std", "_sd", "_stdev", "_stddev", "_sigma", "_se", "_err", "_error", "_unc",
           "_uncertainty")  # fmt: skip
"""Other endings of a column that holds a standard uncertainty."""
_SAID = MappingProxyType(
    dict.fromkeys(
        ("permittivity", "dielectric_permittivity", "dielectric_constant", "epsilon", "dielectric"),
        "apparent_permittivity",
    )
    | dict.fromkeys(
        ("ec", "bulk_ec", "ec_bulk", "electrical_conductivity", "conductivity"),
        "bulk_conductivity",
    )
    | dict.fromkeys(("temp", "soil_temp", "soil_temperature"), "temperature")
)
"""Other words for what is measured, where one of ours is most likely meant."""


def folded(name: str) -> str:
    """A column name as it is compared: without blanks around it, in lower case."""
    return name.strip().casefold()


def recognised(names: Sequence[str], appends: Collection[str], line: int) -> dict[str, int]:
    """The place of every column that is read, by quantity name or name_u.

    names: as they stand in the table. appends: what the answer adds, besides its flags.
    Raises HeaderError where a column is named twice, describes the soil or the probe, or has the
    name of a column of the answer.
    """
    found: dict[str, int] = {}
    for place, written in enumerate(names):
        name = folded(written)
        if name == FLAGS or name in appends:
            raise HeaderError(
                "names that the answer does not use", shown(written), line=line, column=written,
                mend="the answer appends a column of this name: rename yours, or leave it out",
            )  # fmt: skip
        if name in _DESCRIBES:
            raise HeaderError(
                "what varies from reading to reading", shown(written), line=line, column=written,
                mend=f"it describes the {_DESCRIBES[name]}: give it in the query, or rename the "
                "column",
            )  # fmt: skip
        if name in found:
            raise HeaderError(
                "each column once", f"{shown(names[found[name]])} and {shown(written)}",
                line=line, column=written, mend="rename one of them, or leave it out",
            )  # fmt: skip
        if name in RECOGNISED:
            found[name] = place
    return found


def likely(name: str, known: Sequence[str]) -> list[str]:
    """The known names that a name may stand for, most likely first; at most two."""
    written = folded(name)
    symbols = [other for other in known if _SYMBOL.get(other) == written]
    other_words = {_SAID.get(written), _width(written)}
    said = [other for other in known if other in other_words]
    close = get_close_matches(written[:LONGEST], known, n=4, cutoff=0.65)
    alike = [other for other in close if other.endswith("_u") == written.endswith("_u")]
    begun = [other for other in known if len(written) > 3 and other.startswith(written)]
    return list(dict.fromkeys(symbols or [*said, *alike] or begun[:1]))[:2]


def _width(written: str) -> str | None:
    """The name of the uncertainty that a column with another ending states."""
    ending = next((word for word in _WIDTHS if written.endswith(word)), None)
    if ending is None:
        return None
    stem = written.removesuffix(ending)
    return f"{_SAID.get(stem, stem)}_u"


def not_read(names: Iterable[str], read: Collection[str]) -> list[tuple[str, list[str]]]:
    """Columns that pass through though one of ours is likely meant, each with what that may be.

    names: as they stand in the table. read: names of the columns that are read.

    What is read already cannot be meant as well, and a depth is of no consequence to an estimate.
    """
    found = []
    for name in names:
        if folded(name) not in read:
            meant = likely(name, ESTIMATED_FROM)
            if meant and meant[0] not in read:
                found.append((name, [other for other in meant if other not in read]))
    return found


def alone(names: Collection[str]) -> list[str]:
    """Uncertainties among some names whose quantity is not among them."""
    about = ((name, name.removesuffix("_u")) for name in names if name in RECOGNISED)
    return [name for name, stem in about if name != stem and stem not in names]


def meant_by(name: str) -> str | None:
    """The quantity that people write so; None where no one is known."""
    return _SAID.get(folded(name)) or _SYMBOLS.get(folded(name))


def check_width(names: Sequence[str], line: int) -> None:
    """Raise HeaderError for more columns than are taken."""
    if len(names) > MOST_COLUMNS:
        raise HeaderError(f"at most {MOST_COLUMNS} columns", str(len(names)), line=line)


def check_separator(text: str, names: Sequence[str], line: int) -> None:
    """Raise HeaderError where a header is written with another separator than the comma."""
    for separator, spelt in ((";", "semicolons"), ("\t", "tabs")):
        if text.count(separator) >= len(names) and not any(
            folded(name) in RECOGNISED for name in names
        ):
            raise HeaderError(
                "commas between the cells", spelt, line=line,
                mend="save the table with commas between the cells and points in the numbers",
            )  # fmt: skip


def check_permittivity(
    names: Sequence[str], found: Iterable[str], line: int, kind: str = "column"
) -> None:
    """Raise HeaderError unless there is something to convert, with the column perhaps meant.

    kind: what names stand on.
    """
    if not any(name in NEEDED for name in found):
        listed = ", ".join(shown(name) for name in names[:20]) + (", ..." if names[20:] else "")
        raise HeaderError(
            f"a {kind} {' or '.join(NEEDED)}", f"the {kind}s {listed}" if names else "none",
            line=line,
            mend=_likely(names, kind),
        )  # fmt: skip


def check_keys(names: Sequence[str], found: Iterable[str], line: int, text: str) -> None:
    """As check_permittivity, for the keys on lines of NDJSON; text: of the first of them."""
    begins = text.lstrip()[:1]
    if not names and begins == "[":
        raise HeaderError(
            "a JSON object on each line", "a JSON array", line=line,
            mend="send one object on each line without commas between them, or as application/json "
            'an object with "readings"',
        )  # fmt: skip
    check_permittivity(names, found, line, "key" if names else "JSON object with a key")


def _likely(names: Sequence[str], kind: str) -> str:
    if kind == "column" and names and names[0].lstrip()[:1] in {"{", "["}:
        return "this looks like JSON: send it as application/json, or line by line as NDJSON"
    if kind == "key" and "readings" in names:
        return "this looks like a whole request: send it as application/json"
    for written in names:
        name = folded(written)
        meant = meant_by(name) or next(iter(get_close_matches(name[:LONGEST], NEEDED, n=1)), None)
        if meant in NEEDED:
            return f"is {shown(written)} the {meant}? then name it so"
    if any(name.strip()[:1].isdigit() for name in names):
        return "the first line must name the columns"
    return f"name the {kind.rpartition(' ')[2]} that holds the permittivity so"
