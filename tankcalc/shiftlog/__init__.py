"""The append-only log of the shift: its entries, its stores, its times.

Importing the package opens nothing and loads no database: names are looked up when used.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from tankcalc.shiftlog.address import default_log, log_address, named_log, open_store
    from tankcalc.shiftlog.chain import Flaw, VerifyResult
    from tankcalc.shiftlog.clock import ClockWatch, Step
    from tankcalc.shiftlog.earlier import held_against_log, recent_rows
    from tankcalc.shiftlog.entry import Entry, late
    from tankcalc.shiftlog.listing import as_object, as_text
    from tankcalc.shiftlog.make import login_name, note_entry, reading_entry
    from tankcalc.shiftlog.make_corrections import (
        amended_movement,
        amended_reading,
        to_correct,
        withdrawal_entry,
    )
    from tankcalc.shiftlog.make_words import (
        acknowledgement_entry,
        fault_entry,
        movement_entry,
        sign_entry,
    )
    from tankcalc.shiftlog.shifts import Shift, shift_at
    from tankcalc.shiftlog.standing import Corrections, Mark, Standing, standing_between
    from tankcalc.shiftlog.store import Receipt, Row, Store
    from tankcalc.shiftlog.times import iso_utc, now_us, parse_time, show_local, zone_named

_HOME = {
    "default_log": "address",
    "log_address": "address",
    "named_log": "address",
    "open_store": "address",
    "Flaw": "chain",
    "VerifyResult": "chain",
    "ClockWatch": "clock",
    "Step": "clock",
    "held_against_log": "earlier",
    "recent_rows": "earlier",
    "Entry": "entry",
    "late": "entry",
    "as_object": "listing",
    "as_text": "listing",
    "login_name": "make",
    "note_entry": "make",
    "reading_entry": "make",
    "amended_movement": "make_corrections",
    "amended_reading": "make_corrections",
    "to_correct": "make_corrections",
    "withdrawal_entry": "make_corrections",
    "acknowledgement_entry": "make_words",
    "fault_entry": "make_words",
    "movement_entry": "make_words",
    "sign_entry": "make_words",
    "Shift": "shifts",
    "shift_at": "shifts",
    "Corrections": "standing",
    "Mark": "standing",
    "Standing": "standing",
    "standing_between": "standing",
    "Receipt": "store",
    "Row": "store",
    "Store": "store",
    "iso_utc": "times",
    "now_us": "times",
    "parse_time": "times",
    "show_local": "times",
    "zone_named": "times",
}

__all__ = [
    "ClockWatch",
    "Corrections",
    "Entry",
    "Flaw",
    "Mark",
    "Receipt",
    "Row",
    "Shift",
    "Standing",
    "Step",
    "Store",
    "VerifyResult",
    "acknowledgement_entry",
    "amended_movement",
    "amended_reading",
    "as_object",
    "as_text",
    "default_log",
    "fault_entry",
    "held_against_log",
    "iso_utc",
    "late",
    "log_address",
    "login_name",
    "movement_entry",
    "named_log",
    "note_entry",
    "now_us",
    "open_store",
    "parse_time",
    "reading_entry",
    "recent_rows",
    "shift_at",
    "show_local",
    "sign_entry",
    "standing_between",
    "to_correct",
    "withdrawal_entry",
    "zone_named",
]


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f"{__name__}.{_HOME[name]}"), name)
