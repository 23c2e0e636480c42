"""A curve drawn in characters, with its axes and their units.

A cell holds an upper and a lower pixel. Pure functions from figures to rows of text: the same
curve reads right without colour and in ASCII.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from tankcalc.tui.present import Line

Point = tuple[float, float]

LEAST_SPREAD = 2e-3
"""The axis of a curve that is as good as flat still spans this part of its value."""


@dataclass(frozen=True, slots=True)
class Strokes:
    """The characters a curve is drawn with: both pixels of a cell, the upper, the lower."""

    both: str
    upper: str
    lower: str


UNICODE = Strokes("█", "▀", "▄")
ASCII = Strokes(":", "'", ".")
MARK = "o"


@dataclass(frozen=True, slots=True)
class Axis:
    """From where to where an axis goes, the decimals of its labels, and its unit."""

    low: float
    high: float
    decimals: int
    unit: str

    def share(self, value: float) -> float:
        """Return where on the axis a value lies: 0 at its low end, 1 at its high end."""
        return (value - self.low) / (self.high - self.low)

    def label(self, share: float) -> str:
        """Return the figure that stands at a share of the axis."""
        value = self.low + share * (self.high - self.low)
        return f"{value + 0.0:.{self.decimals}f}"


@dataclass(frozen=True, slots=True)
class Plot:
    """A curve through points, points marked on it, and its axes."""

    title: str
    points: Sequence[Point]
    marks: Sequence[Point]
    x: Axis
    y: Axis


def nice_axis(values: Sequence[float], unit: str) -> Axis:
    """Return an axis round values whose ends and middle are short figures.

    Examples
    --------
    >>> nice_axis([832.9, 845.1], "kg/m3")
    Axis(low=832.0, high=848.0, decimals=0, unit='kg/m3')
    """
    low, high = min(values), max(values)
    least = LEAST_SPREAD * abs(0.5 * (low + high)) or 1.0
    if high - low < least:
        middle = 0.5 * (low + high)
        low, high = middle - 0.5 * least, middle + 0.5 * least
    step = 10.0 ** math.floor(math.log10(high - low))
    step = next(step * part for part in (0.1, 0.2, 0.5, 1.0) if high - low <= 10.0 * step * part)
    first, last = math.floor(low / step + 1e-9), math.ceil(high / step - 1e-9)
    # An even number of steps, so that the middle is as short a figure as the ends.
    last += (last - first) % 2
    decimals = max(-math.floor(math.log10(step) + 1e-9), 0)
    return Axis(first * step, last * step, decimals, unit)


def chart(plot: Plot, width: int, height: int, strokes: Strokes = UNICODE) -> list[Line]:
    """Return the rows of a plot: the curve, its axes, the figures at their ends and middles."""
    labels = [plot.y.label(share) for share in (1.0, 0.5, 0.0)]
    room = max(len(label) for label in labels)
    columns, rows = max(width - room - 2, 4), max(height - 2, 2)
    pixels = _pixels(plot, columns, 2 * rows)
    marks = {_cell_of(plot, mark, columns, rows) for mark in plot.marks}
    at_row = {0: labels[0], rows - 1: labels[2]} | ({rows // 2: labels[1]} if rows % 2 else {})
    lines: list[Line] = []
    for row in range(rows):
        label = at_row.get(row, "").rjust(room)
        lines.append([(f"{label} |", ""), *_row(row, pixels, marks, columns, strokes)])
    lines.append([(" " * (room + 1) + "+" + "-" * columns, "")])
    lines.append([(" " * (room + 2) + _below(plot.x, columns), "")])
    return lines


def _pixels(plot: Plot, columns: int, rows: int) -> set[tuple[int, int]]:
    """Return the (row, column) pixels the curve passes through, no gap between two points."""
    found: set[tuple[int, int]] = set()
    spots = [_spot(plot, point, columns, rows) for point in plot.points]
    for (x0, y0), (x1, y1) in zip(spots, [*spots[1:], spots[-1]], strict=True):
        steps = max(math.ceil(2.0 * max(abs(x1 - x0), abs(y1 - y0))), 1)
        for n in range(steps + 1):
            x, y = x0 + (x1 - x0) * n / steps, y0 + (y1 - y0) * n / steps
            found.add((round(y), round(x)))
    return found


def _spot(plot: Plot, point: Point, columns: int, rows: int) -> Point:
    """Return where a point lies in pixels from the upper left corner."""
    x, y = point
    return plot.x.share(x) * (columns - 1), (1.0 - plot.y.share(y)) * (rows - 1)


def _cell_of(plot: Plot, point: Point, columns: int, rows: int) -> tuple[int, int]:
    x, y = _spot(plot, point, columns, 2 * rows)
    return round(y) // 2, round(x)


def _row(
    row: int,
    pixels: set[tuple[int, int]],
    marks: set[tuple[int, int]],
    columns: int,
    strokes: Strokes,
) -> Line:
    """Return one row of the curve."""
    spans: Line = []
    for column in range(columns):
        upper, lower = (2 * row, column) in pixels, (2 * row + 1, column) in pixels
        glyph = strokes.both if upper and lower else strokes.upper if upper else strokes.lower
        if (row, column) in marks:
            spans.append((MARK, "focus"))
        elif upper or lower:
            spans.append((glyph, "layer1"))
        else:
            spans.append((" ", ""))
    return spans


def _below(axis: Axis, columns: int) -> str:
    """Return the figures under an axis, the middle one where there is room for it."""
    low, middle, high = (axis.label(share) for share in (0.0, 0.5, 1.0))
    high = f"{high} {axis.unit}"
    at = (columns - len(middle)) // 2
    row = list(low.ljust(columns))
    if at > len(low) and at + len(middle) < columns - len(high):
        row[at : at + len(middle)] = middle
    return "".join(row[: columns - len(high)]) + high
