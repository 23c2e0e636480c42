"""The report written to a file: whole and on disk, or not there at all."""

from __future__ import annotations

import contextlib
import os
import tempfile
from collections.abc import Callable, Mapping
from pathlib import Path
from types import MappingProxyType

from tankcalc.errors import InputError, TankcalcError
from tankcalc.handover.document import Document
from tankcalc.handover.html import as_html
from tankcalc.handover.plain import as_markdown
from tankcalc.handover.table import as_csv
from tankcalc.text import clean

FORMS: Mapping[str, Callable[[Document], str]] = MappingProxyType(
    {".html": as_html, ".md": as_markdown, ".csv": as_csv}
)
"""What a file's ending makes of a document."""

_MODE = 0o666


def form_of(path: Path) -> Callable[[Document], str]:
    """Return what the ending of a file's name asks for.

    Raises
    ------
    InputError
        None of the endings of `FORMS`.
    """
    form = FORMS.get(path.suffix.lower())
    if form is None:
        known = ", ".join(FORMS)
        raise InputError(f'"{clean(path.name)}" ends in none of {known}. Name a file that does.')
    return form


def write(text: str, path: Path) -> None:
    """Write a text to a file, in the place of one of that name once it is whole.

    Raises
    ------
    InputError
        There is a folder of that name, or no folder to write it in.
    TankcalcError
        No room, or no right to write there; a file of that name stays as it was.
    """
    shown = clean(str(path))
    if path.is_dir():
        raise InputError(f"{shown} is a folder. Name a file in it.")
    if not path.parent.is_dir():
        raise InputError(f"{shown}: there is no folder {clean(str(path.parent))}. Make it first.")
    try:
        _replace(text, path)
    except OSError as error:
        why = (error.strerror or "it failed").lower()
        raise TankcalcError(f"{shown} was not written: {why}. Name another place.") from error


def _replace(text: str, path: Path) -> None:
    target = Path(os.path.realpath(path))
    number, name = tempfile.mkstemp(prefix=f".{target.name[:100]}.", dir=target.parent)
    try:
        with open(number, "w", encoding="utf-8", newline="") as file:
            file.write(text)
            file.flush()
            os.fsync(number)
            os.fchmod(number, _mode_of(target))
        os.replace(name, target)
    except BaseException:
        with contextlib.suppress(OSError):
            os.unlink(name)
        raise


def _mode_of(path: Path) -> int:
    """Return the rights of the file that is replaced, or those of any new file."""
    if path.exists():
        return path.stat().st_mode & 0o777
    mask = os.umask(0)
    os.umask(mask)
    return _MODE & ~mask
