"""One reading against the earlier ones: stuck, copied, too fast, the wrong way, not at rest.

Pure functions of the moments they are given: no clock and no log.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

from tankcalc import units
from tankcalc.readings import Readings
from tankcalc.result import Notice
from tankcalc.tank import Tank

Movement = Literal["static", "receiving", "delivering", ""]
"""What was declared of the tank; empty: nothing."""

STUCK_AFTER = 3
"""How many readings have to be the same before an instrument is called stuck."""

MOVED = 3.0
"""Another instrument has moved if it did by more than this many standard uncertainties."""

COVERAGE = 2.0
"""A movement is one beyond this many standard uncertainties of the difference."""

FOLLOWERS = {
    "p1": ("p1_pa", "pressure"),
    "p2": ("p2_pa", "pressure"),
    "dp": ("dp_pa", "pressure"),
    "level": ("level_m", "length"),
    "ullage": ("ullage_m", "length"),
}
"""Readings that follow the surface: name, to field of the readings and dimension. A pressure above
the liquid may well stand still while the level moves."""

FIGURES = {"mass_kg": "mass", "volume_m3": "volume", "level_m": "length"}
"""Figures that tell a movement, the best first: heat moves volume and level, not mass."""

_NOTHING: Mapping[str, float] = MappingProxyType({})
_UNTYPED: Mapping[str, str] = MappingProxyType({})


@dataclass(frozen=True, slots=True)
class Moment:
    """One reading of a tank, as far as these checks need it.

    Attributes
    ----------
    at_us : int
        Instant of the reading, µs of UTC since 1970.
    readings : Readings
        SI; single readings.
    typed : mapping of str to str
        As typed, by the name of the reading.
    level_m, volume_m3, mass_kg : float or None
        What was answered; None where it was refused.
    uncertainty : mapping of str to float
        Standard uncertainties, SI: of readings by name ("p1"), of figures by key ("mass_kg"). What
        is common to all readings of a tank (elevations, table) cancels in a difference and may be
        left out; with it the checks are the milder. A figure without one is not checked.
    movement : {"static", "receiving", "delivering", ""}
        What was declared.
    """

    at_us: int
    readings: Readings
    typed: Mapping[str, str] = field(default_factory=lambda: _UNTYPED)
    level_m: float | None = None
    volume_m3: float | None = None
    mass_kg: float | None = None
    uncertainty: Mapping[str, float] = field(default_factory=lambda: _NOTHING)
    movement: Movement = ""


def against_history(
    tank: Tank, earlier: Sequence[Moment], now: Moment, *, stuck_after: int = STUCK_AFTER
) -> tuple[Notice, ...]:
    """Return what is odd about a reading, seen against the earlier ones of the same tank.

    Parameters
    ----------
    tank : Tank
        Its largest flows and the elevations of its taps are used.
    earlier : sequence of Moment
        In any order; those that are not before ``now`` have no part in it.
    now : Moment
        The reading to be checked.
    stuck_after : int
        How many readings have to be the same, this one among them, 2 or more.

    Returns
    -------
    tuple of Notice
        Codes "stuck_value", "copied_value", "rate_too_high", "direction_contradicts" and
        "moves_while_static"; none of them refuses.
    """
    before = sorted((m for m in earlier if m.at_us < now.at_us), key=lambda m: m.at_us)
    if not before:
        return ()
    run = [*before[-(stuck_after - 1) :], now]
    last = before[-1]
    return (
        *(_stuck(tank, run) if len(run) >= stuck_after else ()),
        *_copied(last, now),
        *_too_fast(tank, last, now),
        *_movement(last, now),
    )


def _stuck(tank: Tank, run: Sequence[Moment]) -> Iterator[Notice]:
    """Yield the readings that are the same all through a run in which another one moves."""
    moved = [name for name in FOLLOWERS if _has_moved(run, name)]
    for name, (key, dimension) in FOLLOWERS.items():
        values = {getattr(m.readings, key) for m in run}
        if len(values) != 1 or None in values or not moved or not _covered(tank, name, run):
            continue
        shown = units.show(values.pop(), dimension)
        yield Notice(
            "stuck_value",
            f"{name} has read {shown} at the last {len(run)} readings while {moved[0]} moved: it "
            "may be stuck, isolated or frozen.",
            name,
        )


def _has_moved(run: Sequence[Moment], name: str) -> bool:
    """Return whether a reading changed in a run by more than its uncertainties explain."""
    key = FOLLOWERS[name][0]
    known = [
        (getattr(m.readings, key), m.uncertainty[name])
        for m in run
        if getattr(m.readings, key) is not None and name in m.uncertainty
    ]
    if len(known) < 2:
        return False
    (low, u_low), (high, u_high) = min(known), max(known)
    return bool(high - low > MOVED * math.hypot(u_low, u_high))


def _covered(tank: Tank, name: str, run: Sequence[Moment]) -> bool:
    """Return whether an instrument felt the liquid all through a run, as far as that is known."""
    if name not in tank.transmitters:
        return True
    tap_m = tank.transmitters[name].elevation_m
    return all(m.level_m is None or m.level_m > tap_m for m in run)


def _copied(last: Moment, now: Moment) -> Iterator[Notice]:
    """Yield the readings whose text is that of the reading before."""
    for name in FOLLOWERS:
        text = now.typed.get(name, "").strip()
        if text and text == last.typed.get(name, "").strip():
            yield Notice(
                "copied_value",
                f"{name} was typed exactly as at the reading before. If it was read again and is "
                "the same, nothing is wrong.",
                name,
            )


def _too_fast(tank: Tank, last: Moment, now: Moment) -> Iterator[Notice]:
    """Yield a change of volume that the largest flow cannot have made."""
    change = _change(last, now, "volume_m3")
    if change is None:
        return
    moved, uncertainty = change
    seconds = (now.at_us - last.at_us) / 1e6
    largest = tank.largest_in_m3_s if moved > 0.0 else tank.largest_out_m3_s
    if largest is None or abs(moved) <= largest * seconds + COVERAGE * uncertainty:
        return
    way = "in" if moved > 0.0 else "out"
    yield Notice(
        "rate_too_high",
        f"{units.show(abs(moved), 'volume')} {way} since the last reading is "
        f"{units.show(abs(moved) / seconds, 'volume_flow')}, more than the largest flow {way} of "
        f"{tank.name}, {units.show(largest, 'volume_flow')}: this reading or the last is wrong.",
        "level",
    )


def _movement(last: Moment, now: Moment) -> Iterator[Notice]:
    """Yield a movement that contradicts what was declared."""
    found = next(((key, c) for key in FIGURES if (c := _change(last, now, key)) is not None), None)
    if found is None or not now.movement:
        return
    key, (moved, uncertainty) = found
    if abs(moved) <= COVERAGE * uncertainty:
        return
    figure, way = key.split("_")[0], "risen" if moved > 0.0 else "fallen"
    size = units.show(abs(moved), FIGURES[key])
    if now.movement == "static":
        yield Notice(
            "moves_while_static",
            f"The tank was declared at rest, but the {figure} has {way} by {size} since the last "
            "reading.",
            figure,
        )
    elif (now.movement == "receiving") != (moved > 0.0):
        yield Notice(
            "direction_contradicts",
            f"The tank was declared {now.movement}, but the {figure} has {way} by {size} since the "
            "last reading.",
            figure,
        )


def _change(last: Moment, now: Moment, key: str) -> tuple[float, float] | None:
    """Return a figure's change and its standard uncertainty, None where either is not known."""
    values = [getattr(m, key) for m in (last, now)]
    if None in values or not (key in last.uncertainty and key in now.uncertainty):
        return None
    return values[1] - values[0], math.hypot(last.uncertainty[key], now.uncertainty[key])
