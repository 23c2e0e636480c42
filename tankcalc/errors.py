"""Every error a user can meet, and the collector of problems found in files.

    TankcalcError                 anything this program says no to       exit code 1
    +-- InputError (ValueError)   a word, a unit, a value, a file        exit code 2
    |   +-- QuantityError         a quantity that cannot be read
    |   +-- ProfileError          one or more problems in profile files
    |   +-- TimeError             a time that is missing, twice or not there
    +-- GeometryError (ValueError)  dimensions that make no vessel       exit code 2
    +-- RangeError (ValueError)   a level or volume outside the vessel   exit code 3
    +-- NoAnswerError             the readings contradict the tank       exit code 3
    +-- LogBrokenError            a log that does not verify             exit code 4
    +-- StoreError                the log's store: full, read-only, busy, lost, corrupt

Errors hold fields and build their text late, so that a screen can put a message beside the
field it belongs to.
"""

from __future__ import annotations

from dataclasses import dataclass


class TankcalcError(Exception):
    """Base of all errors that are a message to the user rather than a defect."""

    exit_code = 1


class InputError(TankcalcError, ValueError):
    """What was typed or what a file holds cannot be used."""

    exit_code = 2


class QuantityError(InputError):
    """A quantity cannot be read.

    Attributes
    ----------
    text : str
        What was typed, made safe to show.
    why : str
        What is wrong with it.
    advice : str
        What to type instead; may be empty.
    """

    def __init__(self, text: str, why: str, advice: str = "") -> None:
        super().__init__(text, why, advice)
        self.text = text
        self.why = why
        self.advice = advice

    def __str__(self) -> str:
        found = f'"{self.text}": ' if self.text else ""
        return f"{found}{self.why}" + (f" {self.advice}" if self.advice else "")


class TimeError(InputError):
    """A time cannot be read, does not exist, or exists twice."""


class GeometryError(TankcalcError, ValueError):
    """Dimensions that make no vessel.

    Attributes
    ----------
    key : str
        The dimension at fault, named as in a tank file ("heads.depth").
    why : str
        What is wrong with it.
    """

    exit_code = 2

    def __init__(self, key: str, why: str) -> None:
        super().__init__(key, why)
        self.key = key
        self.why = why

    def __str__(self) -> str:
        return f"{self.key}: {self.why}" if self.key else self.why


class FigureError(InputError):
    """One figure of a density model is at fault.

    Attributes
    ----------
    key : str
        The figure, named as in a fluid file ("reference").
    """

    def __init__(self, key: str, why: str) -> None:
        super().__init__(why)
        self.key = key


class RangeError(TankcalcError, ValueError):
    """An elevation or a volume lies outside what the vessel can hold."""

    exit_code = 3


class NoAnswerError(TankcalcError):
    """The readings contradict the tank, or do not settle what is asked."""

    exit_code = 3


class LogBrokenError(TankcalcError):
    """The log does not verify."""

    exit_code = 4


class StoreError(TankcalcError):
    """The log's store did not take or give an entry; nothing was saved."""


class StoreFullError(StoreError):
    """No space left where the log lives."""


class StoreReadOnlyError(StoreError):
    """The log cannot be written: a read-only medium, or no permission."""


class StoreBusyError(StoreError):
    """Another console holds the log; try again."""


class StoreUnavailableError(StoreError):
    """The log cannot be reached or opened."""


class StoreCorruptError(StoreError):
    """The log's file is damaged, or is no log of this program."""


@dataclass(frozen=True, slots=True)
class Problem:
    """One thing wrong in one profile file.

    Attributes
    ----------
    file : str
        The file, relative to the site folder where it lies in one.
    key : str
        Dotted key ("shape.diameter"); empty when the whole file is meant.
    what : str
        What was found.
    advice : str
        What to do about it; may be empty.
    line : int or None
        One-based line, where it is known.
    """

    file: str
    key: str
    what: str
    advice: str = ""
    line: int | None = None

    def __str__(self) -> str:
        where = self.file if self.line is None else f"{self.file}:{self.line}"
        parts = [where, self.key] if self.key else [where]
        return ": ".join([*parts, self.what]) + (f" {self.advice}" if self.advice else "")


class ProfileError(InputError):
    """Profile files with problems; all of them, not only the first.

    Attributes
    ----------
    problems : tuple of Problem
        At least one.
    """

    def __init__(self, problems: list[Problem] | tuple[Problem, ...]) -> None:
        super().__init__(*problems)
        self.problems = tuple(problems)

    def __str__(self) -> str:
        return "\n".join(str(problem) for problem in self.problems)
