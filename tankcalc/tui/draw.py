"""A vessel with its liquid, drawn in characters.

Pure functions from an outline and elevations to rows of text, with one class letter for every
cell, so that the same picture reads right with colour, without it, and in ASCII.

The picture has half-row resolution: a cell holds an upper and a lower pixel, which is about
square on a terminal. It is a guide; the figures are printed beside it.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import lru_cache

from tankcalc.tui.labels import Label, place

Point = tuple[float, float]
Span = tuple[float, float]

PLAIN, WALL, LABEL, LIMIT = " ", "w", "l", "m"
"""Cell classes; a digit is the layer of that number, from the bottom up."""

LEAST_COLUMNS = 9
LEAST_SHARE = 0.65
"""Least part of the height a round vessel is stretched to, so that its level can be read."""
STRAIGHT_SHARE = 0.85
"""The same for one with straight walls, which does not look wrong for it."""


@dataclass(frozen=True, slots=True)
class Glyphs:
    """The characters a picture is drawn with."""

    full: str
    upper: str
    lower: str
    left: str
    right: str
    layers: str
    surface: str


UNICODE = Glyphs("█", "▀", "▄", "▐", "▌", "▓▒░", "▄")
ASCII = Glyphs("#", "#", "#", "#", "#", "=-~+", "_")


@dataclass(frozen=True, slots=True)
class Band:
    """One layer of liquid as it lies in the vessel, elevations in metres."""

    bottom_m: float
    top_m: float


@dataclass(frozen=True, slots=True)
class Picture:
    """Rows of text and, for every cell, the letter of its class."""

    rows: list[str]
    classes: list[str]


def picture(
    outline: Iterable[Point],
    bands: Sequence[Band],
    labels: Sequence[Label],
    width: int,
    height: int,
    glyphs: Glyphs = UNICODE,
    label_width: int = 16,
    least_share: float = LEAST_SHARE,
) -> Picture:
    """Draw a vessel in ``width`` x ``height`` cells, its labels at the right.

    ``bands`` go from the bottom up and may be none (an empty or an unknown vessel).
    """
    points = tuple((float(x), float(z)) for x, z in outline)
    columns, rows = fit(points, width - label_width, height, least_share)
    frame = Frame.around(points, columns, rows)
    pixels = _pixels(points, frame)
    owner, half = layer_rows(bands, frame, _open_rows(pixels))
    text, classes = _cells(pixels, owner, half, glyphs)
    blank = height - rows
    text = [" " * columns] * blank + text
    classes = [PLAIN * columns] * blank + classes
    placed = place(labels, [blank + frame.row_of(label.elevation_m) for label in labels], height)
    return _with_labels(text, classes, placed, width, columns)


@dataclass(frozen=True, slots=True)
class Frame:
    """Where elevations and distances fall on the grid.

    The walls take the outermost column at each side, roof and floor the outermost row, so that
    the lowest layer is never hidden behind the floor.
    """

    left: float
    right: float
    bottom: float
    top: float
    columns: int
    rows: int

    @classmethod
    def around(cls, points: Sequence[Point], columns: int, rows: int) -> Frame:
        """Return the frame that fits the outline."""
        xs = [x for x, _ in points]
        zs = [z for _, z in points]
        return cls(min(xs), max(xs), min(zs), max(zs), columns, rows)

    def x(self, column: int) -> float:
        """Return the distance at the middle of a column."""
        return self.left + (column - 0.5) / (self.columns - 2) * (self.right - self.left)

    def z(self, half_row: float) -> float:
        """Return the elevation at the middle of a half row, counted from the top."""
        return self.top - (half_row - 1.5) / (2 * self.rows - 4) * (self.top - self.bottom)

    def half_row(self, z: float) -> float:
        """Return the half row of an elevation, a real number; the inverse of `z`."""
        return 1.5 + (self.top - z) / (self.top - self.bottom) * (2 * self.rows - 4)

    def row_of(self, z: float) -> int:
        """Return the row an elevation falls in."""
        return min(max(int((self.half_row(z) + 0.5) // 2), 0), self.rows - 1)


def fit(
    points: Sequence[Point], width: int, height: int, least_share: float = LEAST_SHARE
) -> tuple[int, int]:
    """Return columns and rows: true to shape where that can be read, stretched where not."""
    xs = [x for x, _ in points]
    zs = [z for _, z in points]
    ratio = 2.0 * (max(xs) - min(xs)) / (max(zs) - min(zs))
    rows = height if ratio * height <= width else round(width / ratio)
    rows = min(max(rows, round(least_share * height), 3), height)
    columns = min(max(round(ratio * rows), LEAST_COLUMNS), width)
    return columns, rows


def _inside(points: Sequence[Point], z: float) -> list[Span]:
    """Return the stretches of the horizontal at ``z`` that lie in the polygon (even-odd rule)."""
    crossings: list[float] = []
    for (x0, z0), (x1, z1) in zip(points, [*points[1:], points[0]], strict=True):
        if (z0 <= z) != (z1 <= z):
            crossings.append(x0 + (z - z0) / (z1 - z0) * (x1 - x0))
    crossings.sort()
    return list(zip(crossings[::2], crossings[1::2], strict=True))


@lru_cache(maxsize=16)
def _pixels(points: tuple[Point, ...], frame: Frame) -> list[list[str]]:
    """Return the grid of half rows: "i" inside, "w" wall, "o" outside.

    It stays the same from key to key, and is most of the work.
    """
    grid: list[list[str]] = []
    for half_row in range(2 * frame.rows):
        spans = _inside(points, frame.z(half_row))
        xs = [frame.x(column) for column in range(frame.columns)]
        grid.append(["i" if any(a <= x <= b for a, b in spans) else "o" for x in xs])
    for r, line in enumerate(grid):
        for c, pixel in enumerate(line):
            if pixel == "o" and _touches(grid, r, c):
                line[c] = "w"
    return grid


def _touches(grid: list[list[str]], row: int, column: int) -> bool:
    """Return whether an inside pixel lies beside or at a corner of this one."""
    near = grid[max(row - 1, 0) : row + 2]
    return any("i" in line[max(column - 1, 0) : column + 2] for line in near)


def _open_rows(pixels: list[list[str]]) -> list[int]:
    """Return the rows in which some cell is wholly inside, so that a liquid shows."""
    return [
        row
        for row in range(len(pixels) // 2)
        if ("i", "i") in zip(pixels[2 * row], pixels[2 * row + 1], strict=True)
    ]


def layer_rows(
    bands: Sequence[Band], frame: Frame, rows: Sequence[int]
) -> tuple[dict[int, int], int | None]:
    """Return the layer of each wet row, and the row that is only half full, if one is.

    ``rows`` are the rows to choose from, from the top. Every layer gets at least one, however
    thin it is, as long as there are rows to give.
    """
    if not bands:
        return {}, None
    surface = frame.half_row(bands[-1].top_m) + 0.5
    wet = [row for row in rows if 2 * row + 1.5 > surface] or list(rows[-1:])
    half = wet[0] if surface - 2 * wet[0] >= 0.5 else None
    wet = list(rows)[-max(len(wet), len(bands)) :]
    ends = _ends(bands, [frame.z(2 * row + 0.5) for row in reversed(wet)])
    owner = {
        row: next(layer for layer, end in enumerate(ends) if n < end)
        for n, row in enumerate(reversed(wet))
    }
    return owner, half


def _ends(bands: Sequence[Band], middles: Sequence[float]) -> list[int]:
    """Return for each layer, from the bottom, the number of rows up to its top.

    ``middles`` are the elevations of the rows, from the bottom. A layer without a row of its
    own takes one from the layer above it, or below it at the surface.
    """
    ends = [sum(z < band.top_m for z in middles) for band in bands]
    for layer in range(len(ends)):
        ends[layer] = max(ends[layer], ends[layer - 1] + 1 if layer else 1)
    for layer in range(len(ends)):
        ends[layer] = min(ends[layer], len(middles) - (len(ends) - 1 - layer))
    ends[-1] = len(middles)
    return ends


def _cells(
    pixels: list[list[str]], owner: dict[int, int], half: int | None, glyphs: Glyphs
) -> tuple[list[str], list[str]]:
    """Return the rows of the vessel and their classes."""
    text: list[str] = []
    classes: list[str] = []
    for row in range(len(pixels) // 2):
        upper, lower = pixels[2 * row], pixels[2 * row + 1]
        layer = owner.get(row)
        cells = [_cell(upper, lower, c, layer, row == half, glyphs) for c in range(len(upper))]
        text.append("".join(glyph for glyph, _ in cells))
        classes.append("".join(kind for _, kind in cells))
    return text, classes


def _cell(
    upper: list[str], lower: list[str], column: int, layer: int | None, half: bool, glyphs: Glyphs
) -> tuple[str, str]:
    """Return the character of one cell and its class."""
    pair = upper[column] + lower[column]
    if pair == "oo":
        return " ", PLAIN
    if pair == "ww":
        return _wall(upper, lower, column, glyphs), WALL
    if pair[0] == "w":
        return glyphs.upper, WALL
    if pair[1] == "w":
        return glyphs.lower, WALL
    if layer is None:
        return " ", PLAIN
    return (glyphs.surface if half else glyphs.layers[layer % len(glyphs.layers)]), str(layer % 10)


def _wall(upper: list[str], lower: list[str], column: int, glyphs: Glyphs) -> str:
    """Return a thin wall where the vessel is straight, a full block where it is not."""
    after = {line[column + 1] for line in (upper, lower) if column + 1 < len(line)}
    before = {line[column - 1] for line in (upper, lower) if column > 0}
    if after == {"i"} and before <= {"o"}:
        return glyphs.left
    if before == {"i"} and after <= {"o"}:
        return glyphs.right
    return glyphs.full


def _with_labels(
    text: list[str], classes: list[str], placed: dict[int, Label], width: int, columns: int
) -> Picture:
    """Return the picture with the labels written at the right of the vessel."""
    room = width - columns - 1
    rows: list[str] = []
    kinds: list[str] = []
    for row, (line, kind) in enumerate(zip(text, classes, strict=True)):
        label = placed.get(row)
        words = "" if label is None else f"<{label.text}"
        if len(words) > room:
            words = ""
        letter = PLAIN if label is None else LIMIT if label.rank > 1 else LABEL
        rows.append(f"{line} {words}".ljust(width))
        kinds.append(f"{kind}{PLAIN}{letter * len(words)}".ljust(width, PLAIN))
    return Picture(rows, kinds)
