"""The permittivity of a standard: of its name and temperature, or as the caller says."""

import numpy as np

from models.conversion import Units, unit_of
from models.quantity import QUANTITIES
from models.reflection.tip.media import MEDIA, ROOM, Known, Relaxation
from models.relation import Array, column
from models.units import UNITS
from service.faults import hint
from service.sweeps.bodies import Numbers, StandardBody
from service.sweeps.values import Place, refuse

ALIASES = {"open": "air"}
DECI = 0.1  # S/m in a dS/m
PICO = 1e-12
MOST_SALT = 9.9  # S/m at 25 Cel, saturated for the model of salt water


def known_of(body: StandardBody, frequency: Array, units: Units, place: Place) -> Known:
    """The permittivity of a standard over frequency, Hz, with what is not known of it.

    Raises Unprocessable that names what is missing.
    """
    found = _own(body, frequency, place) or _named(body, frequency, units, place)
    if body.relative_uncertainty is not None:
        return found.within(body.relative_uncertainty)
    return found


def _own(body: StandardBody, frequency: Array, place: Place) -> Known | None:
    """As the caller states it."""
    given = body.real_permittivity is not None or body.imaginary_permittivity is not None
    if given and body.relaxation is not None:
        detail = "send real_permittivity and imaginary_permittivity, or relaxation, not both"
        raise refuse(detail, (*place, "relaxation"))
    if body.relaxation is not None:
        it = body.relaxation
        debye = Relaxation(
            it.static_permittivity, it.infinite_permittivity, PICO * it.relaxation_time,
            DECI * it.conductivity,
        )  # fmt: skip
        return Known(debye.permittivity(frequency))
    if not given:
        return None
    if body.real_permittivity is None:
        raise refuse("real_permittivity is missing", (*place, "real_permittivity"))
    real = _column(body.real_permittivity, frequency.size, (*place, "real_permittivity"))
    at = (*place, "imaginary_permittivity")
    loss = _column(body.imaginary_permittivity or 0.0, frequency.size, at)
    if np.any(real <= 0):
        raise refuse("a real permittivity is above 0", (*place, "real_permittivity"))
    if np.any(loss < 0):
        raise refuse("loss is eps'' of eps = eps' - j eps'', 0 or above", at)
    return Known(real - 1j * loss)


def _column(given: float | Numbers, count: int, place: Place) -> Array:
    values = column(given)
    if values.ndim and values.size != count:
        raise refuse(f"has {values.size} values where frequency has {count}", place)
    return np.broadcast_to(values, (count,))


def _named(body: StandardBody, frequency: Array, units: Units, place: Place) -> Known:
    name = ALIASES.get(body.name, body.name)
    if name not in MEDIA:
        known = ("short", "open", "load", *MEDIA)
        detail = (
            f"no standard is called {body.name!r}{hint(body.name, known)}; known are "
            f"{', '.join(known)}; for another give real_permittivity or relaxation"
        )
        raise refuse(detail, (*place, "name"))
    medium = MEDIA[name]
    if medium.needs_temperature and body.temperature is None:
        detail = f"temperature is missing: the permittivity of {name} depends on it [Cel]"
        raise refuse(detail, (*place, "temperature"))
    if medium.needs_conductivity and not body.conductivity_25:
        detail = f"conductivity_25 is missing: {name} water needs it [dS/m at 25 Cel]"
        raise refuse(detail, (*place, "conductivity_25"))
    salt = DECI * (body.conductivity_25 or 0.0)
    if salt > MOST_SALT:
        detail = f"expected at most {MOST_SALT / DECI:g} dS/m, found {body.conductivity_25:g}"
        raise refuse(detail, (*place, "conductivity_25"))
    unit = unit_of("temperature", units)
    warmth = ROOM if body.temperature is None else float(unit.to_si(body.temperature))
    gate = QUANTITIES["temperature"].gate_si
    if body.temperature is not None and gate.excludes(warmth):
        meant = QUANTITIES["temperature"].likely_unit(warmth, unit.code)
        mend = ""
        if meant:
            sent = float(UNITS[meant].to_si(body.temperature))
            mend = f': that looks like {meant}; send {sent:g}, or name the unit: "units": '
            mend += f'{{"temperature": "{meant}"}}'
        raise refuse(
            f"expected temperature from {gate.low:g} to {gate.high:g} Cel, found "
            f"{body.temperature:g} {unit.code}{mend}",
            (*place, "temperature"),
        )
    return medium.known(frequency, warmth, salt, float(unit.width_to_si(body.temperature_u or 0.0)))
