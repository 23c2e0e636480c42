"""What a dialog asks before something is logged; no widget here."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc.errors import InputError, TimeError
from tankcalc.text import clean

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

WHO, NOTE, REASON, WITNESS, AT = "who", "note", "reason", "witness", "at"
MOVING, JUDGED = "moving", "judged"
"""Names of what is asked; what was answered is kept under them."""

Answers = Mapping[str, str]
"""What was answered, by name."""

_CLOCK = re.compile(r"([01]?\d|2[0-3]):[0-5]\d", re.ASCII)


@dataclass(frozen=True, slots=True)
class Ask:
    """One thing that is asked.

    Attributes
    ----------
    name : str
        What it is called among the answers; the id of its field.
    label : str
        What stands before it, up to 12 characters.
    options : tuple of str
        What can be chosen; empty: words are typed.
    longest : int
        Most characters of the words.
    """

    name: str
    label: str
    options: tuple[str, ...] = ()
    longest: int = 200


ASK_WHO = Ask(WHO, "who", longest=80)
ASK_NOTE = Ask(NOTE, "note")
ASK_REASON = Ask(REASON, "reason")
ASK_WITNESS = Ask(WITNESS, "witness", longest=80)
ASK_AT = Ask(AT, "read at", longest=40)

NOT_SAID = "not said"
ASK_MOVING = Ask(MOVING, "tank is", (NOT_SAID, "static", "receiving", "delivering"))

ACCEPT, REJECT = "accept", "reject"
ASK_JUDGED = Ask(JUDGED, "result", (ACCEPT, REJECT))

TIME_HELP = 'empty: now; "14:30" today, "2026-12-01T14:30" or with "Z" or an offset'


def declared(answers: Answers) -> str:
    """Return what was declared of the tank, as the log keeps it."""
    said = answers.get(MOVING, NOT_SAID)
    return "" if said == NOT_SAID else said


def typed_time(text: str, zone: ZoneInfo, now_us: int) -> int | None:
    """Return the instant that was typed, None for nothing typed.

    A time of day alone is meant today; where that is still to come the date is asked for. A
    TimeError says what to type where a change of the clocks makes a time unclear.
    """
    from tankcalc.shiftlog import parse_time
    from tankcalc.shiftlog.times import FUTURE_US, local_date

    typed = text.strip()
    if not typed:
        return None
    if not _CLOCK.fullmatch(typed):
        return parse_time(typed, zone, now_us)
    today = local_date(now_us, zone).date().isoformat()
    t_us = parse_time(f"{today}T{typed.rjust(5, '0')}", zone)
    if t_us > now_us + FUTURE_US:
        raise TimeError(
            f'"{clean(typed)}" today is still to come. Type the date as well: "{today}T{typed}".'
        )
    return t_us


def named(answers: Answers) -> str:
    """Return who it is; an InputError where nobody is named."""
    who = answers.get(WHO, "").strip()
    if not who:
        raise MissingError(WHO, "Who is it? Type your name or initials, then Enter.")
    return who


class MissingError(InputError):
    """Something asked for was not answered; ``name`` says which."""

    def __init__(self, name: str, words: str) -> None:
        super().__init__(words)
        self.name = name
