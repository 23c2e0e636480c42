"""Where a log begins whose older entries were archived."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tankcalc.balance.history import Reader
    from tankcalc.shiftlog.store import Store


def beginning_after(store: Store | Reader, t_us: int) -> int | None:
    """Return the number of a log's first entry where what came before was archived.

    None where nothing came before it, or where the log reaches back to the instant asked for
    (µs of UTC).
    """
    from tankcalc.shiftlog.sqlite_store import SqliteStore

    if not isinstance(store, SqliteStore):
        return None
    before = store.begins()[0]
    if not before:
        return None
    rows = store.tail(1, before=before + 2)
    return before + 1 if not rows or rows[0].entry.t_us > t_us else None


def words(number: int) -> str:
    """Return where the log begins, as half a sentence."""
    return f"the log begins with entry {number} (archived before)"
