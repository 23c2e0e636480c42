"""The terminal at the other end: what it can do, and what it must not be able to do to us."""

from __future__ import annotations

import codecs
import os
import signal
from collections.abc import Mapping, MutableMapping
from typing import TYPE_CHECKING, TextIO

if TYPE_CHECKING:
    from codecs import IncrementalDecoder

DEFAULTS = {
    # A sequence split by a slow line is still one key, not Esc and letters.
    "ESCDELAY": "300",
    # Moving pictures cost bytes and say nothing.
    "TEXTUAL_ANIMATIONS": "none",
    # A key changes its own field and then the result: with 60 frames a second the second of the
    # two would wait for 17 ms. Nothing is drawn while nothing changes, at any rate.
    "TEXTUAL_FPS": "250",
    # Few terminals know this keyboard protocol, and some break on it.
    "TEXTUAL_DISABLE_KITTY_KEY": "1",
}
"""Read by the terminal library when it is imported, so they are set before."""

VT100_PLUS = {f"\x1bO{letter}": f"f{n}" for n, letter in enumerate("TUVWXY", start=5)}
"""F5 to F10 as PuTTY's "VT100+" keyboard sends them; the library would type the letters."""


def harden(environ: MutableMapping[str, str]) -> None:
    """Set what the terminal library reads at import; call before importing it."""
    for name, value in DEFAULTS.items():
        environ.setdefault(name, value)


def refusal(environ: Mapping[str, str], streams: tuple[TextIO | None, ...]) -> str | None:
    """Return why no console can be shown here, or None where one can."""
    if not all(stream is not None and stream.isatty() for stream in streams):
        return (
            "The console needs a terminal, and here input or output is none. "
            'Use "tankcalc convert" or "tankcalc shiftlog" instead; they need no screen.'
        )
    if environ.get("TERM", "dumb") in ("", "dumb", "unknown"):
        return (
            f'TERM is "{environ.get("TERM", "")}": a terminal that cannot place text. '
            "Set TERM to what yours is (export TERM=xterm), or use "
            '"tankcalc convert" or "tankcalc shiftlog".'
        )
    return None


def speaks_utf8(environ: Mapping[str, str], encoding: str | None) -> bool:
    """Return whether the terminal can be sent more than ASCII.

    The locale decides, not Python's own encoding: in the C locale Python writes UTF-8 all the
    same, and an old screen shows rubbish. ``encoding`` is that of the stream written to.
    """
    locale = next((environ[k] for k in ("LC_ALL", "LC_CTYPE", "LANG") if environ.get(k)), "C")
    wanted = locale.partition(".")[2].partition("@")[0]
    return all(_is_utf8(name) for name in (wanted, encoding or ""))


def _is_utf8(name: str) -> bool:
    return name.lower().replace("-", "").replace("_", "") == "utf8"


def let_go() -> None:
    """Turn away from a terminal that is gone: what is left to be written has nowhere to go.

    Python would end with status 120 where its last flush fails.
    """
    nowhere = os.open(os.devnull, os.O_RDWR)
    for descriptor in (0, 1, 2):
        os.dup2(nowhere, descriptor)


class Decoder:
    """UTF-8 from the keyboard, where any byte may come.

    A byte that is no UTF-8 (a degree sign from a Latin-1 terminal) becomes U+FFFD, which no
    field takes, instead of ending the program. An empty read means that the terminal is gone:
    the process gets the hang-up it should have had, or it would read nothing for ever.
    """

    def __init__(self) -> None:
        self._decoder: IncrementalDecoder = codecs.getincrementaldecoder("utf-8")("replace")
        self._gone = False

    def decode(self, data: bytes, final: bool = False) -> str:
        """Return the characters that are complete."""
        if not data and not final and not self._gone:
            self._gone = True
            os.kill(os.getpid(), signal.SIGHUP)
        return self._decoder.decode(data, final)


def patch_input() -> None:
    """Make the library's reader take any byte, and the keys it does not know.

    It looks the decoder up in its own module at start; a test fails when it no longer does.
    See Textual issue 6456.
    """
    from textual import _ansi_sequences
    from textual.drivers import linux_driver
    from textual.keys import Keys

    vars(linux_driver)["getincrementaldecoder"] = lambda encoding: Decoder
    keys = _ansi_sequences.ANSI_SEQUENCES_KEYS
    if isinstance(keys, dict):
        keys.update({sequence: (Keys(name),) for sequence, name in VT100_PLUS.items()})
        # Esc and a digit close together are no typographic sign.
        for digit in "0123456789":
            keys.pop(f"\x1b{digit}", None)
