"""Readings of the log with what they are worth: profiles looked up, budgets made, each once."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Protocol

from tankcalc.balance.origins import Texts, origins_of
from tankcalc.balance.states import density_error, state_as_stated, state_of
from tankcalc.errors import TankcalcError
from tankcalc.typed import readings_from_text

if TYPE_CHECKING:
    from tankcalc.balance.account import State
    from tankcalc.balance.effects import Effect
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.readings import Readings
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.tank import Tank


class Profiles(Protocol):
    """What the balance needs of a site."""

    def tank(self, name: str) -> Tank:
        """Return a tank; raise ProfileError where there is none of that name."""

    def fluid(self, name: str) -> Fluid:
        """Return a fluid; raise ProfileError where there is none of that name."""


@dataclass(frozen=True, slots=True)
class Contents:
    """A reading with its state, and what it knows of the product's density.

    Attributes
    ----------
    entry : Entry
        The reading.
    state : State
        What it stands for.
    density : Effect or None
        The density's error: its origin, and under mass its relative standard uncertainty; None
        where the readings themselves give the density.
    stale : bool
        Whether the profiles of now are not those it was computed with.
    """

    entry: Entry
    state: State
    density: Effect | None = None
    stale: bool = False


@dataclass(slots=True)
class Evaluated:
    """Readings of the log as contents, remembered by entry."""

    profiles: Profiles
    texts: Texts
    _contents: dict[bytes, Contents] = field(default_factory=dict, init=False, repr=False)
    _tanks: dict[str, Tank | None] = field(default_factory=dict, init=False, repr=False)
    _fluids: dict[str, Fluid | None] = field(default_factory=dict, init=False, repr=False)

    def tank(self, name: str) -> Tank | None:
        """Return a tank of the site as it is now, None where there is none any more."""
        if name not in self._tanks:
            try:
                self._tanks[name] = self.profiles.tank(name)
            except TankcalcError:
                self._tanks[name] = None  # the log outlives its profiles
        return self._tanks[name]

    def readings(self, entry: Entry) -> Readings | None:
        """Return what was read, None where the tank is no longer known."""
        tank = self.tank(entry.tank or "")
        return None if tank is None else readings_from_text(tank, entry.typed)[0]

    def contents(self, entry: Entry) -> Contents:
        """Return a reading's state: figures as logged, uncertainty by the profiles of now."""
        if entry.uid not in self._contents:
            self._contents[entry.uid] = self._made(entry)
        return self._contents[entry.uid]

    def _fluid(self, name: str) -> Fluid | None:
        if name not in self._fluids:
            try:
                self._fluids[name] = self.profiles.fluid(name)
            except TankcalcError:
                self._fluids[name] = None
        return self._fluids[name]

    def _made(self, entry: Entry) -> Contents:
        from tankcalc.uncertainty import assess

        figures = entry.result or {}
        tank, fluid = self.tank(entry.tank or ""), self._fluid(entry.fluid or "")
        readings = self.readings(entry)
        if tank is None or fluid is None or readings is None:
            return Contents(entry, state_as_stated(figures, entry.t_us), stale=True)
        budget = assess(tank, fluid, readings)
        if budget is None:
            return Contents(entry, state_as_stated(figures, entry.t_us), stale=True)
        origins = origins_of(entry, self.texts)
        return Contents(
            entry,
            state_of(tank, readings, budget, figures, entry.t_us, origins),
            density_error(budget, readings, origins),
            stale=entry.versions.get("tank") != tank.version
            or entry.versions.get("fluid") != fluid.version,
        )
