"""A trend as inline SVG: black line, dots at the readings, limits dashed and named. No script."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from html import escape

from tankcalc.handover.document import Trend

PLOT, HEIGHT = 276.0, 132.0
LEFT, RIGHT, TOP, BOTTOM = 46.0, 8.0, 16.0, 18.0
NAMES = 142.0
"""Room for the names of limits, right of the plot; points of the drawing like those above."""

APART = 10.0
"""Names stand no closer than this above each other."""

LARGEST_STRETCH = 3.0
"""A limit is drawn to scale where that makes the axis at most this many times as long; else its
name and value stand at the edge."""


@dataclass(frozen=True, slots=True)
class _Frame:
    """Instants and values to places on the paper."""

    from_us: int
    to_us: int
    low: float
    high: float

    def x(self, t_us: int) -> float:
        share = (t_us - self.from_us) / max(self.to_us - self.from_us, 1)
        return LEFT + share * PLOT

    def y(self, value: float) -> float:
        share = (value - self.low) / (self.high - self.low)
        return HEIGHT - BOTTOM - share * (HEIGHT - TOP - BOTTOM)


def svg(trend: Trend) -> str:
    """Return a trend as an SVG element; at least one of its points has a value."""
    frame, drawn = _frame(trend)
    width = LEFT + PLOT + (NAMES if trend.lines else RIGHT)
    said = f"{trend.label} in {trend.unit} over the shift and the day before"
    parts = [
        f'<svg class="trend" viewBox="0 0 {width:g} {HEIGHT:g}" role="img" '
        f'aria-label="{escape(said)}">',
        *_axes(trend, frame),
        *_limits(trend, frame, drawn),
        *_line(trend, frame),
        "</svg>",
    ]
    return "".join(parts)


def _frame(trend: Trend) -> tuple[_Frame, list[tuple[str, float]]]:
    """Return the frame, and the limits that lie within it."""
    values = [value for _, value in trend.points if value is not None]
    low, high = min(values), max(values)
    missing = max(trend.least_span - (high - low), 0.0)
    low, high = low - missing / 2.0, high + missing / 2.0
    longest = LARGEST_STRETCH * (high - low)
    drawn = []
    for name, at in sorted(trend.lines, key=lambda line: abs(line[1] - (low + high) / 2.0)):
        if max(high, at) - min(low, at) <= longest:
            low, high = min(low, at), max(high, at)
            drawn.append((name, at))
    margin = 0.06 * (high - low)
    return _Frame(*trend.span_us, low - margin, high + margin), drawn


def _axes(trend: Trend, frame: _Frame) -> Iterator[str]:
    top, bottom = TOP, HEIGHT - BOTTOM
    begins = frame.x(trend.shift_us)
    yield (
        f'<rect class="shift" x="{begins:.1f}" y="{top:g}" '
        f'width="{LEFT + PLOT - begins:.1f}" height="{bottom - top:g}"/>'
    )
    for t_us, text in trend.ticks:
        x = frame.x(t_us)
        yield f'<line class="tick" x1="{x:.1f}" x2="{x:.1f}" y1="{bottom:g}" y2="{bottom + 3:g}"/>'
        if x < LEFT + PLOT - 8.0:
            yield f'<text class="mid" x="{x:.1f}" y="{HEIGHT - 5:g}">{escape(text)}</text>'
    right = LEFT + PLOT
    yield f'<line class="axis" x1="{LEFT:g}" x2="{right:g}" y1="{bottom:g}" y2="{bottom:g}"/>'
    yield f'<line class="axis" x1="{LEFT:g}" x2="{LEFT:g}" y1="{top:g}" y2="{bottom:g}"/>'
    for value in _round_values(frame.low, frame.high):
        y = frame.y(value)
        yield f'<line class="grid" x1="{LEFT:g}" x2="{right:g}" y1="{y:.1f}" y2="{y:.1f}"/>'
        yield f'<text class="end" x="{LEFT - 4:g}" y="{y + 3:.1f}">{value:.{trend.digits}f}</text>'
    yield f'<text class="name" x="{LEFT:g}" y="9">{escape(f"{trend.label}, {trend.unit}")}</text>'


def _round_values(low: float, high: float) -> Sequence[float]:
    """Return two to five round values within a range.

    Examples
    --------
    >>> _round_values(8.1, 9.4)
    [8.5, 9.0]
    """
    import math

    size = 10.0 ** math.floor(math.log10((high - low) / 2.0))
    for step in (5.0 * size, 2.0 * size, size):
        first = math.ceil(low / step - 1e-9)
        found = [number * step for number in range(first, math.floor(high / step + 1e-9) + 1)]
        if len(found) > 1:
            return found
    return [low, high]


def _limits(trend: Trend, frame: _Frame, drawn: list[tuple[str, float]]) -> Iterator[str]:
    """Yield the limits, each with its name beside the plot, and the next ones beyond it."""
    right = LEFT + PLOT
    named = []
    for name, at in drawn:
        y = frame.y(at)
        yield f'<line class="limit" x1="{LEFT:g}" x2="{right:g}" y1="{y:.1f}" y2="{y:.1f}"/>'
        named.append((y, f"{name} {at:.{trend.digits}f}"))
    above = [(at, name) for name, at in trend.lines if at > frame.high]
    below = [(at, name) for name, at in trend.lines if at < frame.low]
    if above:
        at, name = min(above)
        named.append((TOP, f"\N{UPWARDS ARROW} {name} {at:.{trend.digits}f}"))
    if below:
        at, name = max(below)
        named.append((HEIGHT - BOTTOM, f"\N{DOWNWARDS ARROW} {name} {at:.{trend.digits}f}"))
    named.sort()
    for (y, text), place in zip(named, _apart([y for y, _ in named]), strict=True):
        if abs(place - y) > 1.0:
            yield f'<path class="lead" d="M{right:g} {y:.1f}l5 {place - y:.1f}"/>'
        yield f'<text x="{right + 7:g}" y="{place + 3:.1f}">{escape(text)}</text>'


def _apart(places: Sequence[float]) -> list[float]:
    """Return places from the top down, moved as little as keeps them apart and on the paper.

    Examples
    --------
    >>> _apart([20.0, 21.0, 60.0])
    [20.0, 30.0, 60.0]
    """
    moved: list[float] = []
    for place in places:
        moved.append(max([place, *(one + APART for one in moved[-1:])]))
    floor = HEIGHT - BOTTOM
    for number in range(len(moved) - 1, -1, -1):
        moved[number] = min(moved[number], floor)
        floor = moved[number] - APART
    return moved


def _line(trend: Trend, frame: _Frame) -> Iterator[str]:
    """Yield the line, broken where a reading has no answer, and a mark at every reading."""
    run: list[str] = []
    for t_us, value in (*trend.points, (0, None)):
        if value is not None:
            run.append(f"{frame.x(t_us):.1f},{frame.y(value):.1f}")
            continue
        if len(run) > 1:
            yield f'<polyline class="line" points="{" ".join(run)}"/>'
        run = []
    for t_us, value in trend.points:
        x = frame.x(t_us)
        if value is not None:
            yield f'<circle class="dot" cx="{x:.1f}" cy="{frame.y(value):.1f}" r="1.5"/>'
        else:
            y = HEIGHT - BOTTOM - 4.0
            yield f'<path class="none" d="M{x - 2.5:.1f} {y - 2.5:.1f}l5 5m0 -5l-5 5"/>'
