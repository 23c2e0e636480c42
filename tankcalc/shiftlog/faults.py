"""What goes wrong with a store's file, in words an operator can act on."""

from __future__ import annotations

import errno

from tankcalc.errors import (
    StoreBusyError,
    StoreCorruptError,
    StoreError,
    StoreFullError,
    StoreReadOnlyError,
    StoreUnavailableError,
)

_MOVED = "SQLITE_READONLY_DBMOVED"
_ROLLBACK = ("SQLITE_READONLY_ROLLBACK", "SQLITE_READONLY_RECOVERY")


def from_sqlite(name: str, text: str, where: str) -> StoreError:
    """Return the error for SQLite's result code by name, its message and the log's address."""
    family = "_".join(name.split("_")[:2])
    text = text.rstrip(".")
    if name == _MOVED:
        return StoreUnavailableError(
            f"the log {where} was moved or deleted while it was open; put it back, or start anew."
        )
    if name in _ROLLBACK:
        return StoreReadOnlyError(
            f"the log {where} holds a write that was cut short and cannot be undone here:"
            " make its folder writable, or copy the file and its -journal to one that is."
        )
    if family == "SQLITE_FULL":
        return StoreFullError(f"no space left for the log {where}; free some and save again.")
    if family in ("SQLITE_READONLY", "SQLITE_PERM"):
        return StoreReadOnlyError(f"the log {where} cannot be written: read-only here.")
    if family in ("SQLITE_BUSY", "SQLITE_LOCKED"):
        return StoreBusyError(f"another console holds the log {where}; save again.")
    # Our statements are right, so a plain error means tables that are not ours any more.
    if family in ("SQLITE_CORRUPT", "SQLITE_NOTADB", "SQLITE_ERROR"):
        return StoreCorruptError(f"the log {where} is damaged, or is no log: {text}.")
    if family == "SQLITE_CONSTRAINT":
        return StoreError(f"the log {where} did not take the entry: {text}.")
    if family in ("SQLITE_IOERR", "SQLITE_CANTOPEN", "SQLITE_NOLFS"):
        return StoreUnavailableError(f"the log {where} cannot be reached: {text}.")
    return StoreError(f"the log {where} failed: {text} ({name}).")


def from_os(error: OSError, where: str) -> StoreError:
    """Return the error for what the operating system said."""
    text = error.strerror or "it failed"
    if error.errno in (errno.ENOSPC, errno.EDQUOT):
        return StoreFullError(f"no space left for the log {where}; free some and save again.")
    if error.errno in (errno.EROFS, errno.EACCES, errno.EPERM):
        return StoreReadOnlyError(f"the log {where} cannot be written: {text}.")
    return StoreUnavailableError(f"the log {where} cannot be reached: {text}.")
