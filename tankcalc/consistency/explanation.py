"""What was found: whether the readings agree, and what would reconcile them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.readings import Readings

if TYPE_CHECKING:
    from collections.abc import Callable

    from tankcalc.units import System

ALIKE = 1.0
"""Explanations whose chi-square differs by less than this cannot be told apart by the figures."""


@dataclass(frozen=True, slots=True)
class Explanation:
    """One single fault that would reconcile the readings.

    Attributes
    ----------
    code : str
        What kind of fault:

        ``drift``               a reading is off by ``size``
        ``unit``                it was typed in ``typed_unit`` and is in ``meant_unit``
        ``reference``           gauge taken as absolute, or the reverse
        ``ullage_as_level``     an ullage was typed as the level
        ``level_as_ullage``     a level was typed as the ullage
        ``blanket_missing``     p3 is dead, or there is none: ``size`` is the pressure not read
        ``water_bottom``        free water of height ``size`` where none was taken
        ``water_level``         the water's top is higher than taken by ``size``
        ``leg_temperature``     the legs are warmer than taken by ``size``
        ``sample_temperature``  the density was observed at ``at_k``, not at tank temperature
        ``sample_converted``    it was observed at tank temperature and converted from ``at_k``
        ``other_density``       the density given, or that of the profile, is another batch's
    reading : str
        Name of the reading concerned; empty where none is.
    size : float
        In SI: reading less what it should be, unless the code says otherwise.
    dimension : str
        What the size measures, as units are looked up.
    uncertainty : float
        Standard uncertainty of the size; zero where the fault has no free size.
    chi_square : float
        What the fault leaves of the disagreement.
    freedom : int
        Degrees of freedom left with it.
    score : float
        Minus twice the logarithm of the evidence, see `plausibility`: the smaller the better.
    readings : Readings
        The readings without the fault.
    level_m, volume_m3, mass_kg : float
        What the tank then holds.
    typed_unit, meant_unit : str
        Of a unit slip; the typed unit is a guess unless it was told.
    at_k : float or None
        Temperature of a sample, K.
    hints : tuple of str
        What speaks for it besides the figures, and what would settle it.
    weight : float
        Its share of the evidence of all that are listed, 0 to 1.
    """

    code: str
    reading: str
    size: float
    dimension: str
    uncertainty: float
    chi_square: float
    freedom: int
    score: float
    readings: Readings
    level_m: float
    volume_m3: float
    mass_kg: float
    typed_unit: str = ""
    meant_unit: str = ""
    at_k: float | None = None
    hints: tuple[str, ...] = ()
    weight: float = 0.0

    def words(self, system: System = "metric") -> str:
        """Return the fault in words, without what it is worth to the answer."""
        return _WORDS[self.code](self, system)

    def shown_size(self, system: System = "metric") -> str:
        """Return the size without its sign, with its unit."""
        return units.show(abs(self.size), self.dimension, system)


@dataclass(frozen=True, slots=True)
class Disagreement:
    """Whether the readings agree, and every single fault that would make them.

    Attributes
    ----------
    chi_square : float
        Of the best estimate from all readings; infinite where they fit no state at all.
    freedom : int
        Readings less unknowns; 0: nothing can be checked.
    allowed : float
        What chi-square may be; 0 without freedom.
    disagrees : bool
        Whether chi-square is above it, or the answer is impossible in this tank.
    explanations : tuple of Explanation
        The most plausible first; empty where the readings do not disagree.
    remark : str
        What else there is to say: what cannot be checked and which reading would allow it, or
        that no single fault reconciles the readings.
    """

    chi_square: float
    freedom: int
    allowed: float
    disagrees: bool
    explanations: tuple[Explanation, ...] = ()
    remark: str = ""

    @property
    def alike(self) -> int:
        """How many of the first explanations the figures alone cannot tell apart."""
        if not self.explanations:
            return 0
        least = min(e.chi_square - e.freedom for e in self.explanations)
        return sum(e.chi_square - e.freedom - least < ALIKE for e in self.explanations)


def words(disagreement: Disagreement, system: System = "metric") -> list[str]:
    """Return what was found, a line for each explanation.

    Parameters
    ----------
    system : {"metric", "us", "imperial"}
        Units of the figures.
    """
    lines = []
    if disagreement.disagrees and disagreement.freedom:
        lines.append(
            f"The readings disagree: chi-square {disagreement.chi_square:.1f}, where "
            f"{disagreement.allowed:.1f} is allowed with {disagreement.freedom} to spare."
        )
    elif disagreement.freedom:
        lines.append(
            f"The readings agree: chi-square {disagreement.chi_square:.1f}, where "
            f"{disagreement.allowed:.1f} is allowed with {disagreement.freedom} to spare."
        )
    for explanation in disagreement.explanations:
        level = units.show(explanation.level_m, "length", system)
        mass = units.show(explanation.mass_kg, "mass", system)
        lines.append(f"{sentence(explanation.words(system))}: then {level}, {mass}.")
    if disagreement.remark:
        lines.append(disagreement.remark)
    return lines


def sentence(text: str) -> str:
    """Return words with a capital, but for the tag of an instrument."""
    return text[0].upper() + text[1:] if text.startswith(("a ", "the ")) else text


def noun(reading: str) -> str:
    """Return a reading's name as it stands in a sentence: "p1", "the level"."""
    return f"the {reading}" if reading in ("level", "ullage", "density", "volume") else reading


def _drift(e: Explanation, system: System) -> str:
    return f"{noun(e.reading)} reads {e.shown_size(system)} {'low' if e.size < 0.0 else 'high'}"


def _unit(e: Explanation, system: System) -> str:
    return f"{noun(e.reading)} was typed in {e.typed_unit} but is in {e.meant_unit}"


def _reference(e: Explanation, system: System) -> str:
    absolute = "is absolute pressure, typed as gauge"
    gauge = "is gauge pressure, typed as absolute"
    which = absolute if e.size > 0.0 else gauge
    return f"{e.reading} {which} ({e.shown_size(system)} apart)"


def _blanket(e: Explanation, system: System) -> str:
    what = "pressure" if e.size > 0.0 else "vacuum"
    if e.reading:
        return f"p3 is dead: it shows nothing of a {what} of {e.shown_size(system)}"
    return f"a {what} of {e.shown_size(system)} above the liquid that nothing reads"


def _water_level(e: Explanation, system: System) -> str:
    return f"the water's top is {e.shown_size(system)} {_than(e, 'higher', 'lower')} than taken"


def _legs(e: Explanation, system: System) -> str:
    return f"the legs are {e.shown_size(system)} {_than(e, 'warmer', 'colder')} than taken"


def _sample(e: Explanation, system: System) -> str:
    assert e.at_k is not None
    at = units.show(e.at_k, "temperature", system)
    if e.code == "sample_converted":
        return f"the density was that in the tank already, but was converted from {at}"
    return f"the density is that at {at}, not at tank temperature"


def _other_density(e: Explanation, system: System) -> str:
    if e.reading:
        return (
            f"the density given is {e.shown_size(system)} {_than(e, 'high', 'low')}: another batch"
        )
    return f"the liquid is {e.shown_size(system)} {_than(e, 'lighter', 'heavier')} than its profile"


def _than(e: Explanation, more: str, less: str) -> str:
    return more if e.size > 0.0 else less


_WORDS: dict[str, Callable[[Explanation, System], str]] = {
    "drift": _drift,
    "unit": _unit,
    "reference": _reference,
    "blanket_missing": _blanket,
    "ullage_as_level": lambda e, system: "the level typed is an ullage",
    "level_as_ullage": lambda e, system: "the ullage typed is a level",
    "water_bottom": lambda e, system: f"{e.shown_size(system)} of free water on the bottom",
    "water_level": _water_level,
    "leg_temperature": _legs,
    "sample_temperature": _sample,
    "sample_converted": _sample,
    "other_density": _other_density,
}
