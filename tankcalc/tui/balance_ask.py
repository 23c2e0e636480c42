"""What a balance is asked over, from what was typed; and the balance itself, which is slow."""

from __future__ import annotations

from collections.abc import Mapping
from contextlib import closing
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.balance.contents import Evaluated
from tankcalc.balance.history import History
from tankcalc.balance.periods import boundaries
from tankcalc.balance.site import balance
from tankcalc.errors import InputError, QuantityError, TankcalcError
from tankcalc.shiftlog import parse_time
from tankcalc.text import clean

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.balance.site import SiteBalance
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Store

ALL = "all"


@dataclass(frozen=True, slots=True)
class Ask:
    """What a balance is asked over.

    Attributes
    ----------
    cuts : tuple of int
        The instants that cut the span into periods, the ends included, µs of UTC.
    tank : str or None
        Only this one.
    periods : bool
        Whether the periods are wanted one by one.
    """

    cuts: tuple[int, ...]
    tank: str | None
    periods: bool


@dataclass(frozen=True, slots=True)
class Balanced:
    """A balance, and the head of the log it was drawn from."""

    ask: Ask
    found: SiteBalance
    head: tuple[int, bytes]


def ask_of(typed: Mapping[str, str], tanks: list[str], zone: ZoneInfo, now_us: int) -> Ask:
    """Return what is asked; an InputError begins with "--" and the name of the field at fault."""
    since = _instant("since", typed.get("since", ""), zone, now_us)
    until = now_us
    if "until" in typed:
        until = _instant("until", typed["until"], zone, now_us)
    every = _every(typed.get("every"))
    return Ask(
        tuple(boundaries(since, until, every, zone)),
        _tank(typed.get("tank", ALL), tanks),
        every is not None,
    )


def balanced(store: Store, site: Site, ask: Ask) -> Balanced:
    """Return the balance; it reads the log, so it may take its time."""
    with closing(store):
        head = store.head()
        found = balance(
            History(store), Evaluated(site, store), ask.cuts, tank=ask.tank, with_rest=True
        )
    return Balanced(ask, found, head)


def _instant(name: str, text: str, zone: ZoneInfo, now_us: int) -> int:
    """Return the instant of a time, or of so long ago."""
    if not text:
        raise InputError(f'--{name} is empty. Type "7 d" for seven days ago, or a time.')
    try:
        ago_us = units.si(text, "time") * 1e6
    except QuantityError:
        try:
            return parse_time(text, zone)
        except TankcalcError as error:
            raise InputError(f'--{name} {error} Or "7 d": so long ago.') from error
    if not 0.0 < ago_us < now_us:
        raise InputError(f'--{name} "{clean(text, 40)}": that is no time ago.')
    return now_us - round(ago_us)


def _every(text: str | None) -> float | None:
    if text is None:
        return None
    try:
        return units.si(text, "time")
    except QuantityError as error:
        raise InputError(f"--every {error}") from error


def _tank(text: str, tanks: list[str]) -> str | None:
    """Return the tank that is meant, whatever its case; None for all of them."""
    if text.lower() == ALL:
        return None
    known = {name.lower(): name for name in tanks}
    if text in tanks or text.lower() in known:
        return text if text in tanks else known[text.lower()]
    raise InputError(f'--tank "{clean(text, 40)}": there is no such tank. Type one, or "{ALL}".')
