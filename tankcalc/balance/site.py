"""The balance of a site: every tank's periods, its transfers, and all tanks as one."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from tankcalc.balance.account import Account, together
from tankcalc.balance.effects import BASES, MASS
from tankcalc.balance.history import MIRROR_US
from tankcalc.balance.moves import METER_SHARE
from tankcalc.balance.notes import notes_on
from tankcalc.balance.periods import Period, periods_of, whole_of
from tankcalc.balance.rest import Rest, rest_of
from tankcalc.balance.transfers import Repeated, Side, Transfer, compare, over_many
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.balance.contents import Evaluated
    from tankcalc.balance.history import History


@dataclass(frozen=True, slots=True)
class TankBalance:
    """One tank over a span.

    Attributes
    ----------
    tank : str
        Its name.
    periods : tuple of Period
        Empty where the tank has no balance.
    notes : tuple of str
        What must be known to read it, or why there is none.
    rest : Rest or None
        The drift of its longest idle stretch, where that was asked for and there is one.
    """

    tank: str
    periods: tuple[Period, ...]
    notes: tuple[str, ...]
    rest: Rest | None = None

    @property
    def whole(self) -> Period | None:
        """The span as one period."""
        return whole_of(self.periods) if self.periods else None


@dataclass(frozen=True, slots=True)
class SiteBalance:
    """A site over a span.

    Attributes
    ----------
    cuts : tuple of int
        The instants that cut it into periods, the ends included, µs of UTC.
    tanks : tuple of TankBalance
        In the order of their names.
    total : mapping of str to Account
        All tanks that have a balance as one, by basis.
    transfers : tuple of Transfer
        In mass, a period each.
    repeated : tuple of (str, str, Repeated)
        Source, target, and what many transfers between them have in common.
    """

    cuts: tuple[int, ...]
    tanks: tuple[TankBalance, ...]
    total: Mapping[str, Account]
    transfers: tuple[Transfer, ...]
    repeated: tuple[tuple[str, str, Repeated], ...]


def balance(
    history: History,
    evaluated: Evaluated,
    cuts: Sequence[int],
    *,
    tank: str | None = None,
    meter_share: float = METER_SHARE,
    with_rest: bool = False,
) -> SiteBalance:
    """Return the balance of a site, or of one tank of it.

    Parameters
    ----------
    history : History
        The log.
    evaluated : Evaluated
        Its readings with what they are worth.
    cuts : sequence of int
        At least two instants, rising, µs of UTC.
    tank : str, optional
        Only this one.
    meter_share : float
        Relative standard uncertainty of a metered movement.
    with_rest : bool
        Whether to look for drift at rest.
    """
    start, end = cuts[0], cuts[-1]
    names = [tank] if tank is not None else history.tanks(start)
    logs = {name: history.tank(name) for name in names}
    opened = [log.at(start) for log in logs.values()]
    moved = history.movements(min([start, *(e.t_us for e in opened if e is not None)]), end)
    for one in (m for name in names for m in moved.get(name, ())):
        source = one.entry.tank or ""
        if source not in logs:  # its density makes a mass of a volume
            logs[source] = history.tank(source)
    tanks = []
    for name in names:
        mine = moved.get(name, [])
        periods = periods_of(name, logs, mine, cuts, evaluated, meter_share)
        rest = rest_of(logs[name], mine, (start, end), evaluated) if with_rest else None
        notes = tuple(notes_on(logs[name], mine, periods, (start, end)))
        if periods or tank is not None or logs[name].at(end) is not None:
            tanks.append(TankBalance(name, tuple(periods), notes, rest))
    tanks = [_with_counterparts(one, tanks) for one in tanks]
    transfers = list(_transfers(tanks))
    return SiteBalance(
        tuple(cuts), tuple(tanks), _total(tanks), tuple(transfers), tuple(_repeated(transfers))
    )


def _with_counterparts(one: TankBalance, tanks: Sequence[TankBalance]) -> TankBalance:
    """Return a tank whose notes name those that gain at rest while it loses, or the reverse."""
    own = _drifts(one)
    opposite = [clean(o.tank) for o in tanks if own and _drifts(o) == -own and _overlap(one, o)]
    if not opposite:
        return one
    what = "gain" if own < 0 else "loss"
    note = f"At rest {', '.join(opposite)} shows a {what} at the same time: a valve may be passing."
    return replace(one, notes=(*one.notes, note))


def _drifts(one: TankBalance) -> int:
    """Return -1 for a significant loss at rest, 1 for a gain, 0 for neither."""
    worth = None if one.rest is None else one.rest.mass.significance
    return 0 if worth is None or abs(worth) <= 1.0 else (1 if worth > 0.0 else -1)


def _overlap(one: TankBalance, other: TankBalance) -> bool:
    a, b = one.rest, other.rest
    return a is not None and b is not None and a.from_us < b.to_us and b.from_us < a.to_us


def _total(tanks: Sequence[TankBalance]) -> dict[str, Account]:
    wholes = [one.whole for one in tanks]
    parts = [(p.opening.state, p.closing.state, p.movements) for p in wholes if p is not None]
    found = {basis: together(basis, parts) for basis in BASES}
    return {basis: one for basis, one in found.items() if one is not None}


def _transfers(tanks: Sequence[TankBalance]) -> Iterator[Transfer]:
    """Yield the transfer of each period between two tanks whose readings bracket it alike."""
    by_name = {one.tank: one for one in tanks}
    for source in tanks:
        for period in source.periods:
            out = [m for m in period.movements if m.kind == "transfer out"]
            for name in dict.fromkeys(m.other for m in out):
                times = [m.at_us for m in out if m.other == name]
                twin = _twin(by_name.get(name), source.tank, times)
                if twin is None:
                    continue
                found = compare(
                    MASS, _side(source.tank, period, name), _side(name, twin, source.tank)
                )
                if found is not None:
                    yield found


def _twin(target: TankBalance | None, source: str, times: Sequence[int]) -> Period | None:
    """Return the target's period that holds the same transfers and no other from that source."""
    for period in target.periods if target is not None else ():
        into = [m.at_us for m in period.movements if (m.kind, m.other) == ("transfer in", source)]
        pairs = zip(into, times, strict=False)
        if len(into) == len(times) and all(abs(a - b) <= MIRROR_US for a, b in pairs):
            return period
    return None


def _side(tank: str, period: Period, other: str) -> Side:
    """Return a tank over the transfer; what else passed between the two counts as transferred."""
    rest = tuple(m for m in period.movements if m.other != other)
    return Side(tank, period.opening.state, period.closing.state, rest)


def _repeated(transfers: Sequence[Transfer]) -> Iterator[tuple[str, str, Repeated]]:
    pairs: dict[tuple[str, str], list[Transfer]] = {}
    for one in transfers:
        pairs.setdefault((one.source, one.target), []).append(one)
    for (source, target), several in pairs.items():
        found = over_many(several)
        if found is not None:
            yield source, target, found
