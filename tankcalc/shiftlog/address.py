"""Where a site's log is kept, and the store behind an address."""

from __future__ import annotations

import hashlib
import os
import re
import unicodedata
from pathlib import Path
from typing import TYPE_CHECKING, Protocol

from tankcalc.errors import InputError, StoreUnavailableError
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.shiftlog.store import Store

_SCHEME = re.compile(r"([A-Za-z][A-Za-z0-9+.-]*)://")


class LogSite(Protocol):
    """What choosing a log needs to know of a site."""

    @property
    def folder(self) -> Path:
        """The site's folder."""

    @property
    def name(self) -> str:
        """The site's name."""

    @property
    def log_store(self) -> str | None:
        """What its file says of the log."""


def named_log(option: str | None) -> str | None:
    """Return the address that the command line or ``$TANKCALC_LOG`` names, if one of them does."""
    if option is not None:
        if not option.strip():
            raise InputError("--log names no file. Give a file, or leave the option out.")
        return option
    named = os.environ.get("TANKCALC_LOG", "")
    return named if named.strip() else None


def log_address(option: str | None, site: LogSite) -> str:
    """Return the address of the site's log.

    First match wins: the option ``--log``; ``$TANKCALC_LOG``; ``store`` in ``site.toml`` (an
    address, or a file relative to the site's folder); a file named after the site in the
    user's data folder, so that the demo's entries never mix with a real site's.
    """
    named = named_log(option)
    if named is not None:
        return named
    if site.log_store in (None, "", "sqlite"):
        return str(default_log(site.name))
    assert site.log_store is not None
    if _SCHEME.match(site.log_store):
        return site.log_store
    return str(site.folder / _expanded(site.log_store))


def default_log(site_name: str) -> Path:
    """Return the file in the user's data folder that a site of that name logs to."""
    from platformdirs import user_data_path

    return user_data_path("tankcalc") / f"{_file_stem(site_name)}.sqlite"


def open_store(address: str | Path) -> Store:
    """Return the store behind an address: a file, or a database of ``postgresql://…``.

    Nothing is opened yet: the first call that needs it does, so a log that cannot be reached
    is an error of that call and not of the program's start.
    """
    path = log_file(address)
    if path is None:
        from tankcalc.shiftlog.postgres_store import PostgresStore

        return PostgresStore(str(address))
    from tankcalc.shiftlog.sqlite_store import SqliteStore

    return SqliteStore(path)


def log_file(address: str | Path) -> Path | None:
    """Return the file that an address names; None: it names a PostgreSQL database.

    Raises
    ------
    StoreUnavailableError
        It names neither.
    """
    text = str(address)
    scheme = _SCHEME.match(text)
    if scheme:
        kind = scheme[1].lower()
        if kind in ("postgresql", "postgres"):
            return None
        raise StoreUnavailableError(
            f'no log is kept at "{clean(kind)}://". Name a file, or a postgresql:// address.'
        )
    if "\0" in text:
        raise StoreUnavailableError(f'"{clean(text)}" is no name for a file.')
    return _expanded(text)


def _expanded(text: str) -> Path:
    try:
        return Path(text).expanduser()
    except RuntimeError as error:
        raise StoreUnavailableError(f'"{clean(text)}": there is no such home folder.') from error


def _file_stem(name: str) -> str:
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode().lower()
    stem = re.sub(r"[^a-z0-9]+", "-", plain).strip("-")[:60] or "site"
    if re.fullmatch(r"[A-Za-z0-9 ]{1,60}", name):
        return stem
    # Two names that differ only in what a file name cannot hold must not share a log.
    return f"{stem}-{hashlib.sha256(name.encode('utf-8', 'surrogatepass')).hexdigest()[:8]}"
