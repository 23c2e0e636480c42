"""Standing readings of the log as the alerts see them, with the random part of their figures."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from tankcalc.fluids.fluid import Fluid
from tankcalc.limits.looks import Look, look_of
from tankcalc.limits.rates import BASES, random_parts
from tankcalc.limits.settings import RANDOM_SHARE
from tankcalc.result import Notice, Result, Status
from tankcalc.typed import readings_from_text

if TYPE_CHECKING:
    from tankcalc.readings import Readings
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.tank import Tank

BANDS = 4
"""Parts of a vessel's height within which one budget serves: what a pascal is worth goes with the
area of the surface, which is the same all over an upright tank."""

EXACT = 2
"""Readings, the latest, that get a budget of their own: those that the rate now comes from."""

Parts = Mapping[str, float]

_NOTHING: Parts = {}
_FIGURES = ("level_m", *BASES)


def answered(entry: Entry) -> bool:
    """Return whether a reading has an answer."""
    return entry.status != "refused" and isinstance((entry.result or {}).get("level_m"), float)


def _result_of(entry: Entry) -> Result:
    """Return of a logged result what a look is made of; of a refused one every warning refuses."""
    data = entry.result or {}
    refused = entry.status == "refused"
    given = (one for one in data.get("warnings", ()) if isinstance(one, Mapping))
    notices = tuple(
        Notice(str(one.get("code", "")), str(one.get("message", "")), refuses=refused)
        for one in given
    )
    held = {key: data[key] for key in _FIGURES if isinstance(data.get(key), float)}
    status: Status = "refused" if refused else "good"
    return Result("", "", "", status, notices, **held)


@dataclass(slots=True)
class Maker:
    """Makes the looks of one tank, each once.

    Attributes
    ----------
    tank : Tank
        As it is fitted now.
    fluids : mapping of str to Fluid
        By the names of their files; a reading of one that is missing has no budget.
    share : float
        Share of a transmitter's accuracy that is random.
    """

    tank: Tank
    fluids: Mapping[str, Fluid]
    share: float = RANDOM_SHARE
    _looks: dict[bytes, Look] = field(default_factory=dict, init=False, repr=False)
    _exact: dict[bytes, Look] = field(default_factory=dict, init=False, repr=False)
    _bands: dict[tuple[object, ...], Parts] = field(default_factory=dict, init=False, repr=False)

    def looks(self, entries: Sequence[Entry]) -> tuple[Look, ...]:
        """Return the looks of a tank's readings, given in the order of their times."""
        exact = {entry.uid for entry in [e for e in entries if answered(e)][-EXACT:]}
        return tuple(self._look(entry, exact=entry.uid in exact) for entry in entries)

    def older(self, entries: Sequence[Entry]) -> tuple[Look, ...]:
        """Return the looks of readings that no rate comes from now."""
        return tuple(self._look(entry, exact=False) for entry in entries)

    def _look(self, entry: Entry, *, exact: bool) -> Look:
        made = self._exact if exact else self._looks
        if entry.uid not in made:
            made[entry.uid] = self._made(entry, exact=exact)
        return made[entry.uid]

    def _made(self, entry: Entry, *, exact: bool) -> Look:
        readings, _ = readings_from_text(self.tank, entry.typed)
        fluid = self.fluids.get(entry.fluid or "")
        random = _NOTHING
        if fluid is not None and answered(entry):
            random = self._random(entry, fluid, readings, exact=exact)
        return look_of(
            self.tank,
            fluid or Fluid(entry.fluid or "", ()),
            readings,
            _result_of(entry),
            entry.t_us,
            random=random,
            movement=entry.movement,
        )

    def _random(self, entry: Entry, fluid: Fluid, readings: Readings, *, exact: bool) -> Parts:
        if exact:
            return self._assessed(fluid, readings)
        low, high = self.tank.vessel.z_min, self.tank.vessel.z_max
        level = float((entry.result or {})["level_m"])
        band = min(int(BANDS * (level - low) / (high - low)), BANDS - 1)
        key = (band, fluid.file, *sorted(entry.typed))
        if key not in self._bands:
            self._bands[key] = self._assessed(fluid, readings)
        return self._bands[key]

    def _assessed(self, fluid: Fluid, readings: Readings) -> Parts:
        from tankcalc.uncertainty import assess

        budget = assess(self.tank, fluid, readings)
        return _NOTHING if budget is None else random_parts(budget, self.share)
