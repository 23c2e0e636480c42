"""The names of tanks and fluids: what files there are, found without reading any."""

from __future__ import annotations

import os
from pathlib import Path

from tankcalc.errors import InputError
from tankcalc.text import clean

SUFFIX = ".toml"


def files_in(folder: Path) -> list[Path]:
    """Return the profile files of a folder, by name; hidden ones are no profiles."""
    try:
        with os.scandir(folder) as entries:
            names = [entry.name for entry in entries]
    except FileNotFoundError:
        return []
    except OSError as error:
        why = error.strerror or "unknown reason"
        raise InputError(f"{clean(str(folder))}: cannot be read: {why}.") from error
    kept = (name for name in names if name.endswith(SUFFIX) and not name.startswith("."))
    return [folder / name for name in sorted(kept)]


def names_in(folder: Path) -> list[str]:
    """Return what the profiles of a folder are called: file names that can be typed and shown."""
    return [path.stem for path in files_in(folder) if is_clean(path.stem)]


def is_clean(name: str) -> bool:
    """Return whether a name shows exactly as it is."""
    return clean(name) == name
