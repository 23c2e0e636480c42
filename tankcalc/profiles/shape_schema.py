"""The shape of a vessel: one table of keys for each kind, and the vessel built from it."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from tankcalc.profiles.end_schema import BOTTOM, HEAD, LENGTH
from tankcalc.profiles.findings import At, Findings
from tankcalc.profiles.leaves import choice, fraction, quantity
from tankcalc.profiles.tables import ByKind, Key, ListOf, Part, Table, Values, may, need
from tankcalc.profiles.vessels import Shaped, shaped

if TYPE_CHECKING:
    from tankcalc.geometry import End, Vessel
    from tankcalc.profiles.end_schema import EndFor

    Make = Callable[[Values], Vessel]
    Check = Callable[[Values, At, Findings], bool]


def shape(keys: dict[str, Key], make: Make, is_clear: Check | None = None) -> Table:
    """Return the table of one kind of shape: its keys, and how the vessel is made of them."""

    def build(values: Values, at: At, findings: Findings) -> Shaped | None:
        if is_clear is not None and not is_clear(values, at, findings):
            return None
        return shaped(make, values, at, findings)

    return Table(keys | {"datum": may(quantity("length"))}, build)


def _end(made: EndFor | None, diameter_m: float) -> End:
    from tankcalc.geometry import FlatEnd

    return FlatEnd() if made is None else made(diameter_m)


def _upright_is_clear(values: Values, at: At, findings: Findings) -> bool:
    before = len(findings)
    single = [values["diameter"], values["height"]]
    if values["courses"] is not None:
        if single != [None, None]:
            findings.add(
                (*at, "courses"),
                "courses stand beside a diameter or a height.",
                "Give one diameter and height, or courses from the bottom up.",
            )
    else:
        for key in ("diameter", "height"):
            if values[key] is None:
                findings.add((*at, key), "missing.", "Give it, or courses from the bottom up.")
    return len(findings) == before


def _upright(values: Values) -> Vessel:
    from tankcalc.geometry import vertical_cylinder

    courses = [(c["height"], c["diameter"]) for c in values["courses"] or [values]]
    bottom = _end(values["bottom"], courses[0][1])
    return vertical_cylinder(courses, bottom, _end(values["roof"], courses[-1][1]))


def _heads_are_clear(values: Values, at: At, findings: Findings) -> bool:
    sides = [values["left"], values["right"]]
    if values["heads"] is None and None not in sides:
        return True
    if values["heads"] is not None and sides == [None, None]:
        return True
    both = values["heads"] is not None
    findings.add(
        (*at, "heads"),
        "both heads stand beside a left or a right one." if both else "missing.",
        'Give heads = { kind = "..." } for both, or left and right.',
    )
    return False


def _lying(values: Values) -> Vessel:
    from tankcalc.geometry import horizontal_cylinder

    diameter = values["diameter"]
    left, right = (_end(values[side] or values["heads"], diameter) for side in ("left", "right"))
    return horizontal_cylinder(
        diameter, values["length"], left, right, values["slope"], values["dip_at"]
    )


def _sphere(values: Values) -> Vessel:
    from tankcalc.geometry import sphere

    return sphere(values["diameter"])


def _spheroid(values: Values) -> Vessel:
    from tankcalc.geometry import spheroid

    return spheroid(values["diameter"], values["height"])


def _box(values: Values) -> Vessel:
    from tankcalc.geometry import box

    return box(values["length"], values["width"], values["height"], values["floor_fall"])


def _oval(values: Values) -> Vessel:
    from tankcalc.geometry import oval

    return oval(values["section"], values["width"], values["height"], values["length"])


def _stack(values: Values) -> Vessel:
    from tankcalc.geometry import stack

    return stack(
        [(s["height"], s["bottom_diameter"], s["top_diameter"]) for s in values["sections"]]
    )


_COURSE = Table({"height": need(LENGTH), "diameter": need(LENGTH)})
_WIDTH = quantity("length", "not negative")
_SECTION = Table(
    {"height": need(LENGTH), "bottom_diameter": need(_WIDTH), "top_diameter": need(_WIDTH)}
)


class Strapped:
    """The table of a strapped tank, loaded only for one: others need no reader of tables."""

    def read(self, value: object, at: At, findings: Findings) -> Shaped | None:
        """Return the vessel of a capacity table, or None after noting what is wrong."""
        from tankcalc.profiles.strapping import STRAPPED

        made: Shaped | None = STRAPPED.read(value, at, findings)
        return made


SHAPES: dict[str, Part] = {
    "vertical cylinder": shape(
        {
            "diameter": may(LENGTH),
            "height": may(LENGTH),
            "courses": may(ListOf(_COURSE)),
            "bottom": may(BOTTOM),
            "roof": may(HEAD),
        },
        _upright,
        _upright_is_clear,
    ),
    "horizontal cylinder": shape(
        {
            "diameter": need(LENGTH),
            "length": need(LENGTH),
            "heads": may(HEAD),
            "left": may(HEAD),
            "right": may(HEAD),
            "slope": may(fraction(-1.0), 0.0),
            "dip_at": may(quantity("length")),
        },
        _lying,
        _heads_are_clear,
    ),
    "sphere": shape({"diameter": need(LENGTH)}, _sphere),
    "spheroid": shape({"diameter": need(LENGTH), "height": need(LENGTH)}, _spheroid),
    "box": shape(
        {
            "length": need(LENGTH),
            "width": need(LENGTH),
            "height": need(LENGTH),
            "floor_fall": may(quantity("length", "not negative"), 0.0),
        },
        _box,
    ),
    "oval": shape(
        {
            "section": need(choice("ellipse", "obround")),
            "width": need(LENGTH),
            "height": need(LENGTH),
            "length": need(LENGTH),
        },
        _oval,
    ),
    "stack": shape({"sections": need(ListOf(_SECTION))}, _stack),
    "strapped": Strapped(),
}

SHAPE = ByKind("kind", SHAPES)
