"""The ends of a vessel: bottoms, roofs and heads."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from tankcalc.profiles.findings import At, Findings
from tankcalc.profiles.leaves import choice, quantity
from tankcalc.profiles.tables import ByKind, Table, Values, may, need

if TYPE_CHECKING:
    from tankcalc.geometry import End

    EndFor = Callable[[float], End]
    """An end that waits for the diameter of the shell it closes (m)."""

LENGTH = quantity("length", "positive")
STANDARDS = ("ASME F&D", "DIN 28011", "DIN 28013")


def _flat(values: Values, at: At, findings: Findings) -> EndFor:
    from tankcalc.geometry import FlatEnd

    return lambda _diameter_m: FlatEnd()


def _cone(values: Values, at: At, findings: Findings) -> EndFor:
    from tankcalc.geometry import ConeEnd

    return lambda _diameter_m: ConeEnd(values["depth"], values.get("points", "down"))


def _slope(values: Values, at: At, findings: Findings) -> EndFor:
    from tankcalc.geometry import SlopeEnd

    return lambda _diameter_m: SlopeEnd(values["fall"])


def _dished(values: Values, at: At, findings: Findings) -> EndFor | None:
    from tankcalc.geometry import DishedEnd

    if (values["depth"] is None) == (values["radius"] is None):
        findings.add(at, "a dished end takes a depth or a radius.", "Give one of them.")
        return None
    return lambda _diameter_m: DishedEnd(values["depth"], values["radius"])


def _hemispherical(values: Values, at: At, findings: Findings) -> EndFor:
    from tankcalc.geometry import HemisphericalEnd

    return lambda _diameter_m: HemisphericalEnd()


def _ellipsoidal(values: Values, at: At, findings: Findings) -> EndFor:
    from tankcalc.geometry import EllipsoidalEnd

    return lambda _diameter_m: EllipsoidalEnd(values["depth"])


def _torispherical(values: Values, at: At, findings: Findings) -> EndFor | None:
    from tankcalc.geometry import TorisphericalEnd, torispherical_standard

    crown, knuckle, standard = (
        values[key] for key in ("crown_radius", "knuckle_radius", "standard")
    )
    if standard is not None and crown is None and knuckle is None:
        return lambda diameter_m: torispherical_standard(standard, diameter_m)
    if standard is None and crown is not None and knuckle is not None:
        return lambda _diameter_m: TorisphericalEnd(crown, knuckle)
    findings.add(
        at,
        "a torispherical end takes a standard, or both its radii.",
        'Give standard = "DIN 28011", or crown_radius and knuckle_radius.',
    )
    return None


_HEADS = {
    "flat": Table({}, _flat),
    "cone": Table({"depth": need(LENGTH)}, _cone),
    "dished": Table({"depth": may(LENGTH), "radius": may(LENGTH)}, _dished),
    "hemispherical": Table({}, _hemispherical),
    "ellipsoidal": Table({"depth": may(LENGTH)}, _ellipsoidal),
    "torispherical": Table(
        {
            "crown_radius": may(LENGTH),
            "knuckle_radius": may(LENGTH),
            "standard": may(choice(*STANDARDS)),
        },
        _torispherical,
    ),
}

HEAD = ByKind("kind", _HEADS)
"""A roof, or a head of a horizontal cylinder."""

BOTTOM = ByKind(
    "kind",
    _HEADS
    | {
        "cone": Table({"depth": need(LENGTH), "points": may(choice("down", "up"), "down")}, _cone),
        "slope": Table({"fall": need(LENGTH)}, _slope),
    },
)
"""A bottom of an upright cylinder."""
