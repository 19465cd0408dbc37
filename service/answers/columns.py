"""The columns that an answer may append to a table, and those that are asked for."""

from models.quantity import QUANTITIES, band_names
from service.errors import Unprocessable
from service.faults import Fault, nearest, shown
from service.formats.header import FLAGS

CONDUCTIVITIES = (
    "bulk_conductivity_25", "pore_water_conductivity", "saturation_extract_conductivity",
)  # fmt: skip
APPENDED = frozenset({
    "conduction_correction",
    "model_spread",
    *band_names("water_content"),
    *(name for quantity in CONDUCTIVITIES for name in band_names(quantity)),
})  # fmt: skip
"""Every column an answer may append, so that no table already has one of the name."""
OFFERED = (
    f"water_content, {', '.join(CONDUCTIVITIES)}, each of them with _u, _u_shared, _lower, _upper; "
    f"conduction_correction, model_spread and {FLAGS}"
)
"""The same in words."""


def wanted_columns(text: str | None) -> tuple[str, ...] | None:
    """Names of the columns to append; None: all of them.

    Raises Unprocessable for a name that no answer has.
    """
    if text is None:
        return None
    names = tuple(dict.fromkeys(name.strip() for name in text.split(",") if name.strip()))
    if not names:
        detail = f"columns is empty: leave it out for all columns, or name some of {OFFERED}"
        raise Unprocessable(detail, [Fault(detail, "?columns")])
    faults = [
        Fault(f"no answer has a column {shown(name)}; {_meant(name)}", "?columns")
        for name in names
        if name not in APPENDED and name != FLAGS
    ]
    if faults:
        raise Unprocessable("columns names what no answer has", faults)
    return tuple(name for name in names if name != FLAGS)


def _meant(name: str) -> str:
    """The column that is most likely meant, or those there are."""
    symbols = {QUANTITIES[each].symbol.casefold(): each for each in QUANTITIES if each in APPENDED}
    meant = symbols.get(name.casefold()) or nearest(name, APPENDED)
    return f"did you mean {meant}?" if meant else f"there are {OFFERED}"
