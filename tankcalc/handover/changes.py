"""What changed during a shift."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from itertools import pairwise
from typing import TYPE_CHECKING

from tankcalc.handover.data import AlertChange, Changes, ProfileChange, TankRun
from tankcalc.limits.alerts import Alert, alerts_from
from tankcalc.shiftlog.kinds import (
    ACKNOWLEDGEMENT,
    CLOCK_STEP,
    MOVEMENT,
    NOTE,
    READING,
)
from tankcalc.watch.looks import answered
from tankcalc.watch.past import counts

if TYPE_CHECKING:
    from tankcalc.handover.data import Correction
    from tankcalc.limits.settings import AlertSettings
    from tankcalc.shiftlog.shifts import Shift
    from tankcalc.shiftlog.standing import Standing
    from tankcalc.shiftlog.store import Row
    from tankcalc.units import System
    from tankcalc.watch.site import Watched
    from tankcalc.watch.state import TankWatch


def changes_of(
    watched: Watched,
    shift: Shift,
    stood: Sequence[Standing],
    corrections: Sequence[Correction],
    settings: AlertSettings,
    system: System,
) -> Changes:
    """Return what changed during a shift.

    Parameters
    ----------
    watched : Watched
        The tanks at the instant that the report describes.
    stood : sequence of Standing
        What the log says of the shift, as it stands now.
    corrections : sequence of Correction
        What was corrected during it.
    """
    alerts = [
        change for one in watched.tanks for change in _alerts(one, watched, shift, settings, system)
    ]
    own = [s.row for s in stood if s.entry is not None]
    return Changes(
        runs=tuple(_runs(stood)),
        movements=tuple(s for s in stood if s.row.entry.kind == MOVEMENT),
        corrections=tuple(corrections),
        alerts=tuple(sorted(alerts, key=lambda change: change.at_us)),
        answers=tuple(r for r in own if _answers(r)),
        faults=tuple(r for r in own if r.entry.kind == NOTE and "fault" in r.entry.typed),
        profiles=tuple(_profiles(watched, shift)),
        steps=tuple(r for r in own if r.entry.kind == CLOCK_STEP),
    )


def _answers(row: Row) -> bool:
    return row.entry.kind == ACKNOWLEDGEMENT and row.entry.typed.get("of") == "alert"


def _runs(stood: Iterable[Standing]) -> Iterator[TankRun]:
    by_tank: dict[str, list[Row]] = {}
    for one in stood:
        if one.row.entry.kind == READING and one.holds is not None and counts(one.holds.entry):
            by_tank.setdefault(one.holds.entry.tank or "", []).append(one.holds)
    for tank, rows in sorted(by_tank.items()):
        ordered = sorted(rows, key=lambda row: row.entry.t_us)
        good = [row for row in ordered if answered(row.entry)]
        refused = sum(row.entry.status == "refused" for row in ordered)
        first, last = (good[0], good[-1]) if good else (None, None)
        yield TankRun(tank, len(ordered), refused, first, last)


def _alerts(
    one: TankWatch, watched: Watched, shift: Shift, settings: AlertSettings, system: System
) -> Iterator[AlertChange]:
    """Yield the alerts of a tank that were raised or returned in a shift.

    Held against what stood when it began. Those that were raised, returned and acknowledged
    within it stand no more: they are found from the readings of the shift alone.
    """
    if one.tank is None:
        return
    reach, start = max(settings.stuck_after, 2), shift.start_us
    actions = watched.past.actions.get(one.name, ())
    begun = _active(alerts_from(one.tank, one.looks, actions, start - 1, settings, system))
    earlier = [look for look in one.looks if look.at_us < start][-reach:]
    inside = [look for look in one.looks if look.at_us >= start]
    seen = {
        alert.key: alert
        for alert in alerts_from(
            one.tank, [*earlier, *inside], (), watched.now_us, settings, system
        )
        if alert.key in begun or alert.raised_us >= start
    }
    seen |= {alert.key: alert for alert in one.alerts}
    for key, alert in seen.items():
        if alert.times == 0:
            continue
        if alert.raised_us >= start and key not in begun:
            yield AlertChange(one.name, "raised", alert.raised_us, alert.text)
        if alert.returned_us is not None and alert.returned_us >= start:
            yield AlertChange(one.name, "returned", alert.returned_us, alert.text)


def _active(alerts: Iterable[Alert]) -> set[str]:
    return {alert.key for alert in alerts if alert.active}


def _profiles(watched: Watched, shift: Shift) -> Iterator[ProfileChange]:
    """Yield the profiles that readings of the shift use in another version than the one before."""
    told: set[tuple[str, str]] = set()
    for one in watched.tanks:
        rows = watched.past.entries(one.name)
        for before, row in pairwise(rows):
            if row.entry.t_us < shift.start_us:
                continue
            for what in ("site", "tank", "fluid"):
                was, now = (r.entry.versions.get(what, "") for r in (before, row))
                other = what == "fluid" and before.entry.fluid != row.entry.fluid
                if was and now and was != now and not other and (what, now) not in told:
                    told.add((what, now))
                    yield ProfileChange(row, what, was, now)
