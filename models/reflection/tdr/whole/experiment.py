"""A whole trace as the line model sees it: residuals and their exact derivatives."""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.special import expit

from models.reflection.tdr.probe import Cable, Head, Rods, System
from models.reflection.tdr.whole.line import (
    OPEN,
    Sensitivity,
    cable_parts,
    cable_section,
    head_section,
    reflection,
    rod_section,
)
from models.reflection.tdr.whole.medium import Polarisable
from models.reflection.tdr.whole.response import Grid, late_frequencies, late_value
from models.relation import Array, ComplexArray

SYSTEM = (
    "spread", "delay", "cable_impedance", "cable_delay", "cable_resistance", "cable_skin",
    "head_impedance", "head_delay", "rods_impedance", "rods_length",
)  # fmt: skip
"""Numbers of a system; logarithms of all but the delay, which counts in DELAY_UNIT."""
DELAY_UNIT = 1e-10
"""s"""
ALL, NONE = slice(None), slice(0)
NEGLIGIBLE = 1e-6
"""ohm and ohm s^0.5: what stands for a resistance of zero."""


def system_values(system: System) -> Array:
    """The numbers of a system, as a fit sees them."""
    cable, head, rods = system.cable, system.head, system.rods
    logs = (system.spread, cable.impedance, cable.delay, max(cable.resistance, NEGLIGIBLE),
            max(cable.skin_resistance, NEGLIGIBLE**2), head.impedance, head.delay,
            rods.impedance, rods.length)  # fmt: skip
    values = np.log(np.array(logs))
    return np.insert(values, 1, system.delay / DELAY_UNIT)


def system_of(values: Array, instrument_impedance: float) -> System:
    """The system with these numbers."""
    numbers = np.exp(np.clip(values, -80.0, 80.0)).tolist()
    (
        spread,
        _,
        cable_impedance,
        delay,
        resistance,
        skin,
        head_impedance,
        head_delay,
        rods,
        length,
    ) = numbers
    return System(
        Rods(length, rods),
        Head(head_impedance, head_delay),
        Cable(cable_impedance, delay, resistance, skin),
        instrument_impedance,
        spread,
        float(values[1]) * DELAY_UNIT,
    )


class Layers(NamedTuple):
    """Media along the rods, from the head on, and the logits of the shares of their length.

    One medium has no logit, two have one: that of the share of the first.
    """

    media: tuple[Polarisable, ...]
    logit: float = 0.0

    @property
    def shares(self) -> tuple[float, ...]:
        """Of the rods' length."""
        if len(self.media) == 1:
            return (1.0,)
        first = float(expit(self.logit))
        return (first, 1.0 - first)

    @property
    def values(self) -> Array:
        """As a fit sees them: medium by medium, then the logit."""
        parts = [medium.values for medium in self.media]
        return np.concatenate([*parts, [self.logit] * (len(self.media) - 1)])

    def with_values(self, values: Array) -> "Layers":
        """The same number of media and terms, with these numbers."""
        media, place = [], 0
        for medium in self.media:
            size = len(medium.names)
            media.append(medium.with_values(values[place : place + size]))
            place += size
        return Layers(tuple(media), float(values[-1]) if len(media) > 1 else 0.0)


def reflected(
    s: ComplexArray, system: System, layers: Layers, end: float
) -> tuple[ComplexArray, ComplexArray]:
    """Reflection of the line, and its derivatives: shape (system and layer values, frequencies)."""
    cable, rods = system.cable, system.rods
    permittivity = [medium.permittivity(s) for medium in layers.media]
    sections = [
        cable_section(s, cable),
        head_section(s, system.head),
        *(
            rod_section(s, eps, rods.impedance, rods.length * share)
            for eps, share in zip(permittivity, layers.shares, strict=True)
        ),
    ]
    value, told = reflection(system.instrument_impedance, sections, end)
    travels = [section.travel for section in sections]
    rows = [0 * s, 0 * s, *_of_cable(s, cable, told[0], travels[0])]
    rows += [told[1].impedance + 0 * s, told[1].travel * travels[1]]
    lengths = [told[k].travel * travels[k] for k in range(2, len(sections))]
    rows += [sum((one.impedance for one in told[2:]), 0 * s), sum(lengths, 0 * s)]
    for k, medium in enumerate(layers.media):
        share = 0.5 * (lengths[k] - told[k + 2].impedance) / permittivity[k]
        rows += list(medium.derivatives(s) * share)
    if len(layers.media) > 1:
        first, second = layers.shares
        rows.append(lengths[0] * second - lengths[1] * first)
    return value, np.array(rows)


def _of_cable(
    s: ComplexArray, cable: Cable, told: Sensitivity, travel: ComplexArray
) -> list[ComplexArray]:
    """Impedance, delay, resistance and skin effect of the cable."""
    series, _, resistive = cable_parts(s, cable)
    inductive = s * cable.impedance * cable.delay / series
    direct = cable.resistance**2 / (resistive * series)
    skin = s * cable.skin_resistance**2 / (resistive * series)

    def effect(on_series: ComplexArray, on_shunt: float) -> ComplexArray:
        ratio, product = 0.5 * (on_series - on_shunt), 0.5 * (on_series + on_shunt)
        return told.impedance * ratio + told.travel * travel * product

    return [effect(inductive, -1.0), effect(inductive, 1.0), effect(direct, 0.0),
            effect(skin, 0.0)]  # fmt: skip


@dataclass(frozen=True, slots=True, eq=False)
class Experiment:
    """One trace, and its late level, to be explained by the line model."""

    rho: Array
    noise: float
    grid: Grid
    late: tuple[float, float, float] | None = None
    """Level, its standard uncertainty, and the time it stands for, s."""
    end: float = OPEN
    """Reflection at the far end of the rods."""

    def explained(
        self, system: System, layers: Layers, columns: NDArray[np.intp] | slice = ALL
    ) -> tuple[Array, Array]:
        """Residuals in units of noise, and their derivatives to system and layer values.

        columns: which of the values.
        """
        s = self.grid.s
        value, rows = reflected(s, system, layers, self.end)
        step = np.exp(np.square(s * system.spread) / 2 - s * system.delay) / s
        rows[0] = value * np.square(s * system.spread)
        rows[1] = -value * s * DELAY_UNIT
        times = self.grid.to_time(np.concatenate([value[None], rows[columns]]) * step)
        residuals = (times[0] - self.rho) / self.noise
        slopes = times[1:] / self.noise
        if self.late is not None:
            level, u, time = self.late
            at, late_rows = reflected(late_frequencies(time), system, layers, self.end)
            residuals = np.append(residuals, (late_value(at) - level) / u)
            late_slopes = late_value(late_rows[columns])[:, None] / u
            slopes = np.concatenate([slopes, late_slopes], axis=-1)
        return residuals, slopes.T

    def misfit(self, system: System, layers: Layers) -> float:
        """Sum of squares of the residuals."""
        return float(np.sum(np.square(self.explained(system, layers, NONE)[0])))
