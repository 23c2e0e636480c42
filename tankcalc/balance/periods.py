"""The span of a balance cut into periods, and each tank's states and movements in them."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import TYPE_CHECKING

from tankcalc.balance.account import Account, Movement, account
from tankcalc.balance.causes import Causes, regress
from tankcalc.balance.cusum import THRESHOLD, Cusum, cusum
from tankcalc.balance.effects import BASES
from tankcalc.balance.moves import METER_SHARE, movement_of
from tankcalc.errors import InputError
from tankcalc.shiftlog.times import instants_of, iso_local

if TYPE_CHECKING:
    from collections.abc import Mapping
    from zoneinfo import ZoneInfo

    from tankcalc.balance.contents import Contents, Evaluated
    from tankcalc.balance.history import LoggedMovement, TankLog

HOUR_US = 3_600_000_000
DAY_S = 86_400.0
MOST_PERIODS = 10_000
"""Periods that a span may be cut into."""


@dataclass(frozen=True, slots=True)
class Period:
    """One tank from one reading to a later one, with all that moved between.

    Attributes
    ----------
    opening, closing : Contents
        The readings.
    movements : tuple of Movement
        After the opening, up to the closing.
    """

    opening: Contents
    closing: Contents
    movements: tuple[Movement, ...]

    @property
    def hours(self) -> float:
        """From reading to reading."""
        return (self.closing.state.at_us - self.opening.state.at_us) / HOUR_US

    def account(self, basis: str) -> Account | None:
        """Return the balance in one basis, None where an amount is not known in it."""
        return account(basis, self.opening.state, self.closing.state, self.movements)

    def accounts(self) -> dict[str, Account]:
        """Return the balances that can be drawn, by basis."""
        found = {basis: self.account(basis) for basis in BASES}
        return {basis: one for basis, one in found.items() if one is not None}


def boundaries(since_us: int, until_us: int, every_s: float | None, zone: ZoneInfo) -> list[int]:
    """Return the instants that cut a span into periods, the ends included, µs of UTC.

    Parameters
    ----------
    every_s : float or None
        Length of a period, s; whole days keep the local time of day when the clocks change.
        None: one period.

    Raises
    ------
    InputError
        The span is empty or backwards, or would be cut into more than `MOST_PERIODS`.
    """
    if until_us <= since_us:
        raise InputError("--until is not after --since. Give a later time.")
    if every_s is None:
        return [since_us, until_us]
    if not every_s >= 60.0:
        raise InputError('--every is less than a minute. Type it as "1 d" or "8 h".')
    if (until_us - since_us) / (every_s * 1e6) > MOST_PERIODS:
        raise InputError(f"--every cuts the span into more than {MOST_PERIODS} periods.")
    cuts = _whole_days if every_s % DAY_S == 0.0 else _even
    return [*cuts(since_us, until_us, every_s, zone), until_us]


def _even(since_us: int, until_us: int, every_s: float, _: ZoneInfo) -> list[int]:
    step = round(every_s * 1e6)
    return list(range(since_us, until_us, step))


def _whole_days(since_us: int, until_us: int, every_s: float, zone: ZoneInfo) -> list[int]:
    """Return the cuts at one local time of day.

    On a day whose clocks skip that time the cut is where it would be without the change.
    """
    start = datetime.fromisoformat(iso_local(since_us, zone)).replace(tzinfo=None)
    step = timedelta(seconds=every_s)
    found: list[int] = []
    for k in itertools.count():
        there = instants_of(start + k * step, zone)
        t_us = there[0] if there else since_us + k * round(every_s * 1e6)
        if t_us >= until_us:
            return found
        found.append(max(t_us, since_us))
    return found


def periods_of(
    tank: str,
    logs: Mapping[str, TankLog],
    moved: Sequence[LoggedMovement],
    cuts: Sequence[int],
    evaluated: Evaluated,
    meter_share: float = METER_SHARE,
) -> list[Period]:
    """Return a tank's periods: from the reading at or before each cut to that at the next.

    A tank that was first read within the span opens with that reading. Cuts between which there
    is no new reading make one longer period.
    """
    log = logs[tank]
    entries = [log.at(cut) for cut in cuts]
    if entries[0] is None and entries[-1] is not None:
        entries[0] = log.first(cuts[0], cuts[-1])
    ordered = sorted((e for e in entries if e is not None), key=lambda e: e.t_us)
    distinct = {e.uid: evaluated.contents(e) for e in ordered}
    found = []
    for opening, closing in itertools.pairwise(distinct.values()):
        between = [
            _movement(one, logs, opening, tank, meter_share)
            for one in moved
            if opening.state.at_us < one.entry.t_us <= closing.state.at_us
        ]
        found.append(Period(opening, closing, tuple(between)))
    return found


def whole_of(periods: Sequence[Period]) -> Period:
    """Return consecutive periods as one."""
    movements = tuple(m for period in periods for m in period.movements)
    return Period(periods[0].opening, periods[-1].closing, movements)


def _movement(
    one: LoggedMovement,
    logs: Mapping[str, TankLog],
    opening: Contents,
    tank: str,
    meter_share: float,
) -> Movement:
    """Return a movement by the contents, then, of the tank that logged it."""
    then = logs.get(one.entry.tank or "", logs[tank]).at(one.entry.t_us) or opening.entry
    return movement_of(one, then.result or {}, opening.density, tank, meter_share)


def sums_over(periods: Sequence[Period], basis: str, threshold: float = THRESHOLD) -> Cusum | None:
    """Return the cumulative sums over periods; None where one has no balance or no uncertainty."""
    standardised = []
    for period in periods:
        found = period.account(basis)
        if found is None or found.standard_uncertainty <= 0.0:
            return None
        standardised.append(found.difference / found.standard_uncertainty)
    return cusum(standardised, threshold=threshold) if len(standardised) > 1 else None


def causes_over(periods: Sequence[Period], basis: str) -> Causes | None:
    """Return the differences regressed on hours, throughput and the shape of the table.

    Notes
    -----
    d_i = a hours_i + b throughput_i + c [f(x_close) - f(x_open)]_i + e_i with f(x) = 4 x (1 - x)
    of the fill x: a goes with evaporation or a passing valve, b with a meter or the scale of the
    table, c is what the table is off when half full, right at both ends. The level itself would
    not do for f: the difference *is* a change of level less the movements, so that a straight f
    explains it by definition, its noise included.
    """
    rows = []
    for period in periods:
        found = period.account(basis)
        opening, closing = period.opening.state.fill, period.closing.state.fill
        if found is None or opening is None or closing is None:
            continue
        shape = 4.0 * (closing * (1.0 - closing) - opening * (1.0 - opening))
        rows.append((found.difference, period.hours, found.throughput, shape))
    if not rows:
        return None
    differences, hours, throughput, shapes = zip(*rows, strict=True)
    return regress(differences, {"hours": hours, "throughput": throughput, "table shape": shapes})
