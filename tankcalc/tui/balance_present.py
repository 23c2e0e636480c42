"""A balance as lines for the console."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING

from tankcalc.balance.effects import MASS
from tankcalc.balance.lines import (
    account_lines,
    causes_lines,
    cusum_lines,
    folded,
    period_lines,
    rest_lines,
    transfer_lines,
)
from tankcalc.balance.periods import causes_over, sums_over
from tankcalc.report import CAUTION
from tankcalc.text import clean
from tankcalc.tui.present import Line
from tankcalc.tui.widgets.word_form import Asked

if TYPE_CHECKING:
    from tankcalc.balance.site import SiteBalance, TankBalance
    from tankcalc.tui.balance_ask import Balanced
    from tankcalc.units import System

COLUMNS = (
    (
        Asked("since", "since", '"7 d" for seven days ago, or a local time, "2026-11-30 18:00"'),
        Asked("until", "until", "the same; empty: now"),
    ),
    (
        Asked("tank", "tank", 'one tank, or "all"'),
        Asked("every", "periods of", '"1 d", "8 h": small losses that go on show; empty: one'),
    ),
)
LABELS = {one.name: f'"{one.label}"' for column in COLUMNS for one in column}

Time = Callable[[int], str]


def lines_of(balanced: Balanced, system: System, time: Time) -> list[Line]:
    """Return a balance: each tank, transfers, all tanks, the head of the log, the caution."""
    return [[(text, _style(text))] for text in _page(balanced, system, time)]


def _style(text: str) -> str:
    """Return a style that makes the words that count stand out; the words say it all."""
    if text.startswith("  By ") and "unexplained" in text:
        return "check"
    if text.startswith(("  gain or loss", "  By ")):
        return "figure"
    return "" if text.startswith(" ") else "title"


def _page(balanced: Balanced, system: System, time: Time) -> Iterator[str]:
    found = balanced.found
    for one in found.tanks:
        yield from _tank(one, balanced.ask.periods, system, time)
        yield ""
    if not found.tanks:
        yield from folded("  No reading is logged in that span: there is nothing to balance.")
        yield ""
    if found.transfers:
        yield "Transfers"
        yield from transfer_lines(found.transfers, found.repeated, system)
        yield ""
    if len(found.tanks) > 1 and found.total:
        yield f"All {sum(bool(one.periods) for one in found.tanks)} tanks"
        yield from account_lines(found.total, system)
        yield ""
    number, digest = balanced.head
    yield from folded(f"  Asked over {time(found.cuts[0])} to {time(found.cuts[-1])}.")
    yield f"  Head of the log: {number}:{digest.hex()[:32]}"
    yield from (f"  {line}" for line in folded(CAUTION))


def _tank(one: TankBalance, periods: bool, system: System, time: Time) -> Iterator[str]:
    whole = one.whole
    if whole is None:
        yield clean(one.tank, 40)
        yield from folded(f"  No balance. {' '.join(one.notes)}")
        return
    count = len(whole.movements)
    start, end = whole.opening.state.at_us, whole.closing.state.at_us
    yield from folded(
        f"{clean(one.tank, 40)}, {time(start)} to {time(end)}: {whole.hours:.1f} h, "
        f"{count} movement{'' if count == 1 else 's'}"
    )
    if accounts := whole.accounts():
        yield from account_lines(accounts, system)
    if periods:
        yield from period_lines(one.periods, MASS, system, time)
        if len(one.periods) > 1:
            yield from cusum_lines(sums_over(one.periods, MASS))
            yield from causes_lines(causes_over(one.periods, MASS), MASS, system)
    yield from rest_lines(one.rest, system, time)
    for note in one.notes:
        yield from folded(f"  Note: {note}")


def headline(found: SiteBalance) -> str:
    """Return in a few words what there is to be seen of it."""
    drawn = [one for one in found.tanks if one.whole is not None and one.whole.accounts()]
    if not drawn:
        return "There is no balance; the reasons are above."
    return f"{len(drawn)} of {len(found.tanks)} tanks balanced." if len(found.tanks) > 1 else ""
