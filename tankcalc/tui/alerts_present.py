"""Alerts and limits as lines for the console: symbol and word always, never colour alone."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.limits.kinds import ORDER
from tankcalc.limits.levels import limit_words
from tankcalc.limits.times import duration
from tankcalc.text import clean
from tankcalc.tui.ascii import columns
from tankcalc.tui.log_lines import clock, wall
from tankcalc.tui.moments import moment
from tankcalc.tui.present import CAUTION, NOT_LOOKED, Line, clip, spread, wrapped

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.limits.alerts import Alert
    from tankcalc.limits.latch import State
    from tankcalc.limits.times import Arrival
    from tankcalc.units import System
    from tankcalc.watch import TankWatch, Watched

Pair = tuple[str, "Alert"]
"""The name of a tank's file, and one of its alerts."""

STATES: tuple[State, ...] = ("raised", "returned", "acknowledged", "set aside")

ON_FIRST: tuple[State, ...] = ("raised", "acknowledged", "returned", "set aside")
"""One mark stands for all alerts of a tank: that one has ended must not hide one that is on."""

WORDS: Mapping[State, str] = {
    "raised": "ALERT",
    "returned": "ended",
    "acknowledged": "ackn.",
    "set aside": "aside",
}
"""What stands beside a tank in the list."""

SHORT: Mapping[State, str] = {
    "raised": "RAISED",
    "returned": "ENDED",
    "acknowledged": "ackn.",
    "set aside": "aside",
}

STYLES: Mapping[State, str] = {
    "raised": "check",
    "returned": "key",
    "acknowledged": "",
    "set aside": "",
}

LIST_SYMBOLS: Mapping[State, str] = {"acknowledged": "="}
"""Where a symbol of an alert means something else in the list of tanks: there * is in front."""

NOT_RAISED = "not raised"

TANK_COLUMNS = 10
STATE_COLUMNS = 10


def ordered(watched: Watched | None) -> tuple[Pair, ...]:
    """Return every alert with the name of its tank, the most pressing first."""

    def rank(pair: Pair) -> tuple[int, int, int]:
        alert = pair[1]
        kind = ORDER.index(alert.key) if alert.key in ORDER else len(ORDER)
        return STATES.index(alert.state), kind, alert.since_us

    return () if watched is None else tuple(sorted(watched.alerts, key=rank))


def marks_of(watched: Watched | None) -> dict[str, tuple[str, str]]:
    """Return symbol and word of each tank that has alerts: of one that is on, if any is."""
    on_first = sorted(ordered(watched), key=lambda pair: ON_FIRST.index(pair[1].state))
    found: dict[str, tuple[str, str]] = {}
    for name, alert in on_first:
        symbol = LIST_SYMBOLS.get(alert.state, alert.symbol)
        found.setdefault(name, (symbol, WORDS[alert.state]))
    return found


def counted(pairs: Sequence[Pair]) -> str:
    """Return how many there are of each state.

    Examples
    --------
    >>> counted([])
    'none open'
    """
    counts = [(sum(a.state == state for _, a in pairs), state) for state in STATES]
    return ", ".join(f"{n} {state}" for n, state in counts if n) or "none open"


def main_line(
    watched: Watched | None, trouble: str, front: str, key: str, width: int
) -> list[Line]:
    """Return the one row about alerts on the main screen; none where there is nothing to tell."""
    if trouble:
        return [[(clip(f"? ALERTS NOT KNOWN: {clean(trouble)}", width), "check")]]
    if watched is None:
        return [[(clip(NOT_LOOKED, width), "check")]]
    pairs = ordered(watched)
    if not pairs:
        return []
    first = pairs[0][1]
    equals = [pair for pair in pairs if (pair[1].state, pair[1].key) == (first.state, first.key)]
    name, alert = next((pair for pair in equals if pair[0] == front), equals[0])
    said = f"{alert.symbol} ALERTS {counted(pairs)}: {clean(name, 20)} {clean(alert.text)}"
    return [[(spread(said, key, width), STYLES[alert.state])]]


def list_lines(
    pairs: Sequence[Pair], at: int, now_us: int, zone: ZoneInfo, height: int, width: int
) -> list[Line]:
    """Return a row for each alert around the marked one."""
    times = [_since(alert, now_us, zone) for _, alert in pairs]
    wide = max(map(len, times), default=0)
    first = min(max(at - height // 2, 0), max(len(pairs) - height, 0))
    room = max((columns(clip(clean(name), TANK_COLUMNS)) for name, _ in pairs), default=0)
    lines: list[Line] = []
    for n, (name, alert) in enumerate(pairs[first : first + height], start=first):
        lead = ">" if n == at else " "
        state = f"{alert.symbol} {SHORT[alert.state]}"
        tank = clip(clean(name), TANK_COLUMNS)
        tank += " " * (room - columns(tank))
        others = sum(other == name for other, _ in pairs) > 1
        first_out = "FIRST " if alert.first_out and others else ""
        head = f"{lead} {state:<{STATE_COLUMNS}}{times[n]:<{wide}} {tank} {first_out}"
        row = clip(head + clean(alert.text), width)
        fill = " " * (width - columns(row)) if n == at else ""
        lines.append([(row + fill, _style(alert, n == at))])
    return lines


def _since(alert: Alert, now_us: int, zone: ZoneInfo) -> str:
    """Return since when it is on; an alert that was never raised has no such time."""
    return day_time(alert.since_us, now_us, zone) if alert.times else NOT_RAISED


def day_time(t_us: int, now_us: int, zone: ZoneInfo) -> str:
    """Return weekday and time of an instant of today, date and time of any other."""
    then = wall(t_us, zone)
    today = then.date() == wall(now_us, zone).date()
    return then.strftime("%a %H:%M" if today else "%d %b %H:%M")


def _style(alert: Alert, marked: bool) -> str:
    return "focus" if marked else STYLES[alert.state]


def detail_lines(name: str, alert: Alert, zone: ZoneInfo, width: int) -> list[Line]:
    """Return everything there is to tell of one alert."""
    lines = wrapped(f"{name}: {alert.text}", "figure", width)
    for consequence in alert.consequences:
        lines += wrapped(f"with it: {consequence}", "", width)
    for words in _life(alert, zone):
        lines += wrapped(words, "", width)
    return lines


def _life(alert: Alert, zone: ZoneInfo) -> Iterator[str]:
    on = f"On since {clock(alert.since_us, zone)}"
    if alert.returned_us is not None:
        on = f"Was on from {clock(alert.since_us, zone)} to {clock(alert.returned_us, zone)}"
    if alert.raised_us > alert.since_us:
        on += f", raised {clock(alert.raised_us, zone)}"
    if alert.times == 0:
        on = "It was not raised"
    if alert.times > 1:
        on += f"; {alert.times} times since it was last acknowledged"
    yield f"{on}.{' It is the first of those that stand in this tank.' if alert.first_out else ''}"
    if alert.by:
        did = "Set aside" if alert.until_us is not None else "Acknowledged"
        when = "" if alert.by_us is None else f" {clock(alert.by_us, zone)}"
        yield f"{did} by {clean(alert.by, 40)}{when}."
    if alert.until_us is not None:
        until = clock(alert.until_us, zone)
        yield f"Comes back by itself {until}. Reason: {clean(alert.reason, 200)}."
    if alert.state == "returned":
        yield "Its condition is gone, and nobody has acknowledged it yet."


def limit_lines(
    found: TankWatch | None, name: str, now_us: int, zone: ZoneInfo, system: System, width: int
) -> list[Line]:
    """Return level, rate and how far every limit of a tank is, in volume and in time."""
    shown = clean(name, 40)
    if found is None:
        return wrapped(f"{shown}: nothing is known yet.", "", width)
    lines: list[Line] = []
    if found.problem:
        lines += wrapped(f"X {found.problem}", "refused", width)
    if found.held is None:
        return [*lines, *wrapped(f"{shown}: no reading of the last days is in the log.", "", width)]
    age = duration(max(now_us - found.held.entry.t_us, 0) / 1e6)
    read = clock(found.held.entry.t_us, zone)
    product = clean(found.product, 40)
    head = f"{shown}, {product}: entry {found.held.seq}, read {read}, {age} ago"
    lines += wrapped(head, "figure", width)
    if found.refused:
        lines += wrapped("! The last reading has no answer; this is an older one.", "check", width)
    for words in _state(found, system):
        lines += wrapped(words, "", width)
    if found.contradiction is not None:
        lines += wrapped(f"! {found.contradiction.message}", "check", width)
    at_us = found.held.entry.t_us
    if any(a.earliest_s and at_us + a.earliest_s * 1e6 < now_us for a in found.arrivals):
        words = "! A time below may be past by now. Read the tank again."
        lines += wrapped(words, "check", width)
    return [*lines, [], *_table(found, zone, system, width)]


def _state(found: TankWatch, system: System) -> Iterator[str]:
    level, half = found.figure("level_m"), found.half("level_m")
    if level is not None:
        give = "" if half is None else f" +/- {units.show(half, 'length', system)}"
        yield f"level {units.show(level, 'length', system)}{give}"
    if found.rate is None:
        yield "rate: not known; it takes two readings of the last days"
    else:
        yield f"rate: {found.rate.words(system)}"
    if found.ullage_volume_m3 is not None:
        yield f"empty above it {units.show(found.ullage_volume_m3, 'volume', system)}"
    if found.pumpable_m3 is not None:
        pumpable = units.show(found.pumpable_m3, "volume", system)
        yield f"above minimum working {pumpable}"


def _table(found: TankWatch, zone: ZoneInfo, system: System, width: int) -> list[Line]:
    """Return a row a limit: its level, room up to it, and when it is reached."""
    if not found.distances:
        return wrapped("The tank's file states no limits.", "", width)
    held = found.held
    assert held is not None
    head = f"{'limit':<16}{'level':>11}{'room':>17}"
    if not found.arrivals:
        rows = [head, *(_limit(found, n, system) for n in range(len(found.distances)))]
        why = "static: no limit is on the way" if _static(found) else "no time to a limit is known"
        return [*([(row, "")] for row in rows), [], *wrapped(why, "", width)]
    lines: list[Line] = [[(f"{head}   {'not before':<17}at the latest", "title")]]
    for n, arrival in enumerate(found.arrivals):
        when = _times(arrival, held.entry.t_us, zone)
        lines.append([(clip(f"{_limit(found, n, system)}   {when}", width), "")])
    return [*lines, [], *wrapped("* only if the rate stays what it is", "", width)]


def _static(found: TankWatch) -> bool:
    return found.rate is not None and bool(found.rate.static)


def _limit(found: TankWatch, n: int, system: System) -> str:
    one = found.distances[n]
    # Feet as decimals: three of them are finer than sixteenths, and narrower.
    level = units.show(one.level_m, "length", system, digits=3)
    return f"{limit_words(one.limit):<16}{level:>11}{units.show(one.room_m3, 'volume', system):>17}"


def _times(arrival: Arrival, at_us: int, zone: ZoneInfo) -> str:
    """Return the early and the late bound as times of day."""
    if arrival.passed:
        return "reached already"
    if arrival.earliest_s is None:
        return "not on the way"
    early = moment(at_us, arrival.earliest_s, zone)
    late = "not known" if arrival.latest_s is None else moment(at_us, arrival.latest_s, zone)
    return f"{early:<17}{late}{' *' if arrival.extrapolates in (True, None) else ''}"


def caution_line(width: int) -> Line:
    """Return what alerts are not."""
    return [(clip(f" {CAUTION}. No alert does not mean safe.", width), "key")]
