"""All tanks of a site as they stand, each by itself: one that cannot be read spoils no other."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from tankcalc.errors import TankcalcError
from tankcalc.limits.alerts import Alert, alerts_from
from tankcalc.watch.looks import Maker
from tankcalc.watch.older import DAY_US, LONGEST_BACK_US, Stretch, stretch_before
from tankcalc.watch.past import Notes, Past, read_past
from tankcalc.watch.state import TankWatch, with_tank, without_tank

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.profiles import Site
    from tankcalc.shiftlog.store import Store

BACK_US = 7 * DAY_US
"""How far back readings are looked at."""


@dataclass(frozen=True, slots=True)
class Watched:
    """A site at one instant.

    Attributes
    ----------
    now_us, from_us : int
        The instant, and how far back readings were looked at, µs of UTC.
    tanks : tuple of TankWatch
        In the order of their names: those of the site, and those that only the log knows.
    past : Past
        What it was made from.
    """

    now_us: int
    from_us: int
    tanks: tuple[TankWatch, ...]
    past: Past

    @property
    def alerts(self) -> tuple[tuple[str, Alert], ...]:
        """Every alert with the name of its tank's file, raised ones first."""
        pairs = [(one.name, alert) for one in self.tanks for alert in one.alerts]
        states = ("raised", "returned", "acknowledged", "set aside")
        return tuple(sorted(pairs, key=lambda pair: states.index(pair[1].state)))

    def tank(self, name: str) -> TankWatch | None:
        """Return a tank by the name of its file, None where there is none."""
        return next((one for one in self.tanks if one.name == name), None)


@dataclass(slots=True)
class Kept:
    """What stays from one look to the next: profiles, budgets, notes on faults.

    For one site and one store; make a new one where either changes or a profile may have.
    """

    notes: Notes = field(default_factory=Notes)
    makers: dict[str, Maker] = field(default_factory=dict)
    fluids: dict[str, Fluid] = field(default_factory=dict)
    problems: dict[tuple[str, str], str] = field(default_factory=dict)
    older: dict[str, Stretch] = field(default_factory=dict)


def watch(
    store: Store,
    site: Site,
    now_us: int,
    tanks: Sequence[str] | None = None,
    *,
    back_us: int = BACK_US,
    kept: Kept | None = None,
) -> Watched:
    """Return the tanks of a site as they stand at an instant.

    Parameters
    ----------
    store : Store
        The log; what it says of later than ``now_us`` counts as not there.
    now_us : int
        µs of UTC.
    tanks : sequence of str, optional
        Only these, by the names of their files.
    back_us : int
        How far back readings are looked at, µs.
    kept : Kept, optional
        From an earlier call for the same site and store: this one is faster then.
    """
    keep = kept or Kept()
    past = read_past(store, now_us - back_us, now_us, keep.notes)
    names = sorted({*site.tank_names(), *past.tanks()}) if tanks is None else list(tanks)
    found = tuple(
        _since(_watched(name, site, past, keep), store, site, past, keep) for name in names
    )
    return Watched(now_us, now_us - back_us, found, past)


def _watched(name: str, site: Site, past: Past, keep: Kept) -> TankWatch:
    maker = _maker(name, site, keep)
    if maker is None:
        return without_tank(name, past, keep.problems["tank", name])
    used = [row.entry.fluid or "" for row in past.entries(name)] or [maker.tank.contents]
    for fluid in dict.fromkeys(used):
        _fluid(fluid, site, keep)
    known = keep.fluids.get(used[-1])
    product = used[-1] if known is None else known.name
    problem = "\n".join(_problems(used, keep))
    settings = (site.alerts, site.rates)
    return with_tank(name, past, maker, settings, product, problem, site.units)


def _since(one: TankWatch, store: Store, site: Site, past: Past, keep: Kept) -> TankWatch:
    """Return a tank with its alerts from their true beginning, also where that is long ago.

    One that has returned stands until somebody acknowledges it, however long ago it was raised.
    """
    if one.tank is None or not one.looks:
        return one
    first = one.looks[0].at_us
    maker = keep.makers[one.name]
    if past.now_us - LONGEST_BACK_US >= first:
        return one
    found = stretch_before(store, one.name, maker, past.now_us, first, keep.older)
    keep.older[one.name] = found
    if not found.looks:
        return one
    actions = past.actions.get(one.name, ())
    alerts = alerts_from(
        one.tank, [*found.looks, *one.looks], actions, past.now_us, site.alerts, site.units
    )
    return replace(one, alerts=alerts)


def _maker(name: str, site: Site, keep: Kept) -> Maker | None:
    if name not in keep.makers and ("tank", name) not in keep.problems:
        try:
            keep.makers[name] = Maker(site.tank(name), keep.fluids, site.rates.random_share)
        except TankcalcError as error:
            keep.problems["tank", name] = str(error)
    return keep.makers.get(name)


def _fluid(name: str, site: Site, keep: Kept) -> None:
    if not name or name in keep.fluids or ("fluid", name) in keep.problems:
        return
    try:
        keep.fluids[name] = site.fluid(name)
    except TankcalcError as error:
        keep.problems["fluid", name] = str(error)


def _problems(fluids: Sequence[str], keep: Kept) -> Iterator[str]:
    for name in dict.fromkeys(fluids):
        if ("fluid", name) in keep.problems:
            yield keep.problems["fluid", name]
