"""A small drawing surface for charts: lines, areas and text, written as SVG.

Coordinates are points from the top left corner.  Every text is anchored at its
start and its box is kept, so that a chart can be asked whether labels overlap.
Nothing is transparent, nothing carries a date or a random name: the same calls
make the same bytes.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from html import escape
from typing import Literal

from contingency.report.look import ASCENT, DESCENT, Look

Align = Literal["start", "middle", "end"]
Point = tuple[float, float]


@dataclass(frozen=True, kw_only=True, slots=True)
class Label:
    """One text of a chart and the box that it takes, in points."""

    words: str
    left: float
    top: float
    right: float
    bottom: float

    def overlaps(self, other: Label) -> bool:
        """Whether the two boxes share more than a hair's breadth."""
        return (
            min(self.right, other.right) - max(self.left, other.left) > 0.1
            and min(self.bottom, other.bottom) - max(self.top, other.top) > 0.1
        )


@dataclass(frozen=True, kw_only=True, slots=True)
class Drawing:
    """A finished chart."""

    svg: bytes
    width: float
    """Points."""
    height: float
    """Points."""
    labels: tuple[Label, ...]


class Canvas:
    """Collects the strokes of one chart."""

    def __init__(self, width: float, height: float, look: Look) -> None:
        self.width, self.height = width, height
        self.colours, self.letters = look.colours, look.letters
        self._parts: list[str] = []
        self._labels: list[Label] = []

    def line(
        self,
        start: Point,
        end: Point,
        colour: str,
        *,
        width: float = 0.5,
        dashed: bool = False,
    ) -> None:
        """Draw a straight line."""
        self.path((start, end), colour, width=width, dashed=dashed)

    def path(
        self,
        points: Sequence[Point],
        colour: str,
        *,
        width: float = 0.5,
        dashed: bool = False,
    ) -> None:
        """Draw straight lines from point to point."""
        dash = ' stroke-dasharray="2 1.6"' if dashed else ""
        self._parts.append(
            f'<path d="{_route(points)}" fill="none" stroke="{colour}" '
            f'stroke-width="{_n(width)}" stroke-linejoin="round"{dash}/>'
        )

    def area(self, points: Sequence[Point], colour: str) -> None:
        """Fill the area that the points enclose."""
        self._parts.append(f'<path d="{_route(points)} Z" fill="{colour}"/>')

    def bar(
        self, left: float, top: float, right: float, bottom: float, colour: str
    ) -> None:
        """Fill a rectangle, whichever side is given first."""
        left, right = min(left, right), max(left, right)
        self._parts.append(
            f'<rect x="{_n(left)}" y="{_n(top)}" width="{_n(right - left)}" '
            f'height="{_n(bottom - top)}" fill="{colour}"/>'
        )

    def dot(self, centre: Point, colour: str, *, radius: float = 1.8) -> None:
        """Fill a small circle."""
        self._parts.append(
            f'<circle cx="{_n(centre[0])}" cy="{_n(centre[1])}" r="{_n(radius)}" '
            f'fill="{colour}"/>'
        )

    def text(
        self,
        at: Point,
        words: str,
        *,
        size: float = 7.6,
        colour: str = "",
        semibold: bool = False,
        align: Align = "start",
    ) -> Label:
        """Set a line of text with its baseline at `at`; return its box."""
        width = self.letters.width(words, size, semibold=semibold)
        left = at[0] - {"start": 0.0, "middle": width / 2, "end": width}[align]
        weight = "600" if semibold else "400"
        self._parts.append(
            f'<text x="{_n(left)}" y="{_n(at[1])}" font-family="'
            f"'{self.letters.family}', 'Fallback Sans'\" font-size=\"{_n(size)}\" "
            f'font-weight="{weight}" fill="{colour or self.colours.ink}">'
            f"{escape(words)}</text>"
        )
        label = Label(
            words=words,
            left=left,
            top=at[1] - ASCENT * size,
            right=left + width,
            bottom=at[1] + DESCENT * size,
        )
        self._labels.append(label)
        return label

    def drawing(self) -> Drawing:
        """Return what has been drawn."""
        head = (
            '<svg xmlns="http://www.w3.org/2000/svg" '
            f'width="{_n(self.width)}pt" height="{_n(self.height)}pt" '
            f'viewBox="0 0 {_n(self.width)} {_n(self.height)}">'
        )
        return Drawing(
            svg="\n".join([head, *self._parts, "</svg>\n"]).encode(),
            width=self.width,
            height=self.height,
            labels=tuple(self._labels),
        )


def spread(wanted: Sequence[float], gap: float, low: float, high: float) -> list[float]:
    """Return places as near as can be to the `wanted` ones, at least `gap` apart.

    Least squares under the order of `wanted` (isotonic regression by pooling
    neighbours); all places lie between `low` and `high` if there is room for them.

    >>> spread([10.0, 11.0, 40.0], 6.0, 0.0, 100.0)
    [7.5, 13.5, 40.0]
    """
    order = sorted(range(len(wanted)), key=lambda i: wanted[i])
    pools: list[tuple[float, int]] = []
    for rank, i in enumerate(order):
        value, size = wanted[i] - rank * gap, 1
        while pools and pools[-1][0] > value:
            other, many = pools.pop()
            value = (value * size + other * many) / (size + many)
            size += many
        pools.append((value, size))
    shifted = [value for value, size in pools for _ in range(size)]
    most = max(low, high - (len(wanted) - 1) * gap)
    places = [0.0] * len(wanted)
    for rank, (i, value) in enumerate(zip(order, shifted, strict=True)):
        places[i] = min(max(value, low), most) + rank * gap
    return places


def _route(points: Sequence[Point]) -> str:
    return "M" + " L".join(f"{_n(x)} {_n(y)}" for x, y in points)


def _n(number: float) -> str:
    """Write a coordinate to a hundredth of a point, without a negative nought."""
    text = f"{number:.2f}".rstrip("0").rstrip(".")
    return "0" if text in {"-0", ""} else text
