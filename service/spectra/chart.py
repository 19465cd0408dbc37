"""The chart of a spectrum: points, fit and band in any view, over frequency or part over part."""

import numpy as np

from models.relation import Array, ComplexArray
from models.spectrum import Interpretation
from models.spectrum.description import spread
from models.spectrum.fit import Fit
from models.spectrum.form import Form, evaluate
from models.spectrum.views import VIEWS, View, seen_as, sensitivity
from service.page.plot import Panel, Series, plot
from service.spectra.bodies import SpectraBody

POINTS = 240
"""Of a fitted line."""
DECADES = 1.5
"""Span of a part beyond which its axis is logarithmic."""
LEAST = 1e-5
"""Of the largest magnitude, what an axis spans at least: less is rounding."""
MHZ = 1e6
STILL = "without conduction"
UNITS = {"1": "", "Ohm": " in Ohm", "S": " in S"}


def chart_of(found: Interpretation, body: SpectraBody, cell: float) -> str:
    """The chart that a request asks for, as an SVG document. cell: F."""
    view, fit = VIEWS[body.chart.view], found.choice.fit
    lines = _series(found, view, cell, over_frequency=body.chart.plane == "frequency")
    subtitle = (
        f"{len(fit.spectrum.frequency)} points, fitted by {fit.form.title}; residuals "
        f"{100 * fit.relative_residual:.2g} % of |\N{GREEK SMALL LETTER EPSILON}|"
    )
    probability = 100 * body.coverage_probability
    notes = []
    if body.chart.plane == "frequency":
        notes.append(f"The band holds the fitted curve with a probability of {probability:g} %.")
    if view.unit != "1":
        notes.append(f"Capacitance of the empty cell: {cell:.4g} F.")
    title = f"{view.key.capitalize()} of a cell" if view.unit != "1" else view.key.capitalize()
    if body.chart.plane == "complex":
        panels = [_plane(view, lines)]
    else:
        panels = [_part(view, lines, 0), _part(view, lines, 1)]
    return plot(panels, title=title, subtitle=subtitle, notes=notes)


class _Line:
    """One named spectrum in a view: complex values, and the band of both parts where it has one."""

    def __init__(
        self, name: str, frequency: Array, values: ComplexArray, half: tuple[Array, Array] | None
    ) -> None:
        self.name, self.frequency, self.values, self.half = name, frequency, values, half

    def part(self, place: int, *, down: bool) -> Array:
        values = (self.values.real, self.values.imag)[place]
        return np.asarray(-values if down and place else values)


def _series(found: Interpretation, view: View, cell: float, *, over_frequency: bool) -> list[_Line]:
    fit, spectrum = found.choice.fit, found.choice.fit.spectrum
    f = spectrum.frequency
    lines = [_Line("measured", f, seen_as(view.key, spectrum.permittivity, f, cell), None)]
    fine = np.geomspace(f.min(), f.max(), POINTS)
    eps, slopes = evaluate(fit.form, fit.vector, fine)
    slopes = slopes * sensitivity(view.key, eps, fine, cell)[:, None]
    half = tuple(found.curve.factor * u for u in spread(fit, slopes))
    values = seen_as(view.key, eps, fine, cell)
    lines.append(_Line("fitted", fine, values, (half[0], half[1]) if over_frequency else None))
    if fit.form.conduction and view.key == "permittivity":
        lines.append(_Line(STILL, fine, _still(fit, fine), None))
    return lines


def _still(fit: Fit, frequency: Array) -> ComplexArray:
    """What is left of the fitted permittivity without conduction and electrodes."""
    bare = Form(fit.form.terms, conduction=False, electrode=False)
    kept = [place for place, slot in enumerate(fit.form.slots) if slot in bare.slots]
    return evaluate(bare, fit.vector[kept], frequency)[0]


def _label(view: View, place: int) -> str:
    """Name of a part with its sign and unit."""
    stroke = "\N{PRIME}" if place == 0 else "\N{DOUBLE PRIME}"
    sign = "" if place == 0 or not view.downward or view.key == "permittivity" else "-"
    symbol = "\N{GREEK SMALL LETTER EPSILON}" if view.symbol == "eps" else view.symbol
    words = ("real part", "loss") if view.key == "permittivity" else ("real part", "imaginary part")
    return f"{view.key.capitalize()}, {words[place]} {sign}{symbol}{stroke}{UNITS[view.unit]}"


def _part(view: View, lines: list[_Line], place: int) -> Panel:
    values = [line.part(place, down=view.downward) for line in lines]
    drawn = np.concatenate(values[:2])
    positive = bool(np.all(drawn > 0)) and float(np.ptp(drawn)) > LEAST * _size(lines)
    wide = positive and np.log10(drawn.max() / drawn.min()) > DECADES
    series = []
    for line, part in zip(lines, values, strict=True):
        half = None if line.half is None else line.half[place]
        kept = np.where(part >= 0.3 * drawn.min(), part, np.nan) if wide else part
        if place == 0 and line.name == STILL:
            continue
        series.append(
            Series(line.name, line.frequency / MHZ, kept, measured=line.name == "measured",
                   lower=None if half is None else part - half,
                   upper=None if half is None else part + half)
        )  # fmt: skip
    return Panel("Frequency in MHz", _label(view, place), series, x_logarithmic=True,
                 y_logarithmic=wide, y_least=LEAST * _size(lines))  # fmt: skip


def _size(lines: list[_Line]) -> float:
    """Largest magnitude of what is drawn."""
    sizes = np.abs(np.concatenate([line.values for line in lines]))
    return float(np.nanmax(sizes)) if np.isfinite(sizes).any() else 0.0


def _plane(view: View, lines: list[_Line]) -> Panel:
    series = [
        Series(line.name, line.part(0, down=view.downward), line.part(1, down=view.downward),
               measured=line.name == "measured")
        for line in lines
    ]  # fmt: skip
    return Panel(_label(view, 0), _label(view, 1), series, one_scale=True)
