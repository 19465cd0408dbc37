"""SVG, element by element: shapes, areas and escaped text, no script, the same bytes each time."""

import re
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from html import escape

import numpy as np

from models.relation import Array

MEDIA_TYPE = "image/svg+xml"
FONT = "system-ui, 'Segoe UI', Helvetica, Arial, sans-serif"
_NOT_XML = re.compile("[^\t\n\r\x20-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
_SHAPES = {
    "circle": "M-3.2 0a3.2 3.2 0 1 0 6.4 0a3.2 3.2 0 1 0 -6.4 0z",
    "square": "M-2.9 -2.9h5.8v5.8h-5.8z",
    "triangle": "M0 -3.8l3.6 6.4h-7.2z",
    "diamond": "M0 -4.2l3.4 4.2l-3.4 4.2l-3.4 -4.2z",
    "wedge": "M0 3.8l3.6 -6.4h-7.2z",
    "cross": "M-3 -3l6 6M3 -3l-6 6",
    "plus": "M-3.8 0h7.6M0 -3.8v7.6",
}
SHAPES = tuple(_SHAPES)
"""Markers, told apart without colour."""


def safe(words: object) -> str:
    """Text as it may stand in an element or an attribute, whatever it holds."""
    return escape(_NOT_XML.sub("\N{REPLACEMENT CHARACTER}", str(words)), quote=True)


def number(value: float) -> str:
    """A coordinate, to a tenth of a pixel."""
    text = f"{value:.1f}"
    return "0" if text == "-0.0" else text.removesuffix(".0")


class Drawing:
    """An SVG document that grows from back to front.

    Style goes by keyword, with underscores for dashes: ``stroke_width=1.5``. Coordinates are pixels
    from the upper left; arrays of them are broken where they hold NaN.
    """

    def __init__(self, width: float, height: float, *, title: str, description: str = "") -> None:
        size = f'width="{number(width)}" height="{number(height)}"'
        self._parts = [
            f'<svg xmlns="http://www.w3.org/2000/svg" {size} role="img" '
            f'viewBox="0 0 {number(width)} {number(height)}" font-family="{FONT}">',
            f"<title>{safe(title)}</title>",
        ]
        if description:
            self._parts.append(f"<desc>{safe(description)}</desc>")
        self.rectangle(0, 0, width, height, fill="#ffffff")

    def rectangle(self, x: float, y: float, width: float, height: float, **style: object) -> None:
        """A rectangle by its upper left corner and size."""
        self._add("rect", _styled(style, x=x, y=y, width=max(width, 0.0), height=max(height, 0.0)))

    def line(self, x1: float, y1: float, x2: float, y2: float, **style: object) -> None:
        """A straight line."""
        self._add("line", _styled(style, x1=x1, y1=y1, x2=x2, y2=y2))

    def text(self, x: float, y: float, words: object, **style: object) -> None:
        """One line of text; ``text_anchor`` and ``dominant_baseline`` say where (x, y) is."""
        self._parts.append(f"<text{_styled(style, x=x, y=y)}>{safe(words)}</text>")

    def curve(self, x: Array, y: Array, **style: object) -> None:
        """Straight lines from point to point."""
        steps = "".join(_polyline(x[run], y[run]) for run in runs(x, y))
        if steps:
            self._add("path", f' d="{steps}"' + _styled({"fill": "none", **style}))

    def area(self, x: Array, low: Array, high: Array, **style: object) -> None:
        """What lies between two curves over the same x."""
        steps = "".join(
            _polyline(
                np.concatenate([x[run], x[run][::-1]]),
                np.concatenate([high[run], low[run][::-1]]),
            )
            + "Z"
            for run in runs(x, low, high)
        )
        if steps:
            self._add("path", f' d="{steps}"' + _styled(style))

    def markers(self, shape: str, x: Array, y: Array, **style: object) -> None:
        """The same marker at many points; shape: one of ``SHAPES``."""
        known = np.isfinite(x) & np.isfinite(y)
        if not known.any():
            return
        with self.group(**style):
            for at in zip(x[known].tolist(), y[known].tolist(), strict=True):
                place = f"translate({number(at[0])} {number(at[1])})"
                self._add("path", f' d="{_SHAPES[shape]}" transform="{place}"')

    @contextmanager
    def group(self, **style: object) -> Iterator[None]:
        """Elements that share a style."""
        self._parts.append(f"<g{_styled(style)}>")
        yield
        self._parts.append("</g>")

    def clip(self, name: str, x: float, y: float, width: float, height: float) -> str:
        """Defines a window; the answer is the value of ``clip_path`` for what it cuts."""
        shape = f"<rect{_styled({}, x=x, y=y, width=width, height=height)}/>"
        self._parts.append(f'<clipPath id="{safe(name)}">{shape}</clipPath>')
        return f"url(#{name})"

    def hatching(self, name: str, colour: str, *, spacing: float = 6.0) -> str:
        """Defines slanted lines; the answer is the value of ``fill`` for what they cover."""
        s = number(spacing)
        self._parts.append(
            f'<pattern id="{safe(name)}" width="{s}" height="{s}" patternUnits="userSpaceOnUse" '
            f'patternTransform="rotate(45)"><path d="M0 0v{s}" stroke="{safe(colour)}" '
            'stroke-width="1.4"/></pattern>'
        )
        return f"url(#{name})"

    def __str__(self) -> str:
        return "\n".join([*self._parts, "</svg>", ""])

    def _add(self, name: str, attributes: str) -> None:
        self._parts.append(f"<{name}{attributes}/>")


def runs(*columns: Array) -> Iterator[slice]:
    """The stretches in which every column holds numbers."""
    known = np.all([np.isfinite(column) for column in columns], axis=0)
    turns = np.flatnonzero(np.diff(np.concatenate([[False], known, [False]]).astype(np.int8)))
    for begin, end in zip(turns[::2].tolist(), turns[1::2].tolist(), strict=True):
        yield slice(begin, end)


def _polyline(x: Array, y: Array) -> str:
    points: Sequence[str] = [
        f"{number(a)} {number(b)}" for a, b in zip(x.tolist(), y.tolist(), strict=True)
    ]
    return "M" + "L".join(points)


def _styled(style: dict[str, object], **place: float) -> str:
    """Attributes, numbers of place first."""
    told = [f' {name}="{number(value)}"' for name, value in place.items()]
    told += [f' {name.replace("_", "-")}="{safe(value)}"' for name, value in style.items()]
    return "".join(told)
