"""What must hold between the parts of a tank, and what is worth a look although it can be true."""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING

from tankcalc.instruments import Transmitter
from tankcalc.limits.levels import spacing_notices
from tankcalc.profiles.findings import Findings
from tankcalc.profiles.tables import Values
from tankcalc.tank import LIMIT_ORDER, Tank

if TYPE_CHECKING:
    from tankcalc.geometry import Vessel
    from tankcalc.profiles.vessels import Shaped


def check_limits(limits_m: Mapping[str, float], vessel: Vessel | None, findings: Findings) -> None:
    """Note limits that do not rise in the order of their names, or lie outside the vessel."""
    given = [name for name in LIMIT_ORDER if name in limits_m]
    for low, high in itertools.pairwise(given):
        if not limits_m[high] > limits_m[low]:
            findings.add(
                ("limits", high),
                f"{limits_m[high]:g} m is not above {low}, {limits_m[low]:g} m.",
                f"From the bottom up: {', '.join(LIMIT_ORDER)}.",
            )
    if vessel is None:
        return
    for name in given:
        if not vessel.z_min <= limits_m[name] <= vessel.z_max:
            side = "above the top of" if limits_m[name] > vessel.z_max else "below"
            findings.add(
                ("limits", name),
                f"{limits_m[name]:g} m lies {side} the vessel, {_span(vessel)}.",
            )


def check_elevations(
    fitted: Mapping[str, Transmitter], vessel: Vessel | None, findings: Findings
) -> None:
    """Note transmitters that can never feel what they are there for, or stand in wrong order."""
    for low, high in itertools.pairwise(tag for tag in ("p1", "p2", "p3") if tag in fitted):
        if not fitted[high].elevation_m > fitted[low].elevation_m:
            findings.add(
                ("transmitters", high, "elevation"),
                f"{fitted[high].elevation_m:g} m is not above {low}, "
                f"{fitted[low].elevation_m:g} m.",
                "p1 is the bottom one, p2 the middle one, p3 the one in the vapour space.",
            )
    if vessel is None:
        return
    for tag, transmitter in fitted.items():
        z = transmitter.elevation_m
        if tag == "p3" and not z > vessel.z_min:
            findings.add(
                ("transmitters", tag, "elevation"),
                f"{z:g} m is not above the vessel's bottom, {_span(vessel)}.",
            )
        elif tag != "p3" and not z < vessel.z_max:
            findings.add(
                ("transmitters", tag, "elevation"),
                f"{z:g} m is not below the vessel's top, {_span(vessel)}.",
                "Elevations count from the datum.",
            )


def check_shell(values: Values, findings: Findings) -> None:
    """Note plates that do not match the courses, and a roof that floats outside the vessel."""
    made: Shaped | None = values["shape"]
    if made is None:
        return
    plates = values["shell"].thickness_m if values["shell"] is not None else ()
    courses = len(made.courses_m) or 1
    if len(plates) > 1 and len(plates) != courses:
        findings.add(
            ("shell", "thickness"),
            f"{len(plates)} thicknesses, but the number of courses is {courses}.",
            "Give one, or one for each course from the bottom up.",
        )
    roof = values["floating_roof"]
    if roof is not None:
        for key, z in (("lands_at", roof.lands_at_m), ("floats_at", roof.floats_at_m)):
            if not made.vessel.z_min <= z <= made.vessel.z_max:
                findings.add(
                    ("floating_roof", key), f"{z:g} m is outside the vessel, {_span(made.vessel)}."
                )


def note_doubts(tank: Tank, findings: Findings) -> None:
    """Note what can be true of a tank and seldom is."""
    vessel = tank.vessel
    for tag, transmitter in tank.transmitters.items():
        z = transmitter.elevation_m
        if tag == "p3" and z > vessel.z_max:
            findings.add(
                ("transmitters", tag, "elevation"),
                f"{z:g} m is above the vessel's top, {_span(vessel)}.",
                "Give the elevation of its tap.",
            )
        if tag != "p3" and z < vessel.z_min:
            findings.add(
                ("transmitters", tag, "elevation"),
                f"{z:g} m is below the vessel's lowest point, {_span(vessel)}.",
                "Give the elevation of its tap; a line below it is a leg.",
            )
    if tank.dp is not None and tank.dp.high.elevation_m > tank.dp.low.elevation_m:
        findings.add(
            ("transmitters", "dp", "high", "elevation"),
            f"{tank.dp.high.elevation_m:g} m is above the low side, {tank.dp.low.elevation_m:g} m.",
            "The high side is the one at the bottom of the tank.",
        )
    for n, z in enumerate(tank.thermometer_elevations_m):
        if not vessel.z_min <= z <= vessel.z_max:
            findings.add(
                ("thermometer", "elevations", n), f"{z:g} m is outside the vessel, {_span(vessel)}."
            )
    for notice in spacing_notices(tank):
        findings.add(
            ("limits", notice.reading),
            notice.message[0].lower() + notice.message[1:],
            "Common practice; your procedures decide.",
        )
    _note_load(tank, findings)
    for level_m, volume_m3, expected in _mistyped(tank):
        findings.add(
            ("shape",),
            f"({level_m:g} m, {volume_m3:g} m3) looks mistyped.",
            f"Its neighbours suggest about {expected:.6g} m3.",
        )


def _note_load(tank: Tank, findings: Findings) -> None:
    """Note plates that say nothing of this shape, and a roof too heavy for its critical zone."""
    vessel, shell, roof = tank.vessel, tank.shell, tank.floating_roof
    if shell is not None and shell.thickness_m and not shell.courses_m:
        findings.add(
            ("shell", "thickness"),
            "only a vertical shell's plates are used, for its stretch under the liquid's head.",
            "Leave it out.",
        )
    if roof is None:
        return
    zone = vessel.volume(roof.floats_at_m) - vessel.volume(roof.lands_at_m)
    if roof.included_at_kg_m3 is None and roof.mass_kg / 1000.0 > zone:
        findings.add(
            ("floating_roof", "floats_at"),
            f"between landing and floating the tank takes {zone:.1f} m3, but the roof displaces "
            f"{roof.mass_kg / 1000.0:.1f} m3 even of water.",
            "Check the roof's mass and the two levels.",
        )


def _mistyped(tank: Tank) -> Iterator[tuple[float, float, float]]:
    if tank.kind != "strapped":
        return
    from tankcalc.profiles.strapping import slips

    levels = [float(z) for z in tank.vessel.breaks]
    volumes = [tank.vessel.volume(z) for z in levels]
    for n, expected in slips(levels, volumes):
        yield levels[n], volumes[n], expected


def _span(vessel: Vessel) -> str:
    return f"{vessel.z_min:g} m to {vessel.z_max:g} m"
