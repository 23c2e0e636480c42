"""Gains and losses over a shift, worded: never a cause, only what they are worth."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.balance.account import COVERAGE, Account, verdict
from tankcalc.balance.effects import MASS, STANDARD
from tankcalc.handover.document import Item, Section, Table
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.handover.data import Handover, TankPart
    from tankcalc.units import System

_BASES = {MASS: ("mass", "mass"), STANDARD: ("standard volume", "volume")}
_HEADINGS = ("Tank", "In", "Moved", "Gain or loss", "+/- (k = 2)", "Verdict")
_IN_PROGRESS = "no verdict while a movement is in progress"


def balances(handover: Handover) -> Section:
    """Return the balance of every tank that was read, and what must be known to read it."""
    system = handover.place.system
    rows = tuple(row for part in handover.tanks for row in _rows(part, system))
    notes = tuple(item for part in handover.tanks for item in _notes(part))
    table = Table(_HEADINGS, rows, _HEADINGS[2:5])
    nothing = handover.unbalanced or "No tank has a reading to balance."
    return Section("Unexplained gains and losses", clean(nothing, 400), notes, table)


def _rows(part: TankPart, system: System) -> Iterator[tuple[str, ...]]:
    whole = None if part.balance is None else part.balance.whole
    if whole is None:
        return
    for basis, one in whole.accounts().items():
        yield (
            clean(part.watch.name, 40),
            _BASES[basis][0],
            *_figures(one, system),
            _said(part, one),
        )


def _figures(one: Account, system: System) -> tuple[str, str, str]:
    dimension = _BASES[one.basis][1]
    half = COVERAGE * one.standard_uncertainty
    moved, over, give = (
        units.show(value, dimension, system) for value in (one.throughput, one.difference, half)
    )
    return moved, f"+{over}" if one.difference > 0.0 else over, give


def _said(part: TankPart, one: Account) -> str:
    """Return the verdict; a movement that is not yet metered would look like a gain or a loss."""
    whole = None if part.balance is None else part.balance.whole
    ends = () if whole is None else (whole.opening.entry, whole.closing.entry)
    moving = any(entry.movement in ("receiving", "delivering") for entry in ends)
    return _IN_PROGRESS if moving else verdict(one.significance)


def _notes(part: TankPart) -> Iterator[Item]:
    found = part.balance
    if found is not None and found.notes:
        text = " ".join(clean(note, 400) for note in found.notes)
        yield Item(text, "balance", clean(part.watch.name, 40))
