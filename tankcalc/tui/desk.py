"""What the operator has in front of them: a site, a tank, a fluid, and what was typed so far.

It knows no widget. Heavy imports happen inside its methods, after the first paint.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from tankcalc.errors import TankcalcError
from tankcalc.tui.fields import READINGS, label_of

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.profiles import Site
    from tankcalc.readings import Readings
    from tankcalc.result import Result
    from tankcalc.tank import Tank
    from tankcalc.tui.logbook import Unsaved
    from tankcalc.units import System

SYSTEMS: tuple[System, ...] = ("metric", "us", "imperial")

LOADING = "Loading the calculation: ready in a moment. Type on."


@dataclass(frozen=True, slots=True)
class Answer:
    """What the readings typed so far say.

    Attributes
    ----------
    tank, fluid : Tank, Fluid or None
        None where its file could not be read, or nothing is read yet.
    typed : mapping of str to str
        The readings as typed, without the empty ones.
    problems : mapping of str to str
        Field to why it cannot be used.
    result : Result or None
        None where there is nothing to calculate, or something typed cannot be read: a figure
        that leaves a reading out would be taken for one that uses it.
    why : str
        Why there is no result; empty when there is one.
    readings : Readings or None
        What the result was made of.
    """

    tank: Tank | None = None
    fluid: Fluid | None = None
    typed: Mapping[str, str] = field(default_factory=dict)
    problems: Mapping[str, str] = field(default_factory=dict)
    result: Result | None = None
    why: str = ""
    readings: Readings | None = None

    def weighed(self) -> Answer:
        """Return the answer with the uncertainty of its figures."""
        if self.tank is None or self.fluid is None or self.readings is None:
            return self
        if self.result is None or self.result.status == "refused":
            return self
        from tankcalc.uncertainty import assess, with_uncertainty

        budget = assess(self.tank, self.fluid, self.readings)
        return replace(self, result=with_uncertainty(self.result, budget))

    @property
    def fitted(self) -> set[str]:
        """Tags of the transmitters the tank has."""
        if self.tank is None:
            return set()
        return {*self.tank.transmitters, *({"dp"} if self.tank.dp is not None else ())}


@dataclass(frozen=True, slots=True)
class Kept:
    """What a dialog that was left had asked so far, and what it had sent and not saved."""

    answers: Mapping[str, str] = field(default_factory=dict)
    sent: Unsaved | None = None


@dataclass(slots=True)
class Entry:
    """What was typed for one tank, and the density profile chosen for it.

    ``unsaved`` is an entry of the log that was sent and not saved: while the readings stay as
    they are, it is sent again rather than a second one made.
    """

    fields: dict[str, str] = field(default_factory=dict)
    fluid: str = ""
    cleared: dict[str, str] = field(default_factory=dict)
    unsaved: Unsaved | None = None

    def type(self, name: str, text: str) -> None:
        """Hold the text of a field; an empty one is dropped."""
        self.unsaved = None
        if text.strip():
            self.fields[name] = text
        else:
            self.fields.pop(name, None)

    def clear(self) -> None:
        """Empty all fields; once more brings them back."""
        self.fields, self.cleared = self.cleared, self.fields
        self.unsaved = None

    def done(self) -> None:
        """Empty all fields for good: what they held is in the log."""
        self.fields, self.cleared, self.unsaved = {}, {}, None


class Desk:
    """The state of one console."""

    def __init__(self, tank_names: list[str], units: System | None = None) -> None:
        self.site: Site | None = None
        self.tank_names = tank_names
        self.tank_name = tank_names[0] if tank_names else ""
        self.units: System = units or SYSTEMS[0]
        self.who = ""
        self.trouble = ""
        self.broken: dict[str, str] = {}
        self.kept: dict[str, Kept] = {}
        self._tanks: dict[str, Tank] = {}
        self._fluids: dict[tuple[str, str], Fluid] = {}
        self._entries: dict[str, Entry] = {}
        self._units_asked = units is not None

    def open(self, site: Site) -> None:
        """Take a site that was read, and show its units unless others were asked for."""
        self.site = site
        self.tank_names = site.tank_names()
        if self.tank_name not in self.tank_names:
            self.tank_name = self.tank_names[0] if self.tank_names else ""
        if not self._units_asked:
            self.units = site.units

    def know(self, sound: Mapping[str, Tank], broken: Mapping[str, str]) -> None:
        """Take the tanks that were read meanwhile."""
        self._tanks = {**sound, **self._tanks}
        self.broken = dict(broken)

    def forget_fluids(self) -> None:
        """Read the fluids again: a file was written. What was not saved rests on the old one."""
        self._fluids.clear()
        for entry in self._entries.values():
            entry.unsaved = None

    @property
    def entry(self) -> Entry:
        """What was typed for the tank in front."""
        return self.entry_of(self.tank_name)

    def entry_of(self, tank: str) -> Entry:
        """Return what was typed for a tank."""
        return self._entries.setdefault(tank, Entry())

    @property
    def unfinished(self) -> set[str]:
        """Tanks for which something was typed and not logged."""
        return {name for name, entry in self._entries.items() if entry.fields}

    @property
    def left(self) -> list[str]:
        """What was typed into a dialog that was left, and not sent to the log."""
        return [name for name, kept in self.kept.items() if kept.sent is None]

    @property
    def unsaved(self) -> list[str]:
        """What was sent to the log from a dialog and not saved; a reading is kept on disk."""
        return [name for name, kept in self.kept.items() if kept.sent is not None]

    def next_units(self) -> None:
        """Show the next system of units."""
        self.units = SYSTEMS[(SYSTEMS.index(self.units) + 1) % len(SYSTEMS)]

    def answer(self) -> Answer:
        """Return what the readings typed for the tank in front say."""
        typed = {n: t for n, t in self.entry.fields.items() if n in READINGS}
        if self.site is None:
            return Answer(typed=typed, why=self.trouble or LOADING)
        if not self.tank_name:
            return Answer(typed=typed, why="This site has no tanks.")
        try:
            tank = self._tank(self.site, self.tank_name)
        except TankcalcError as error:
            return Answer(typed=typed, why=str(error))
        try:
            fluid = self._fluid(self.site, tank)
        except TankcalcError as error:
            return Answer(tank, typed=typed, why=str(error))
        return answer_of(tank, fluid, typed)

    def _tank(self, site: Site, name: str) -> Tank:
        """Return a tank as it was read; one that could not be read is tried again each time."""
        if name not in self._tanks:
            self._tanks[name] = site.tank(name)
            self.broken.pop(name, None)
        return self._tanks[name]

    def _fluid(self, site: Site, tank: Tank) -> Fluid:
        """Return the fluid chosen for a tank as it was read, or its usual contents."""
        chosen = self.entry.fluid
        if (tank.file, chosen) not in self._fluids:
            self._fluids[tank.file, chosen] = site.fluid_for(tank, chosen or None)
        return self._fluids[tank.file, chosen]


def answer_of(tank: Tank, fluid: Fluid, typed: Mapping[str, str]) -> Answer:
    """Return what these readings say of this tank."""
    from tankcalc.gauging import evaluate
    from tankcalc.typed import readings_from_text

    if not typed:
        return Answer(tank, fluid, why='Type a reading with its unit, such as "98.7 kPa".')
    readings, problems = readings_from_text(tank, typed)
    if problems:
        names = ", ".join(label_of(name) for name in problems)
        return Answer(tank, fluid, typed, problems, why=f"No result: see {names}.")
    result = evaluate(tank, fluid, readings)
    refused = {
        n.reading: n.message
        for n in result.warnings
        if n.reading and (n.refuses or n.code == "signal_failed")
    }
    return Answer(tank, fluid, typed, refused, result, readings=readings)
