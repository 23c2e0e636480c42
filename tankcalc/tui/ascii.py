"""Every character as one of ASCII, column for column, for terminals that know no other."""

from __future__ import annotations

import unicodedata

_KNOWN = str.maketrans(
    {
        "°": "d",
        "²": "2",
        "³": "3",
        "µ": "u",
        "μ": "u",
        "·": ".",
        "–": "-",
        "—": "-",
        "‘": "'",
        "’": "'",
        "“": '"',
        "”": '"',
        "×": "x",
        "ρ": "r",
        "…": "~",
        "█": "#",
        "▀": "#",
        "▄": "#",
        "▐": "#",
        "▌": "#",
        "▓": "=",
        "▒": "-",
        "░": "~",
        "─": "-",
    }
)


def columns(text: str) -> int:
    """Return the columns a text takes on a terminal."""
    return len(text) if text.isascii() else sum(_columns_of(ch) for ch in text)


def to_ascii(text: str) -> str:
    """Return the text in ASCII, taking the same columns.

    Examples
    --------
    >>> to_ascii("18 °C, Größe 3 m³")
    '18 dC, Gro?e 3 m3'
    """
    if text.isascii():
        return text
    return "".join(_replacement(ch) for ch in text.translate(_KNOWN))


def _columns_of(ch: str) -> int:
    """Return the columns of one character: none for a combining mark, two for a wide one."""
    if unicodedata.combining(ch) or unicodedata.category(ch) in ("Mn", "Me", "Cf"):
        return 0
    return 2 if unicodedata.east_asian_width(ch) in "WF" else 1


def _replacement(ch: str) -> str:
    """Return what stands for one character."""
    if ch.isascii():
        return ch
    base = unicodedata.normalize("NFD", ch)[0]
    return base if base.isascii() else "?" * _columns_of(ch)
