"""Moments from which on a line rests on another soil or probe: a thin rule, with a word."""

from collections.abc import Sequence
from dataclasses import dataclass

from service.page.axes import Axis
from service.page.chart_lanes import shortened
from service.page.svg import Drawing

MOST = 20
"""Rules in one chart; of more, the first ones."""
ROWS, ROW = 4, 13.0
"""Rows that the words of neighbouring rules take turns in, and their height in pixels."""


@dataclass(frozen=True, slots=True)
class Change:
    """What changed, and when, s since the epoch."""

    seconds: float
    words: str


def draw_changes(
    drawing: Drawing,
    changes: Sequence[Change],
    time: Axis,
    panel: tuple[float, float],
    *,
    named: bool,
) -> None:
    """A rule over a panel for each change that the axis shows.

    panel: its top and height. named: whether the words stand beside the rules.
    """
    top, height = panel
    shown = [change for change in changes if time.low <= change.seconds <= time.high]
    for place, change in enumerate(shown[:MOST]):
        x = float(time.place(change.seconds))
        drawing.line(x, top, x, top + height, stroke="#1c1c1c", stroke_width=0.8,
                     stroke_dasharray="2 2")  # fmt: skip
        if named:
            late = x > 0.5 * (time.start + time.end)
            drawing.text(x - 4 if late else x + 4, top + 12 + ROW * (place % ROWS),
                         shortened(change.words, 40), font_size=11, fill="#1c1c1c",
                         text_anchor="end" if late else "start")  # fmt: skip
