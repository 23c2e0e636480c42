"""Alerts of one tank, rebuilt from its history and from what people did about them.

Alerts, not alarms: nothing here is a safety function, and an alert needs no action by itself.
States and words follow the life of an alarm in ISA-18.2 and IEC 62682 as cited in public text.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING

from tankcalc.limits.conditions import Condition, conditions
from tankcalc.limits.kinds import IMMEDIATE, ORDER, STALE, causes_of
from tankcalc.limits.latch import Action, Latch, State
from tankcalc.limits.looks import Look
from tankcalc.limits.settings import AlertSettings
from tankcalc.limits.times import duration
from tankcalc.tank import Tank
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.units import System

SYMBOLS: dict[State, str] = {"raised": "!", "acknowledged": "*", "set aside": "~", "returned": "-"}
"""Beside the word, never instead of it; colour says nothing that these do not."""

Step = tuple[int, int, int, Action | tuple[Condition, ...]]
"""What happens next: its instant, readings before people, its place in line, what it is."""

_STATES: tuple[State, ...] = ("raised", "returned", "acknowledged", "set aside")


@dataclass(frozen=True, slots=True)
class Alert:
    """One alert as it stands.

    Attributes
    ----------
    tank, key : str
        Whose, and which.
    state : {"raised", "acknowledged", "set aside", "returned"}
        "returned": its condition is gone, and nobody has acknowledged it yet.
    text : str
        What was found, last.
    active : bool
        Whether its condition holds.
    since_us, raised_us : int
        When the condition came, and when it was raised (after its delay), µs of UTC.
    returned_us : int or None
        When the condition was gone, µs of UTC.
    times : int
        How often it was raised since somebody last acknowledged it; zero for one that was set
        aside and never raised: its times are those of the setting aside.
    first_out : bool
        Whether it is the first of those that stand.
    by, by_us : str, int or None
        Who acknowledged it or set it aside, and when (µs of UTC).
    until_us, reason : int or None, str
        Of the setting aside.
    consequences : tuple of str
        What else is on because of it.
    """

    tank: str
    key: str
    state: State
    text: str
    active: bool
    since_us: int
    raised_us: int
    returned_us: int | None = None
    times: int = 1
    first_out: bool = False
    by: str = ""
    by_us: int | None = None
    until_us: int | None = None
    reason: str = ""
    consequences: tuple[str, ...] = ()

    @property
    def symbol(self) -> str:
        """One plain character for the state."""
        return SYMBOLS[self.state]

    def words(self) -> str:
        """Return the alert as one line of text: symbol, state, who, what, what comes with it."""
        parts = [f"{self.symbol} {self.state.upper()}"]
        if self.by:
            parts.append(f"by {clean(self.by, 40)}")
        if self.reason:
            parts.append(f"({clean(self.reason, 80)})")
        if self.state == "set aside" and not self.active:
            parts.append("(not on)")
        line = f"{' '.join(parts)}: {clean(self.tank, 40)}: {clean(self.text, 400)}"
        if self.consequences:
            line += f"; with it: {clean('; '.join(self.consequences), 400)}"
        return line


def alerts_from(
    tank: Tank,
    history: Sequence[Look],
    actions: Sequence[Action],
    now_us: int,
    settings: AlertSettings | None = None,
    system: System = "metric",
) -> tuple[Alert, ...]:
    """Return the alerts of a tank as they stand, the most pressing first.

    Parameters
    ----------
    history : sequence of Look
        In any order; what is later than ``now_us`` counts as not there.
    actions : sequence of Action
        In any order, of this tank.
    now_us : int
        The present instant, µs of UTC.
    settings : AlertSettings or None
        None: the defaults.

    Returns
    -------
    tuple of Alert
        What is raised, acknowledged or set aside, and what has returned and was not acknowledged.
        What is on only because of another alert is named with that one, and closes with it.

    Notes
    -----
    A fold in the order of time: the same history gives the same alerts, whenever it is asked. An
    acknowledgement counts for what stood at its instant, one at the same instant as a reading for
    what that reading showed. A reading that is logged late or amended changes what stood then,
    and so may leave an alert unacknowledged.
    """
    chosen = settings or AlertSettings()
    latches: dict[str, Latch] = {}
    events = [*_seen(tank, history, chosen, system), *_stale(history, now_us, chosen)]
    steps: list[Step] = [(t_us, 0, n, found) for n, (t_us, found) in enumerate(events)]
    steps += [(one.at_us, 1, n, one) for n, one in enumerate(actions)]
    for t_us, _, _, what in sorted(steps, key=lambda step: step[:3]):
        if t_us > now_us:
            break
        _advance(latches, t_us)
        if isinstance(what, Action):
            _latch(latches, what.key, chosen).act(what)
        else:
            for condition in what:
                _latch(latches, condition.key, chosen).meet(condition, t_us)
        _settle(latches)
    _advance(latches, now_us)
    return _listed(tank, latches)


def _seen(
    tank: Tank, history: Sequence[Look], settings: AlertSettings, system: System
) -> Iterator[tuple[int, tuple[Condition, ...]]]:
    ordered = sorted(history, key=lambda look: look.at_us)
    reach = max(settings.stuck_after, 2)
    for n, look in enumerate(ordered):
        latest = ordered[max(n + 1 - reach, 0) : n + 1]
        yield look.at_us, (*conditions(tank, latest, settings, system), Condition(STALE, False))


def _stale(
    history: Sequence[Look], now_us: int, settings: AlertSettings
) -> Iterator[tuple[int, tuple[Condition, ...]]]:
    """Yield when the last reading had become stale."""
    limit_us = round(settings.stale_after_s * 1e6)
    say = partial("no reading for more than {}".format, duration(settings.stale_after_s))
    times = sorted({look.at_us for look in history if look.at_us <= now_us})
    for n, t_us in enumerate(times):
        after = times[n + 1] if n + 1 < len(times) else now_us
        if after - t_us > limit_us:
            yield t_us + limit_us, (Condition(STALE, True, say),)


def _latch(latches: dict[str, Latch], key: str, settings: AlertSettings) -> Latch:
    if key not in latches:
        on_us = 0 if key in IMMEDIATE else round(settings.on_delay_s * 1e6)
        latches[key] = Latch(key, on_us, round(settings.off_delay_s * 1e6))
    return latches[key]


def _advance(latches: dict[str, Latch], t_us: int) -> None:
    for latch in latches.values():
        latch.advance(t_us)
    _settle(latches)


def _settle(latches: dict[str, Latch]) -> None:
    """Mark what is on because of another alert; once its cause is gone it stands by itself."""
    for latch in latches.values():
        if latch.active:
            latch.consequent = _cause(latches, latch.key) is not None
        elif not latch.open:
            latch.consequent = False


def _cause(latches: dict[str, Latch], key: str) -> str | None:
    """Return the alert at the root of another one, None where it is its own."""
    return next((c for c in causes_of(key) if c in latches and latches[c].active), None)


def _listed(tank: Tank, latches: dict[str, Latch]) -> tuple[Alert, ...]:
    told = [latch for latch in latches.values() if latch.open or latch.aside is not None]
    own = [latch for latch in told if not (latch.active and latch.consequent)]
    own.sort(key=lambda latch: (_STATES.index(latch.state), _rank(latch.key), latch.since_us))
    standing = [latch for latch in own if latch.open]
    first = min(standing, key=lambda latch: (latch.since_us, _rank(latch.key)), default=None)
    rest = sorted((latch for latch in told if latch not in own), key=lambda x: _rank(x.key))
    return tuple(
        _alert(
            tank,
            latch,
            latch is first,
            tuple(one.text for one in rest if _cause(latches, one.key) == latch.key),
        )
        for latch in own
    )


def _rank(key: str) -> int:
    return ORDER.index(key) if key in ORDER else len(ORDER)


def _alert(tank: Tank, latch: Latch, first_out: bool, consequences: tuple[str, ...]) -> Alert:
    said = latch.aside or (latch.acknowledged if latch.active else None)
    # Set aside before it was ever raised: it has no time of its own but that of the setting aside.
    never = latch.aside.at_us if latch.times == 0 and latch.aside is not None else None
    return Alert(
        tank=tank.name,
        key=latch.key,
        state=latch.state,
        text=latch.text if never is None else f"{latch.text} (not raised)",
        active=latch.active,
        since_us=latch.since_us if never is None else never,
        raised_us=latch.raised_us if never is None else never,
        returned_us=None if latch.active else latch.returned_us,
        times=latch.times,
        first_out=first_out,
        by=said.by if said is not None else "",
        by_us=said.at_us if said is not None else None,
        until_us=latch.aside.until_us if latch.aside is not None else None,
        reason=latch.aside.reason if latch.aside is not None else "",
        consequences=consequences,
    )
