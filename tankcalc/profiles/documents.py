"""Profile files as they lie on disk: read safely, parsed, and their problems told with lines."""

from __future__ import annotations

import hashlib
import re
import stat
import tomllib
from pathlib import Path
from typing import Any

from tankcalc.errors import Problem, ProfileError
from tankcalc.profiles.findings import Findings, dotted
from tankcalc.profiles.leaves import UnfitError
from tankcalc.text import clean

LARGEST_BYTES = 2_000_000
"""A profile is a page or two, and a table of every millimetre less than 1 MB. Reading TOML takes
up to two seconds a megabyte where somebody means it to."""

_AT = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")

# The parser's time grows with the square of the parts of one dotted key.
_MANY_PARTS = re.compile(
    rb"""(?<![\w-])(?:(?:[\w-]++|"[^"\n]*+"|'[^'\n]*+')[ \t]*+\.[ \t]*+){40}"""
)


def contents(path: Path) -> bytes:
    """Return a file's bytes; raise `UnfitError` where it is no ordinary readable file."""
    if "\0" in str(path):
        raise UnfitError("there is no such file.")
    try:
        found = path.stat()
        if stat.S_ISDIR(found.st_mode):
            raise UnfitError("this is a folder; a file is wanted.")
        if not stat.S_ISREG(found.st_mode):
            raise UnfitError("this is no ordinary file.")
        if found.st_size > LARGEST_BYTES:
            raise UnfitError(f"the file is larger than {LARGEST_BYTES // 1_000_000} MB.")
        return path.read_bytes()
    except FileNotFoundError:
        raise UnfitError("there is no such file.") from None
    except OSError as error:
        raise UnfitError(f"cannot be read: {error.strerror or 'unknown reason'}.") from error


class Document:
    """One TOML file: what it holds, and everything found wrong with it.

    Attributes
    ----------
    path : Path
        Where it lies.
    shown : str
        What messages call it, safe to show.
    data : dict
        What it holds; empty where it cannot be read.
    findings : Findings
        What is wrong, so far.
    held : bytes
        The file's bytes.
    readable : bool
        Whether it could be read as TOML at all.
    """

    def __init__(self, path: Path, shown: str) -> None:
        self.path = path
        self.shown = clean(shown)
        self.data: dict[str, Any] = {}
        self.findings = Findings(path.parent)
        self.held = b""
        self._text = ""
        self._syntax_line: int | None = None
        self.readable = self._load()

    @property
    def whole(self) -> bytes:
        """The file's bytes, followed by those of the files beside it that it refers to."""
        return b"".join((self.held, *self.findings.beside.values()))

    @property
    def version(self) -> str:
        """SHA-256 of all the bytes, in hex."""
        return hashlib.sha256(self.whole).hexdigest()

    def problems(self) -> list[Problem]:
        """Return everything found wrong, each with its line where that can be told."""
        listed = self.findings.listed()
        if not listed:
            return []
        lines: list[int | None] = [self._syntax_line] * len(listed)
        if self.readable:
            from tankcalc.profiles.lines import lines_of

            lines = lines_of(self._text, [finding.at for finding in listed])
        folder = self.shown.rpartition("/")[0]
        problems = []
        for finding, line in zip(listed, lines, strict=True):
            file = self.shown
            if finding.beside is not None:
                file = f"{folder}/{clean(finding.beside[0])}".lstrip("/")
                line = finding.beside[1]
            what, advice = clean(finding.what, 400), clean(finding.advice, 400)
            problems.append(Problem(file, dotted(finding.at), what, advice, line))
        return sorted(problems, key=lambda p: (p.file != self.shown, p.line is None, p.line or 0))

    def refuse(self) -> None:
        """Raise ProfileError where anything was found wrong."""
        if len(self.findings):
            raise ProfileError(self.problems())

    def _load(self) -> bool:
        try:
            self.held = contents(self.path)
            # Editors of some systems begin a file with a byte-order mark.
            self._text = self.held.decode("utf-8-sig")
            if _MANY_PARTS.search(self.held):
                raise UnfitError("a key of the file has more than forty parts.")
            self.data = tomllib.loads(self._text)
        except UnfitError as wrong:
            self.findings.add((), wrong.what, wrong.advice)
        except UnicodeDecodeError as error:
            self._syntax_line = self.held.count(b"\n", 0, error.start) + 1
            self.findings.add((), "this is not UTF-8 text.", "Save it as UTF-8.")
        except tomllib.TOMLDecodeError as error:
            self._note_syntax(str(error))
        except RecursionError:
            self.findings.add((), "lists or tables lie too deep in one another.")
        except ValueError:
            # Python refuses whole numbers beyond 4300 digits.
            self.findings.add((), "a number has far too many digits.")
        return not len(self.findings)

    def _note_syntax(self, message: str) -> None:
        place = _AT.search(message)
        column = ""
        if place is not None:
            message = message[: place.start()]
            last = self._text.rstrip().count("\n") + 1
            self._syntax_line = int(place[1]) if place[1] else last
            column = f" at column {place[2]}" if place[2] else " at the end of the file"
        twice = "overwrite" in message or "twice" in message
        self.findings.add(
            (),
            f"not TOML{column}: {message[:1].lower()}{message[1:]}.",
            "The key or table is there already, further up."
            if twice
            else 'Text and quantities go in quotes, as in height = "12.5 m".',
        )
