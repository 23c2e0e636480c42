"""What the parts of the console tell each other."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from textual.message import Message

if TYPE_CHECKING:
    from tankcalc.profiles import Site
    from tankcalc.tank import Tank


@dataclass
class EngineReady(Message):
    """The site is read and the calculation loaded."""

    site: Site


@dataclass
class EngineFailed(Message):
    """The site could not be read; ``why`` is for the operator."""

    why: str


@dataclass
class TanksRead(Message):
    """Every tank file was read: the sound ones, and why the others are not."""

    sound: dict[str, Tank]
    broken: dict[str, str]


@dataclass
class TankChosen(Message):
    """The operator moved to another tank."""

    name: str


@dataclass
class EntryChanged(Message):
    """A field of the entry holds another text."""

    name: str
    text: str


@dataclass
class EntryLeft(Message):
    """The operator left a field."""

    name: str


@dataclass
class FieldsMoved(Message):
    """Other fields of the entry are in sight than before."""


@dataclass
class NotAllowed(Message):
    """Something was typed or pasted that this field does not take."""

    name: str


@dataclass
class EntryWanted(Message):
    """The operator goes from the list of tanks to the readings."""


@dataclass
class CommandGiven(Message):
    """The operator gave a command of the registry, by its id."""

    id: str
