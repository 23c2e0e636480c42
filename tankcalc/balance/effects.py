"""What makes the figures of a state wrong, and what several states share of it.

An opening and a closing are not independent: a transmitter's zero error, the height of its tap,
the outside air and the heel are the same in both and cancel in their difference; gain, gravity
and the capacity table scale with the difference; what is random adds in squares. So every
contribution of a budget is split by *origin*, and contributions of one origin are added with
their signs before anything is squared.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType

MASS, STANDARD = "mass_kg", "standard_volume_m3"
BASES = (MASS, STANDARD)
"""What a balance is drawn in. Never observed volume: it changes with the temperature."""

RANDOM = ""
"""Origin of what is never the same twice."""


@dataclass(frozen=True, slots=True)
class Effect:
    """One cause of error in the amounts of one state.

    Attributes
    ----------
    name : str
        In words: "p1 zero", "gravity".
    origin : str
        Effects of the same name and origin are one and the same error; `RANDOM`: of its own.
    amounts : mapping of str to float
        Signed change of each amount for one standard uncertainty, by basis.
    """

    name: str
    origin: str
    amounts: Mapping[str, float]

    def times(self, factor: float) -> Effect:
        """Return the effect on an amount that counts ``factor`` times."""
        scaled = {basis: factor * value for basis, value in self.amounts.items()}
        return Effect(self.name, self.origin, MappingProxyType(scaled))


def net(terms: Iterable[tuple[float, Sequence[Effect]]], basis: str) -> dict[str, float]:
    """Return what each cause leaves in a sum of amounts: standard uncertainties by name.

    Parameters
    ----------
    terms : iterable of (float, sequence of Effect)
        The factor each amount counts with (closing +1, opening -1) and its effects.
    basis : str
        One of `BASES`.

    Notes
    -----
    u^2 = sum over origins of (sum of f_i c_i)^2, which is the law of propagation with
    correlation one within an origin and none between them.

    References
    ----------
    JCGM 100:2008, equation 16 and F.1.2.3.

    Examples
    --------
    >>> tap = Effect("p1 zero", "p1", {"mass_kg": 960.7})
    >>> table = [Effect("geometry", "table", {"mass_kg": m}) for m in (3204.4, 1068.1)]
    >>> left = net([(1.0, [tap, table[1]]), (-1.0, [tap, table[0]])], "mass_kg")
    >>> {name: round(value, 1) for name, value in left.items()}
    {'p1 zero': 0.0, 'geometry': 2136.3}
    """
    shared: dict[tuple[str, str], float] = {}
    squares: dict[str, float] = {}
    for factor, effects in terms:
        for effect in effects:
            value = factor * effect.amounts.get(basis, 0.0)
            if effect.origin == RANDOM:
                squares[effect.name] = squares.get(effect.name, 0.0) + value**2
            else:
                key = (effect.name, effect.origin)
                shared[key] = shared.get(key, 0.0) + value
    for (name, _), value in shared.items():
        squares[name] = squares.get(name, 0.0) + value**2
    return {name: math.sqrt(square) for name, square in squares.items()}


def combined(left: Mapping[str, float]) -> float:
    """Return the combined standard uncertainty of what `net` left.

    Examples
    --------
    >>> round(combined({"random": 452.9, "gain": 427.3, "area": 2136.3}), 1)
    2225.2
    """
    return math.hypot(*left.values())


def split(effect: Effect, shared: float, origin: str) -> tuple[Effect, ...]:
    """Return an effect as a shared and a random part.

    Parameters
    ----------
    shared : float
        Correlation between two states, 0 to 1.
    origin : str
        Of the shared part.
    """
    if shared >= 1.0:
        return (Effect(effect.name, origin, effect.amounts),)
    own = Effect(effect.name, RANDOM, effect.amounts)
    if shared <= 0.0:
        return (own,)
    common = Effect(effect.name, origin, effect.amounts).times(math.sqrt(shared))
    return common, own.times(math.sqrt(1.0 - shared))
