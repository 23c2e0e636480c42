"""Make any string safe to put on a terminal, in a file or in a report."""

from __future__ import annotations

import unicodedata

_DROPPED = frozenset({"Cc", "Cf", "Cs", "Co", "Cn"})


def clean(text: str, limit: int = 200) -> str:
    r"""Return the text with nothing in it that a terminal could act on.

    Control characters, C1 codes, bidirectional marks, zero-width and private characters go;
    runs of white space become one blank; what is longer than ``limit`` characters (at least
    3) is cut and ends in three points.

    Examples
    --------
    >>> clean("T-101\x1b[31m red\n\tnext")
    'T-101[31m red next'
    >>> clean("a" * 10, limit=6)
    'aaa...'
    """
    read = text[: 8 * limit]
    spaced = "".join(" " if ch.isspace() else ch for ch in read)
    normal = unicodedata.normalize("NFC", spaced)
    kept = "".join(ch for ch in normal if unicodedata.category(ch) not in _DROPPED)
    joined = " ".join(kept.split())
    whole = len(read) == len(text) and len(joined) <= limit
    return joined if whole else joined[: limit - 3] + "..."
