"""One tank over one period: what the book says, what is there, and what the difference is worth."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from tankcalc.balance.effects import Effect, combined, net

COVERAGE = 2.0
"""A difference is significant beyond this many standard uncertainties: about 95 %."""

Kind = Literal["received", "delivered", "transfer in", "transfer out", "water drawn"]

TRANSFERS: tuple[Kind, ...] = ("transfer in", "transfer out")
"""Kinds that cancel where both tanks are counted."""


@dataclass(frozen=True, slots=True)
class State:
    """What is in a tank at one instant.

    Attributes
    ----------
    at_us : int
        When it was read, µs of UTC.
    amounts : mapping of str to (float or None)
        By basis: mass in kg, standard volume in m3; None where it cannot be known.
    effects : tuple of Effect
        What may be wrong with the amounts, with signs.
    level_m : float or None
        Level above the datum, m.
    fill : float or None
        Share of the capacity, 0 to 1.
    """

    at_us: int
    amounts: Mapping[str, float | None]
    effects: tuple[Effect, ...] = ()
    level_m: float | None = None
    fill: float | None = None


@dataclass(frozen=True, slots=True)
class Movement:
    """What was moved into (positive) or out of a tank.

    Attributes
    ----------
    at_us : int
        µs of UTC.
    kind : str
        "received", "delivered", "transfer in", "transfer out" or "water drawn".
    amounts : mapping of str to (float or None)
        Signed, by basis.
    effects : tuple of Effect
        Of the amounts as signed.
    other : str
        The other tank, of a transfer.
    converted : bool
        Whether a volume was made a mass by the tank's density then.
    """

    at_us: int
    kind: Kind
    amounts: Mapping[str, float | None]
    effects: tuple[Effect, ...] = ()
    other: str = ""
    converted: bool = False


@dataclass(frozen=True, slots=True)
class Account:
    """A balance in one basis; SI.

    Attributes
    ----------
    basis : str
        "mass_kg" or "standard_volume_m3".
    opening, closing : float
        Physical.
    moved : mapping of str to float
        Signed sums by kind of movement; kinds that did not occur are left out.
    uncertainties : mapping of str to float
        Standard uncertainty that each cause leaves in the difference, the largest first.
    throughput : float
        Sum of all that was moved, whichever way.
    """

    basis: str
    opening: float
    closing: float
    moved: Mapping[str, float]
    uncertainties: Mapping[str, float]
    throughput: float

    @property
    def book(self) -> float:
        """What should be there: opening and movements."""
        return self.opening + sum(self.moved.values())

    @property
    def difference(self) -> float:
        """Physical closing less book closing: positive is a gain."""
        return self.closing - self.book

    @property
    def standard_uncertainty(self) -> float:
        """Combined standard uncertainty of the difference."""
        return combined(self.uncertainties)

    @property
    def significance(self) -> float | None:
        """Difference over its expanded uncertainty (k = 2), signed; None without uncertainty."""
        return significance(self.difference, self.standard_uncertainty)

    @property
    def of_throughput(self) -> float | None:
        """Difference as a share of the throughput; None where nothing moved."""
        return self.difference / self.throughput if self.throughput > 0.0 else None


def significance(difference: float, standard_uncertainty: float) -> float | None:
    """Return E = d / (2 u): beyond one either way a difference is significant.

    Examples
    --------
    >>> round(significance(-5340.0, 2225.2), 3)
    -1.2
    """
    if standard_uncertainty <= 0.0:
        return None
    return difference / (COVERAGE * standard_uncertainty)


def verdict(worth: float | None) -> str:
    """Return a significance in words; a loss is unexplained, never a cause.

    Examples
    --------
    >>> verdict(-1.2), verdict(3.0), verdict(0.4)
    ('unexplained loss, significance 1.2', 'unexplained gain, significance 3.0', 'not significant')
    """
    if worth is None:
        return "of unknown significance"
    if abs(worth) <= 1.0:
        return "not significant"
    # Rounded up a little above one, so that what is significant never shows as 1.0.
    size = max(abs(worth), 1.05)
    return f"unexplained {'loss' if worth < 0.0 else 'gain'}, significance {size:.1f}"


def account(
    basis: str, opening: State, closing: State, movements: Sequence[Movement]
) -> Account | None:
    """Return the balance between two states, None where an amount is not known in this basis.

    Parameters
    ----------
    basis : str
        "mass_kg" or "standard_volume_m3".
    opening, closing : State
        Physical, of one tank.
    movements : sequence of Movement
        All between them.

    Notes
    -----
    d = m_close - (m_open + sum of movements);
    u_d^2 = u_open^2 + u_close^2 - 2 cov(open, close) + u_movements^2, the covariances by origin
    (see `tankcalc.balance.effects`). Drawn water counts in mass; the standard volume is the
    product's, which the draw leaves as it is.
    """
    counted = [m for m in movements if not (basis != "mass_kg" and m.kind == "water drawn")]
    start, end = opening.amounts.get(basis), closing.amounts.get(basis)
    moved = [m.amounts.get(basis) for m in counted]
    if start is None or end is None or any(amount is None for amount in moved):
        return None
    known = [float(amount) for amount in moved if amount is not None]
    sums: dict[str, float] = {}
    for one, amount in zip(counted, known, strict=True):
        sums[one.kind] = sums.get(one.kind, 0.0) + amount
    terms = [(1.0, closing.effects), (-1.0, opening.effects)]
    left = net([*terms, *((-1.0, m.effects) for m in counted)], basis)
    ordered = dict(sorted(left.items(), key=lambda item: -item[1]))
    return Account(basis, start, end, sums, ordered, sum(map(abs, known)))


def together(
    basis: str, parts: Sequence[tuple[State, State, Sequence[Movement]]]
) -> Account | None:
    """Return the balance of several tanks as one; transfers between them cancel.

    None where there is no part, or one that has no balance in this basis.
    """
    single = [account(basis, *part) for part in parts]
    known = [one for one in single if one is not None]
    if not known or len(known) < len(single):
        return None
    terms: list[tuple[float, Sequence[Effect]]] = []
    sums: dict[str, float] = {}
    for (opening, closing, movements), one in zip(parts, known, strict=True):
        terms += [(1.0, closing.effects), (-1.0, opening.effects)]
        terms += [
            (-1.0, m.effects) for m in movements if basis == "mass_kg" or m.kind != "water drawn"
        ]
        for kind, amount in one.moved.items():
            sums[kind] = sums.get(kind, 0.0) + amount
    left = net(terms, basis)
    return Account(
        basis,
        sum(one.opening for one in known),
        sum(one.closing for one in known),
        sums,
        dict(sorted(left.items(), key=lambda item: -item[1])),
        sum(abs(amount) for kind, amount in sums.items() if kind not in TRANSFERS)
        + abs(sum(sums.get(kind, 0.0) for kind in TRANSFERS)),
    )
