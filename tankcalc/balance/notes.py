"""What must be known to read a tank's balance, in sentences."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from tankcalc.balance.beginning import beginning_after, words
from tankcalc.balance.effects import RANDOM
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.balance.contents import Contents
    from tankcalc.balance.history import LoggedMovement, TankLog
    from tankcalc.balance.periods import Period

HOUR_US = 3_600_000_000
FAR_H = 0.05
"""A reading this far from the end of a span, h, says so."""


def notes_on(
    log: TankLog,
    moved: Sequence[LoggedMovement],
    periods: Sequence[Period],
    span: tuple[int, int],
) -> Iterator[str]:
    """Yield the notes on a tank's balance, or why there is none."""
    if log.left_out:
        some = "1 reading was" if len(log.left_out) == 1 else f"{len(log.left_out)} readings were"
        yield f"{some} passed over: refused, rejected, or without a mass."
    number = beginning_after(log.history.reader, span[0])
    begins = "" if number is None else f"; {words(number)}"
    if not periods:
        only = "no reading stands" if log.at(span[1]) is None else "only one reading stands"
        yield f"{only}{begins}."
        return
    opening, closing = periods[0].opening, periods[-1].closing
    before = (span[0] - opening.state.at_us) / HOUR_US
    if before < 0.0:
        late = f"{-before:.1f} h late"
        yield f"No reading before the span: it opens with the first one in it, {late}{begins}."
    elif before >= FAR_H:
        yield f"The opening was read {before:.1f} h before the span begins."
    short = (span[1] - closing.state.at_us) / HOUR_US
    if short >= FAR_H:
        yield f"The closing was read {short:.1f} h before the span ends."
    for word, one in (("opening", opening), ("closing", closing)):
        yield from _on_reading(word, one)
    yield from _on_changes(opening, closing)
    yield from _on_movements(periods)
    if any(m.answered for m in moved):
        yield "Both tanks logged a transfer within an hour: it is taken for one."


def _on_reading(word: str, contents: Contents) -> Iterator[str]:
    entry = contents.entry
    if entry.movement in ("receiving", "delivering"):
        yield f"The {word} was read while {entry.movement}: movements in progress are not in it."
    if entry.status == "check":
        yield f"The {word} is to be checked: its readings had warnings."
    if contents.stale:
        yield f"The profiles of the {word} were changed since: its uncertainty is that of now."


def _on_changes(opening: Contents, closing: Contents) -> Iterator[str]:
    """Say what is not the same at the opening and the closing and so does not cancel."""
    before, after = opening.entry.fluid or "", closing.entry.fluid or ""
    if before != after:
        yield (
            f"The product was {clean(before)} and is {clean(after)}: errors of its density do not "
            "cancel."
        )
    held = {e.name: e.origin for e in opening.state.effects if e.origin != RANDOM}
    changed = [
        e.name
        for e in closing.state.effects
        if e.origin != RANDOM and e.name in held and held[e.name] != e.origin
    ]
    other = [name for name in changed if name != "density" or before == after]
    if other and before == after:
        yield f"Changed in between, so that errors do not cancel: {', '.join(other)}."


def _on_movements(periods: Sequence[Period]) -> Iterator[str]:
    moved = [m for period in periods for m in period.movements]
    converted = sum(m.converted for m in moved)
    if converted:
        some = "1 movement was" if converted == 1 else f"{converted} movements were"
        yield f"{some} metered in volume and made mass by the tank's density then."
    unknown = sum(m.amounts.get("mass_kg") is None for m in moved)
    if unknown:
        yield f"{unknown} of the movements have neither mass nor volume: there is no balance."
