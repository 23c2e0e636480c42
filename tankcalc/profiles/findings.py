"""What is wrong in one file, collected while it is read; lines are looked up at the end."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from typing import NamedTuple

from tankcalc.text import clean

At = tuple[str | int, ...]
"""Where in a file: keys, and positions in lists counted from zero."""

MOST = 20
"""Problems listed for one file; a file with more is better looked at as a whole."""


class Finding(NamedTuple):
    """One thing wrong: where, what was found, what to do.

    ``beside`` names the file it is in, with the line, where that is one the TOML file refers to.
    """

    at: At
    what: str
    advice: str = ""
    beside: tuple[str, int | None] | None = None


class Findings:
    """The things wrong in one file and in what it refers to, in the order they were met."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.beside: dict[str, bytes] = {}
        self._found: list[Finding] = []

    def add(self, at: At, what: str, advice: str = "") -> None:
        """Note one thing."""
        self._found.append(Finding(at, what, advice))

    def add_beside(self, file: str, line: int | None, what: str, advice: str = "") -> None:
        """Note one thing in a file that lies beside this one."""
        self._found.append(Finding((), what, advice, (file, line)))

    def __len__(self) -> int:
        return len(self._found)

    def listed(self) -> list[Finding]:
        """Return what is to be shown: the first `MOST`, then how many are left out."""
        left = len(self._found) - MOST
        if left <= 0:
            return list(self._found)
        more = Finding((), f"{left} more problems are not listed.", "Mend these first.")
        return [*self._found[:MOST], more]


def dotted(at: At) -> str:
    """Return a place as a dotted key, list entries counted from one.

    Examples
    --------
    >>> dotted(("shape", "courses", 0, "height"))
    'shape.courses.1.height'
    """
    return ".".join(str(key + 1) if isinstance(key, int) else clean(key, 40) for key in at)


def show(value: object) -> str:
    """Return a value from a file as it may be repeated in a message."""
    match value:
        case str():
            return f'"{clean(value, 40)}"'
        case bool():
            return "true" if value else "false"
        case dict():
            return "a table"
        case list():
            return "a list"
    return clean(str(value), 40)


def nearest(word: str, known: Iterable[str]) -> str | None:
    """Return the known name that a word is most likely meant to be; None where none is like it.

    Examples
    --------
    >>> nearest("diametre", ["diameter", "height"])
    'diameter'
    """
    import difflib

    by_lower = {name.lower(): name for name in known}
    near = difflib.get_close_matches(clean(word, 60).lower(), by_lower, n=1, cutoff=0.6)
    return by_lower[near[0]] if near else None


def did_you_mean(word: str, known: Iterable[str]) -> str:
    """Return the advice for a word that is not known: the nearest spelling, or all there are.

    Examples
    --------
    >>> did_you_mean("diametre", ["diameter", "height"])
    'Did you mean "diameter"?'
    >>> did_you_mean("x", ["diameter", "height"])
    'Known here: diameter, height.'
    """
    names = sorted(known)
    if not names:
        return ""
    near = nearest(word, names)
    if near is not None:
        return f'Did you mean "{clean(near, 40)}"?'
    shown = ", ".join(clean(name, 40) for name in names[:12])
    return f"Known here: {shown}{', ...' if len(names) > 12 else '.'}"
