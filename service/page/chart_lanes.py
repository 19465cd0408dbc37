"""Lanes under a panel: when each line was read, where nothing was, what carries a flag."""

from collections.abc import Sequence

import numpy as np

from service.page.axes import Axis
from service.page.chart_lines import Look
from service.page.chart_rows import Drawn
from service.page.svg import Drawing

LANE = 12.0
BAR = 5.0


def draw_lanes(
    drawing: Drawing,
    lines: Sequence[tuple[str, Drawn, Look]],
    top: float,
    time: Axis,
    hatching: str,
) -> None:
    """One lane per line, below one another: bar, hatched gap, a tick for each flagged reading."""
    for place, (name, line, look) in enumerate(lines):
        y = top + LANE * (place + 0.5)
        drawing.text(time.start - 8, y, shortened(name, 9), font_size=10, fill="#555555",
                     text_anchor="end", dominant_baseline="central")  # fmt: skip
        begin = time.place(np.append(time.low, line.gaps.end)).tolist()
        end = time.place(np.append(line.gaps.start, time.high)).tolist()
        _bars(drawing, begin, end, y, look.colour, empty=line.seconds.size == 0)
        for left, right in zip(end[:-1], begin[1:], strict=True):
            drawing.rectangle(left, y - BAR / 2, right - left, BAR, fill=hatching,
                              stroke="#8a8a8a", stroke_width=0.5)  # fmt: skip
        x = time.place(line.flagged)
        if x.size:
            up, down, apart = np.full(x.size, y - 4.5), np.full(x.size, y + 4.5), np.nan
            drawing.curve(
                np.stack([x, x, np.full(x.size, apart)], axis=1).ravel(),
                np.stack([up, down, np.full(x.size, apart)], axis=1).ravel(),
                stroke="#1c1c1c", stroke_width=1.1,
            )  # fmt: skip


def shortened(words: str, most: int) -> str:
    """At most that many characters."""
    return words if len(words) <= most else words[: most - 1] + "\N{HORIZONTAL ELLIPSIS}"


def _bars(
    drawing: Drawing, begin: list[float], end: list[float], y: float, colour: str, *, empty: bool
) -> None:
    """What was read; a single reading is a pixel wide."""
    if empty:
        return
    last = len(begin) - 1
    for place, (left, right) in enumerate(zip(begin, end, strict=True)):
        if right - left < 1.0 and place in {0, last} and last > 0:
            continue  # the edge of the chart lies in a gap
        wide = max(right - left, 1.0)
        drawing.rectangle(left, y - BAR / 2, wide, BAR, fill=colour, fill_opacity=0.85)
