"""Tanks at rest in the log: their longest idle stretch, its drift, and what drifts with it."""

from __future__ import annotations

import bisect
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc.balance.drift import DAY_H, LEAST, Drift, drift
from tankcalc.balance.effects import MASS

if TYPE_CHECKING:
    from tankcalc.balance.contents import Evaluated
    from tankcalc.balance.history import LoggedMovement, TankLog
    from tankcalc.readings import Readings
    from tankcalc.shiftlog.entry import Entry

HOUR_US = 3_600_000_000
MOVING = ("receiving", "delivering")
"""What is declared of a tank that is not at rest."""


@dataclass(frozen=True, slots=True)
class Rest:
    """A tank at rest.

    Attributes
    ----------
    from_us, to_us : int
        First and last reading, µs of UTC.
    mass : Drift
        kg an hour.
    pressures : dict of str to Drift
        Pa an hour of "p1", "p3" and "p1 - p2", where they were read all along.
    hints : tuple of str
        What speaks for or against the product being what drifts.
    """

    from_us: int
    to_us: int
    mass: Drift
    pressures: dict[str, Drift]
    hints: tuple[str, ...]


def rest_of(
    log: TankLog, moved: Sequence[LoggedMovement], span: tuple[int, int], evaluated: Evaluated
) -> Rest | None:
    """Return the drift over the longest idle stretch of a span; None without a usable one.

    Parameters
    ----------
    span : (int, int)
        µs of UTC, ends included.
    """
    entries = max(_stretches(log, moved, span), key=_length, default=())
    if len(entries) < LEAST:
        return None
    hours = [(e.t_us - entries[0].t_us) / HOUR_US for e in entries]
    mass = drift(hours, [float((e.result or {})[MASS]) for e in entries])
    if mass is None:
        return None
    pressures = dict(_pressures(hours, [evaluated.readings(e) for e in entries]))
    return Rest(entries[0].t_us, entries[-1].t_us, mass, pressures, tuple(_hints(mass, pressures)))


def _length(entries: Sequence[Entry]) -> int:
    return entries[-1].t_us - entries[0].t_us


def _stretches(
    log: TankLog, moved: Sequence[LoggedMovement], span: tuple[int, int]
) -> Iterator[Sequence[Entry]]:
    """Yield the readings between which nothing moved and nothing was declared to move."""
    times = sorted(m.entry.t_us for m in moved)
    current: list[Entry] = []
    last_us = span[0]
    # Two readings at one instant are one instant's: the later entry holds.
    by_time = {e.t_us: e for e in log.from_to(*span)}
    for entry in by_time.values():
        broken = bisect.bisect_right(times, last_us) < bisect.bisect_right(times, entry.t_us)
        if current and (broken or entry.movement in MOVING):
            yield current
            current = []
        if entry.movement not in MOVING:
            current.append(entry)
        last_us = entry.t_us
    if current:
        yield current


_WATCHED: dict[str, Callable[[Readings], float | None]] = {
    "p1": lambda r: _float(r.p1_pa),
    "p3": lambda r: _float(r.p3_pa),
    "p1 - p2": lambda r: (
        None if r.p1_pa is None or r.p2_pa is None else float(r.p1_pa) - float(r.p2_pa)
    ),
}


def _float(value: object) -> float | None:
    return float(value) if isinstance(value, int | float) else None


def _pressures(
    hours: Sequence[float], readings: Sequence[Readings | None]
) -> Iterator[tuple[str, Drift]]:
    for name, of in _WATCHED.items():
        values = [None if r is None else of(r) for r in readings]
        known = [value for value in values if value is not None]
        if len(known) == len(values):
            found = drift(hours, known)
            if found is not None:
                yield name, found


def _hints(mass: Drift, pressures: dict[str, Drift]) -> Iterator[str]:
    if not mass.whole_days:
        over = mass.hours / DAY_H
        yield (
            f"Over {mass.hours:.1f} h ({over:.1f} daily cycles) single readings were compared: sun "
            "and night may show as drift. Three whole days or more are compared by daily means."
        )
    if not _significant(mass):
        return
    if _significant(pressures.get("p3")):
        yield (
            "p3 drifts as well: the gas space or a transmitter's zero may be what moves, not the "
            "product."
        )
    if _significant(pressures.get("p1 - p2")):
        yield (
            "p1 and p2 drift apart: a transmitter's zero, or a density that changes, may be what "
            "moves."
        )
    elif "p1 - p2" in pressures:
        yield "p1 and p2 keep together: two transmitters see the same."
    if "p1" in pressures and not _significant(pressures["p1"]):
        yield "p1 itself does not drift significantly: look at the temperatures behind the mass."


def _significant(found: Drift | None) -> bool:
    worth = None if found is None else found.significance
    return worth is not None and abs(worth) > 1.0
