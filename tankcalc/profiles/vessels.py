"""A vessel built from a shape's table, and where in the table its geometry finds fault."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TYPE_CHECKING, NamedTuple

from tankcalc.errors import GeometryError
from tankcalc.profiles.findings import At, Findings

if TYPE_CHECKING:
    from tankcalc.geometry import Vessel
    from tankcalc.profiles.tables import Values


class Shaped(NamedTuple):
    """A vessel, with what else its shape's table states.

    Attributes
    ----------
    vessel : Vessel
        Its elevations count from the datum.
    courses_m : tuple of (float, float, float)
        Courses of a vertical shell, from the bottom up: from, to and internal radius, m above the
        datum; empty for other shapes.
    reference_height_m : float or None
        Where an ullage reads zero, m above the datum.
    """

    vessel: Vessel
    courses_m: tuple[tuple[float, float, float], ...] = ()
    reference_height_m: float | None = None


def shaped(
    make: Callable[[Values], Vessel], values: Values, at: At, findings: Findings
) -> Shaped | None:
    """Return the vessel that a shape's values make; None, with a finding, where they make none."""
    from tankcalc.geometry import moved_datum

    try:
        vessel = make(values)
        if values["datum"] is not None:
            vessel = moved_datum(vessel, values["datum"])
    except GeometryError as error:
        findings.add(place_of(error.key, values, at), error.why)
        return None
    return Shaped(vessel, _courses(vessel, values), values.get("reference_height"))


def _courses(vessel: Vessel, values: Values) -> tuple[tuple[float, float, float], ...]:
    """Return the courses of a vertical shell; a strapped one is a single course of mean radius."""
    bottom = -(values["datum"] or 0.0)
    if vessel.kind == "strapped":
        height = vessel.z_max - vessel.z_min
        radius = math.sqrt(vessel.capacity / (math.pi * height))
        return ((vessel.z_min, vessel.z_max, radius),)
    if vessel.kind != "vertical cylinder":
        return ()
    found = []
    for course in values["courses"] or [values]:
        found.append((bottom, bottom + course["height"], 0.5 * course["diameter"]))
        bottom += course["height"]
    return tuple(found)


def place_of(key: str, shape: Values, at: At) -> At:
    """Return where in the file a dimension stands that the geometry names.

    The geometry counts courses from one, names the two heads "left" and "right" also where the
    file gives both at once, and the single course of a plain shell without its number.

    Examples
    --------
    >>> place_of("left.depth", {"heads": "both"}, ("shape",))
    ('shape', 'heads', 'depth')
    >>> place_of("height", {"courses": ["only"]}, ("shape",))
    ('shape', 'courses', 0, 'height')
    """
    words = key.split(".") if key else []
    if words[:1] in (["left"], ["right"]) and shape.get("heads") is not None:
        words[0] = "heads"
    if shape.get("courses") is not None and words[:1] in (["height"], ["diameter"]):
        words = ["courses", "1", *words]
    return (*at, *(int(word) - 1 if word.isdigit() else word for word in words))
