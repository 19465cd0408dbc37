"""The key of a chart: what each line looks like, and what band, ring, tick and hatching mean."""

from collections.abc import Mapping

import numpy as np

from service.page.chart_lanes import shortened
from service.page.chart_lines import Look
from service.page.svg import Drawing

ROW, SAMPLE = 22.0, 34.0


def draw_key(
    drawing: Drawing, looks: Mapping[str, Look], x: float, y: float, hatching: str
) -> None:
    """A column of samples with their names, from the upper left corner (x, y) down."""
    middle = np.array([x + SAMPLE / 2])
    for name, look in looks.items():
        dash = {"stroke_dasharray": look.dash} if look.dash else {}
        drawing.line(x, y, x + SAMPLE, y, stroke=look.colour, stroke_width=1.8, **dash)
        drawing.markers(look.shape, middle, np.array([y]), fill=look.colour, stroke=look.colour,
                        stroke_width=1.2)  # fmt: skip
        _name(drawing, x, y, shortened(name, 13))
        y += ROW
    y += ROW / 2
    drawing.rectangle(x, y - 6, SAMPLE, 12, fill="#555555", fill_opacity=0.13, stroke="#555555",
                      stroke_width=0.7)  # fmt: skip
    _name(drawing, x, y, "band")
    y += ROW
    drawing.markers("circle", middle - 7, np.array([y]), fill="#ffffff", stroke="#1c1c1c",
                    stroke_width=1.1)  # fmt: skip
    drawing.line(x + 26, y - 4.5, x + 26, y + 4.5, stroke="#1c1c1c", stroke_width=1.1)
    _name(drawing, x, y, "flagged")
    y += ROW
    drawing.rectangle(x, y - 3, SAMPLE, 6, fill=hatching, stroke="#8a8a8a", stroke_width=0.5)
    _name(drawing, x, y, "gap")


def _name(drawing: Drawing, x: float, y: float, words: str) -> None:
    drawing.text(x + SAMPLE + 8, y, words, font_size=12, fill="#1c1c1c",
                 dominant_baseline="central")  # fmt: skip
