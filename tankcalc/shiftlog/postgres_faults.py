"""What goes wrong with a log in PostgreSQL, in words an operator can act on."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from tankcalc.errors import (
    StoreBusyError,
    StoreCorruptError,
    StoreError,
    StoreFullError,
    StoreReadOnlyError,
    StoreUnavailableError,
)

if TYPE_CHECKING:
    from psycopg import Error

    from tankcalc.shiftlog.postgres_address import PostgresAddress

# Classes and codes: PostgreSQL documentation, appendix A, "PostgreSQL Error Codes".
_BUSY = {"40001", "40P01", "55P03", "57014"}
_READ_ONLY = {"25006", "42501"}
_DAMAGED = {"3F000", "42P01", "42703", "42883", "XX001", "XX002"}
_REACHED = ("08", "53", "57", "58")
_LET_IN = ("28", "3D")
# libpq gives no code for a connection that was not made: what is left is the server's words.
_TURNED_AWAY = re.compile(
    r"authentication failed|no password supplied|no pg_hba\.conf entry|not permitted to log in"
    r"|(?:role|database) .* does not exist|permission denied for database"
)


def from_postgres(error: Error, address: PostgresAddress) -> StoreError:
    """Return the error for what psycopg raised; no message holds the password."""
    where, code = address.where, error.sqlstate or ""
    # libpq's first line says what happened, the others what to try.
    first = str(error).strip().partition("\n")[0]
    text = address.without_secrets(first).rstrip(".") or type(error).__name__
    if code == "53100":
        return StoreFullError(
            f"no space left on the server of the log {where}; free some and save again."
        )
    if code in _BUSY:
        return StoreBusyError(f"another console holds the log {where}; save again.")
    if code in _READ_ONLY:
        return StoreReadOnlyError(f"the log {where} cannot be written: {text}.")
    if code in _DAMAGED:
        return StoreCorruptError(f"the log {where} is damaged, or is no log: {text}.")
    if code[:2] == "23" or code == "P0001":
        return StoreError(f"the log {where} did not take the entry: {text}.")
    if code[:2] in _LET_IN or (not code and _TURNED_AWAY.search(text)):
        return StoreUnavailableError(
            f"the server of the log {where} refused the login: {text}."
            " Check the name, the password and the database in the address."
        )
    if is_lost(error):
        return StoreUnavailableError(
            f"the server of the log {where} cannot be reached: {text}. Try again once it is back."
        )
    return StoreError(f"the log {where} failed: {text}.")


def is_lost(error: Error) -> bool:
    """Return whether the connection, or the server behind it, is gone."""
    from psycopg import InterfaceError, OperationalError

    if error.sqlstate is None:
        return isinstance(error, OperationalError | InterfaceError)
    return error.sqlstate[:2] in _REACHED and error.sqlstate not in _BUSY | {"53100"}
