"""The drawing of one answer: its vessel, its layers, and the labels beside them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.text import clean
from tankcalc.tui.draw import (
    LABEL,
    LEAST_SHARE,
    LIMIT,
    PLAIN,
    STRAIGHT_SHARE,
    WALL,
    Band,
    Glyphs,
    picture,
)
from tankcalc.tui.labels import Label
from tankcalc.tui.present import Line, clip

if TYPE_CHECKING:
    from tankcalc.result import Result
    from tankcalc.tank import Tank
    from tankcalc.tui.desk import Answer

LIMIT_WORDS = {
    "low_low": "low-low",
    "minimum_working": "min. working",
    "maximum_working": "max. working",
    "high_high": "high-high",
    "overfill_action": "overfill act.",
    "critical_high": "critical high",
}
LABEL_WIDTH = 16
ROUND = ("sphere", "spheroid", "oval")

STYLES = {PLAIN: "", WALL: "wall", LABEL: "figure", LIMIT: "limit"}
"""Style names of the cell classes; a layer is "layer0" to "layer3" by its number."""


def scene(
    answer: Answer, tank: Tank, system: units.System, width: int, height: int, glyphs: Glyphs
) -> list[Line]:
    """Return the rows of the drawing, under a title with the tank and its fluid."""
    lines = _title(answer, tank, width)
    drawn = picture(
        tank.vessel.outline(),
        bands(answer.result),
        labels(tank, answer.result, system),
        width,
        height - len(lines),
        glyphs,
        LABEL_WIDTH,
        LEAST_SHARE if tank.vessel.kind in ROUND else STRAIGHT_SHARE,
    )
    for row, classes in zip(drawn.rows, drawn.classes, strict=True):
        lines.append(_spans(row, classes))
    return lines


def bands(result: Result | None) -> list[Band]:
    """Return the layers of a result as they lie, from the bottom up."""
    if result is None:
        return []
    return [Band(layer.bottom_m, layer.top_m) for layer in result.layers]


def labels(tank: Tank, result: Result | None, system: units.System) -> list[Label]:
    """Return the surface, the interfaces, the limits and the taps, as far as they are known."""
    found = [Label(z, LIMIT_WORDS[name]) for name, z in tank.limits_m.items()]
    found += [Label(t.elevation_m, f"{tag} tap") for tag, t in tank.transmitters.items()]
    if result is not None and result.layers:
        *below, top = result.layers
        found.append(Label(top.top_m, _elevation(top.top_m, system), 0))
        found += [Label(layer.top_m, _elevation(layer.top_m, system), 1) for layer in below]
    return found


def _title(answer: Answer, tank: Tank, width: int) -> list[Line]:
    first = clip(clean(f"{tank.file or tank.name} {tank.service}"), width)
    fluid = answer.fluid
    if fluid is None:
        return [[(first, "title")], []]
    other = "" if fluid.file == tank.contents else "! not usual: "
    return [[(first, "title")], [(clip(clean(f"{other}{fluid.name}"), width), "")]]


def _elevation(z: float, system: units.System) -> str:
    """Return an elevation short enough for a label: decimals instead of inches and eighths."""
    return units.show(z, "length", system, digits=3 if system == "metric" else 2)


def _spans(row: str, classes: str) -> Line:
    """Return a row of the drawing as runs of one class each."""
    line: Line = []
    start = 0
    for end in range(1, len(row) + 1):
        if end == len(row) or classes[end] != classes[start]:
            line.append((row[start:end], _style(classes[start])))
            start = end
    return line


def _style(letter: str) -> str:
    return f"layer{int(letter) % 4}" if letter.isdigit() else STYLES[letter]
