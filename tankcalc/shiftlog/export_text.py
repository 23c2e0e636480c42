r"""Text that stays text in a spreadsheet: nothing in it is carried out, nothing in it is hidden.

A cell that begins like a formula gets an apostrophe before it, which `unguarded` takes off
again. A number is never text, so a negative figure stays one.

Examples
--------
>>> guarded('=HYPERLINK("http://x")'), guarded("dip agrees"), guarded("-0.5 kPa")
('\'=HYPERLINK("http://x")', 'dip agrees', "'-0.5 kPa")
>>> unguarded(guarded("-0.5 kPa"))
'-0.5 kPa'
>>> visible("red\x1b[31m\tnext\u202e")
'red␛[31m␉next<U+202E>'
"""

from __future__ import annotations

import unicodedata

_FORMULA = frozenset("=+-@|%\t\r\n＝＋－＠")
_BEFORE = frozenset("\"'`\u200b\ufeff")
_HIDDEN = frozenset({"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"})


def guarded(text: str) -> str:
    """Return a text that no spreadsheet takes for a formula."""
    return f"'{text}" if _is_like_a_formula(text) else text


def unguarded(text: str) -> str:
    """Return what a guarded text was before."""
    return text[1:] if text[:1] == "'" and _is_like_a_formula(text[1:]) else text


def visible(text: str) -> str:
    """Return a text with everything in it shown that a screen would act on or hide.

    Control characters become their pictures of Unicode (␛), others their number (<U+202E>).
    """
    return "".join(map(_shown, text)) if not text.isascii() or not text.isprintable() else text


def _is_like_a_formula(text: str) -> bool:
    for ch in text:
        if ch in _FORMULA:
            return True
        if not (ch.isspace() or ch in _BEFORE):
            return False
    return False


def _shown(ch: str) -> str:
    if ch < " ":
        return chr(0x2400 + ord(ch))
    if ch == "\x7f":
        return "␡"
    return f"<U+{ord(ch):04X}>" if unicodedata.category(ch) in _HIDDEN else ch
