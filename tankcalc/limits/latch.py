"""One alert through time: raised, acknowledged, set aside, returned; latched until acknowledged."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

from tankcalc.errors import InputError
from tankcalc.limits.conditions import Condition

What = Literal["acknowledge", "set aside", "bring back"]
State = Literal["raised", "acknowledged", "set aside", "returned"]


@dataclass(frozen=True, slots=True)
class Action:
    """What a person did about an alert.

    Attributes
    ----------
    key : str
        The alert's.
    what : {"acknowledge", "set aside", "bring back"}
        What was done.
    by : str
        Who did it; not blank.
    at_us : int
        When, µs of UTC.
    until_us : int or None
        When the setting aside ends, µs of UTC; after ``at_us``.
    reason : str
        Why it was set aside; not blank then.

    Raises
    ------
    InputError
        No name; or set aside without a reason or an end.
    """

    key: str
    what: What
    by: str
    at_us: int
    until_us: int | None = None
    reason: str = ""

    def __post_init__(self) -> None:
        if not self.by.strip():
            raise InputError("an alert is acknowledged by name. Give one.")
        if self.what != "set aside":
            return
        if not self.reason.strip():
            raise InputError("an alert is set aside for a reason. Give it.")
        if self.until_us is None or self.until_us <= self.at_us:
            raise InputError("an alert is set aside until a time that is still to come. Give it.")


class Latch:
    """The state of one alert, moved on by conditions and actions in the order of time.

    ``open`` says whether there is anything to tell: the condition holds, or has returned and was
    not acknowledged.
    """

    def __init__(self, key: str, on_delay_us: int, off_delay_us: int) -> None:
        self.key = key
        self._say: Callable[[], str] = str
        self.active = self.open = self.consequent = False
        self.times = 0
        self.since_us = self.raised_us = 0
        self.returned_us: int | None = None
        self.acknowledged: Action | None = None
        self.aside: Action | None = None
        self._holds = False
        self._holds_since_us = 0
        self._delay_us = {True: on_delay_us, False: off_delay_us}

    @property
    def text(self) -> str:
        """What was found, the last time that the condition held."""
        return self._say() or self.key.replace("_", " ")

    @property
    def state(self) -> State:
        """The state in a word."""
        if self.aside is not None:
            return "set aside"
        if not self.active:
            return "returned"
        return "raised" if self.acknowledged is None else "acknowledged"

    def advance(self, t_us: int) -> None:
        """Let delays and settings aside that end by an instant come to their end."""
        while (due := self._due()) is not None and due[0] <= t_us:
            due[1](due[0])

    def meet(self, condition: Condition, t_us: int) -> None:
        """Take a condition as it is from an instant on."""
        self.advance(t_us)
        if condition.holds is None:
            return
        if condition.holds != self._holds:
            self._holds, self._holds_since_us = condition.holds, t_us
        if condition.holds:
            self._say = condition.say
        self.advance(t_us)

    def act(self, action: Action) -> None:
        """Take what a person did; an acknowledgement of nothing changes nothing."""
        self.advance(action.at_us)
        if action.what == "bring back":
            self._end_aside(action.at_us)
        elif action.what == "set aside":
            self.aside = action
            self.open = self.active
        elif self.active:
            self.acknowledged = action
        else:
            self.open = False

    def _due(self) -> tuple[int, Callable[[int], None]] | None:
        """Return what comes next by the clock alone, and when."""
        if self.aside is None and self._holds == self.active:
            return None
        found: list[tuple[int, Callable[[int], None]]] = []
        if self.aside is not None and self.aside.until_us is not None:
            found.append((self.aside.until_us, self._end_aside))
        if self._holds != self.active:
            change = self._rise if self._holds else self._return
            found.append((self._holds_since_us + self._delay_us[self._holds], change))
        return min(found, key=lambda pair: pair[0], default=None)

    def _end_aside(self, t_us: int) -> None:
        """Raise it anew when it still holds: nobody has answered for what it is now."""
        if self.aside is None:
            return
        self.aside = None
        if self.active:
            self.acknowledged, self.raised_us = None, t_us

    def _rise(self, t_us: int) -> None:
        if not self.open:
            self.since_us, self.raised_us, self.times = self._holds_since_us, t_us, 0
            self.acknowledged = None
        self.active = self.open = True
        self.returned_us = None
        self.times += 1

    def _return(self, t_us: int) -> None:
        self.active = False
        self.returned_us = t_us
        if self.consequent or self.acknowledged is not None or self.aside is not None:
            self.open = False
