"""What a plan starts from: the reading in front, or else the last one in the log of its tank."""

from __future__ import annotations

import re
from argparse import Namespace
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from tankcalc.cli.plan import OPTIONS, question_from
from tankcalc.errors import InputError, NoAnswerError
from tankcalc.gauging import evaluate
from tankcalc.limits.mixing import contents_of
from tankcalc.limits.plans import plan_of
from tankcalc.text import clean
from tankcalc.tui.desk import Answer
from tankcalc.typed import readings_from_text

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.limits.mixing import Contents
    from tankcalc.limits.plans import Plan
    from tankcalc.profiles import Site
    from tankcalc.result import Result
    from tankcalc.shiftlog import Store
    from tankcalc.tank import Tank

MIXES = "mixes"
_OPTION = re.compile(r"--([a-z][a-z-]*)")


@dataclass(frozen=True, slots=True)
class Subject:
    """A reading to plan from.

    Attributes
    ----------
    tank, fluid, result : Tank, Fluid, Result
        With the uncertainty of the result.
    contents : Contents
        What stands in the tank.
    at_us : int
        When it was read, µs of UTC.
    entry : int or None
        Its number in the log; None: it is the one in front.
    instead : bool
        Whether something is typed in front that gives no answer.
    """

    tank: Tank
    fluid: Fluid
    result: Result
    contents: Contents
    at_us: int
    entry: int | None = None
    instead: bool = False


def subject_of(answer: Answer, at_us: int) -> Subject | None:
    """Return the reading in front as what to plan from; None where it has no honest answer."""
    answer = answer.weighed()
    tank, fluid, readings, result = answer.tank, answer.fluid, answer.readings, answer.result
    if tank is None or fluid is None or readings is None or result is None:
        return None
    if result.status == "refused":
        return None
    contents = contents_of(tank, fluid, readings, result)
    return Subject(tank, fluid, result, contents, at_us)


def subject_in_log(store: Store, site: Site, name: str) -> Subject:
    """Return the last reading in the log of a tank, calculated anew by its files of now.

    Raises
    ------
    NoAnswerError
        There is none, or it has no honest answer.
    """
    row = store.latest().get(name)
    shown = clean(name, 40)
    if row is None:
        raise NoAnswerError(f"{shown} has no reading in the log. Esc, and type one first.")
    entry, tank = row.entry, site.tank(name)
    if entry.judgement == "rejected":
        raise NoAnswerError(
            f"The last reading of {shown}, entry {row.seq}, was rejected. Esc, and type another."
        )
    fluid = site.fluid_for(tank, entry.fluid)
    readings, problems = readings_from_text(tank, entry.typed)
    if not problems:
        result = evaluate(tank, fluid, readings)
        answer = Answer(tank, fluid, entry.typed, result=result, readings=readings)
        found = subject_of(answer, entry.t_us)
        if found is not None:
            return replace(found, entry=row.seq)
    raise NoAnswerError(
        f"The last reading of {shown}, entry {row.seq}, gives no honest answer to plan from. Esc, "
        "and type another one."
    )


def planned(subject: Subject, site: Site, typed: Mapping[str, str]) -> Plan:
    """Return the plan that what was typed asks for; its names are those of ``tankcalc plan``."""
    asked = Namespace(**{name.replace("-", "_"): typed.get(name) for name, _ in OPTIONS})
    asked.not_mixed = not _yes(typed.get(MIXES, "yes"))
    half = subject.result.expanded_uncertainty.get("level_m")
    level_u_m = 0.0 if half is None else half / 2.0
    question = question_from(asked, subject.tank, subject.contents, site, level_u_m)
    return plan_of(subject.tank, subject.contents, question)


def at_fault(words: str) -> str:
    """Return the option that a message is about, empty where it names none first.

    Examples
    --------
    >>> at_fault("--rate needs a unit."), at_fault("The level does not fit.")
    ('rate', '')
    """
    found = _OPTION.match(words)
    return "" if found is None else found[1]


def in_labels(words: str, labels: Mapping[str, str]) -> str:
    """Return a message with the fields' labels in place of the command's options.

    Examples
    --------
    >>> in_labels("--rate needs a unit.", {"rate": "rate in"})
    'rate in needs a unit.'
    """
    return _OPTION.sub(lambda found: labels.get(found[1], found[0]), words)


def _yes(text: str) -> bool:
    word = text.strip().lower()
    if word in ("", "y", "yes"):
        return True
    if word in ("n", "no"):
        return False
    raise InputError(f'--{MIXES} "{clean(text, 20)}": type yes or no.')
