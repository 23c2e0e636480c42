"""A defect of this program: written where it can be sent from, in words on the screen."""

from __future__ import annotations

import traceback
from pathlib import Path

from tankcalc.text import clean


def note_defect(folder: Path, error: Exception) -> str:
    """Append the traceback to a file of the state folder and return what to tell the operator."""
    what = clean(f"{type(error).__name__}: {error}", 120)
    path = folder / "defects.txt"
    try:
        with path.open("a", encoding="utf-8") as file:
            file.writelines(traceback.format_exception(error))
    except OSError as full:
        return f"{what} (could not be written down: {full.strerror})."
    return f"{what}. Please send {clean(str(path))} to whoever keeps this program."
