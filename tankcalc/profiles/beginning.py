"""Writes a commented starter site."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from tankcalc.errors import InputError, TankcalcError
from tankcalc.profiles.where import SITE_FILE
from tankcalc.text import clean

STARTER = Path(__file__).parent / "starter"
PARTS = ("fluids", "tanks", SITE_FILE)
"""In this order, so that a folder counts as a site only once all of it is there."""


def begin(folder: Path) -> list[Path]:
    """Write the starter site into a new or empty folder and return its files.

    Everything is written beside its place first and moved there whole, so that a full disk
    leaves the folder as it was.

    Raises
    ------
    InputError
        The folder holds something, or the name is that of a file.
    TankcalcError
        The folder cannot be written.
    """
    shown = f'"{clean(str(folder))}"'
    try:
        _refuse_taken(folder, shown)
        is_new = not folder.exists()
        folder.mkdir(parents=True, exist_ok=True)
        try:
            _write(folder)
        except OSError:
            if is_new:
                folder.rmdir()
            raise
    except OSError as error:
        raise TankcalcError(f"{shown}: nothing was written: {error.strerror}.") from error
    return sorted(path for path in folder.rglob("*.toml") if path.is_file())


def _refuse_taken(folder: Path, shown: str) -> None:
    if folder.exists() and not folder.is_dir():
        raise InputError(f"{shown} is a file. Name a new or an empty folder.")
    held = sorted(path.name for path in folder.iterdir()) if folder.exists() else []
    visible = [name for name in held if not name.startswith(".")]
    if visible:
        raise InputError(
            f'{shown} holds "{clean(visible[0])}" already. Name a new or an empty folder.'
        )


def _write(folder: Path) -> None:
    """Write the starter beside its place in the folder, then move it there."""
    with tempfile.TemporaryDirectory(prefix=".begin-", dir=folder) as name:
        staged = Path(name)
        for path in sorted(STARTER.rglob("*.toml")):
            _copy(path, staged / path.relative_to(STARTER))
        moved: list[str] = []
        try:
            for part in PARTS:
                (staged / part).rename(folder / part)
                moved.append(part)
        except OSError:
            for part in moved:
                (folder / part).rename(staged / part)
            raise


def _copy(source: Path, target: Path) -> None:
    """Copy one file and see it on disk, with the permissions of the user's other files."""
    target.parent.mkdir(exist_ok=True)
    with target.open("xb") as file:
        file.write(source.read_bytes())
        file.flush()
        os.fsync(file.fileno())
