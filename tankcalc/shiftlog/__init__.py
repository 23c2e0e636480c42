"""The append-only log of the shift: its entries, its stores, its times.

Importing the package opens nothing and loads no database: names are looked up when used.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from tankcalc.shiftlog.address import default_log, log_address, named_log, open_store
    from tankcalc.shiftlog.chain import Flaw, VerifyResult
    from tankcalc.shiftlog.earlier import held_against_log
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.listing import as_object, as_text
    from tankcalc.shiftlog.make import login_name, note_entry, reading_entry
    from tankcalc.shiftlog.shifts import Shift, shift_at
    from tankcalc.shiftlog.store import Receipt, Row, Store
    from tankcalc.shiftlog.times import iso_utc, now_us, parse_time, show_local, zone_named

_HOME = {
    "default_log": "address",
    "log_address": "address",
    "named_log": "address",
    "open_store": "address",
    "Flaw": "chain",
    "VerifyResult": "chain",
    "Entry": "entry",
    "as_object": "listing",
    "as_text": "listing",
    "login_name": "make",
    "note_entry": "make",
    "held_against_log": "earlier",
    "reading_entry": "make",
    "Shift": "shifts",
    "shift_at": "shifts",
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
    "Entry",
    "Flaw",
    "Receipt",
    "Row",
    "Shift",
    "Store",
    "VerifyResult",
    "as_object",
    "as_text",
    "default_log",
    "held_against_log",
    "iso_utc",
    "log_address",
    "login_name",
    "named_log",
    "note_entry",
    "now_us",
    "open_store",
    "parse_time",
    "reading_entry",
    "shift_at",
    "show_local",
    "zone_named",
]


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f"{__name__}.{_HOME[name]}"), name)
