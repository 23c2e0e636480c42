"""Tank to tank: what left one against what came into the other, once and many times."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from tankcalc.balance.account import Movement, State, significance
from tankcalc.balance.effects import Effect, combined, net

LEAST = 3
"""Transfers from which their scatter says how well their mean is known."""


@dataclass(frozen=True, slots=True)
class Transfer:
    """One transfer, by both tanks; SI.

    Attributes
    ----------
    source, target : str
        The tanks.
    out, into : float
        What left the one and came into the other, by their readings, other movements taken off.
    standard_uncertainty : float
        Of the difference.
    """

    source: str
    target: str
    out: float
    into: float
    standard_uncertainty: float

    @property
    def difference(self) -> float:
        """What came in less what went out: negative is a loss on the way."""
        return self.into - self.out

    @property
    def significance(self) -> float | None:
        """Difference over its expanded uncertainty (k = 2), signed."""
        return significance(self.difference, self.standard_uncertainty)

    @property
    def of_moved(self) -> float | None:
        """Difference as a share of what left."""
        return self.difference / self.out if self.out > 0.0 else None


@dataclass(frozen=True, slots=True)
class Side:
    """One tank over a transfer: before, after, and what else moved in between."""

    tank: str
    before: State
    after: State
    others: tuple[Movement, ...] = ()

    def gained(self, basis: str) -> float | None:
        """Return what the tank gained besides the other movements."""
        start, end = self.before.amounts.get(basis), self.after.amounts.get(basis)
        rest = [m.amounts.get(basis) for m in self.others]
        if start is None or end is None or any(amount is None for amount in rest):
            return None
        return end - start - sum(amount for amount in rest if amount is not None)

    def terms(self) -> list[tuple[float, Sequence[Effect]]]:
        """Return the effects with the factors they count with in what was gained."""
        rest: list[tuple[float, Sequence[Effect]]] = [(-1.0, m.effects) for m in self.others]
        return [(1.0, self.after.effects), (-1.0, self.before.effects), *rest]


def compare(basis: str, source: Side, target: Side) -> Transfer | None:
    """Return a transfer as both tanks saw it, None where an amount is not known.

    Notes
    -----
    d = m_in - m_out = (what the target gained) + (what the source gained, negative); what the
    two tanks share (gravity, outside air, the product's density) cancels.
    """
    lost, gained = source.gained(basis), target.gained(basis)
    if lost is None or gained is None:
        return None
    u = combined(net([*source.terms(), *target.terms()], basis))
    return Transfer(source.tank, target.tank, -lost, gained, u)


@dataclass(frozen=True, slots=True)
class Repeated:
    """Many transfers between the same two tanks.

    Attributes
    ----------
    transfers : int
        How many.
    share : float
        Sum of the differences over the sum of what left.
    standard_uncertainty : float
        Of the share: from the scatter of the single ones.
    """

    transfers: int
    share: float
    standard_uncertainty: float

    @property
    def significance(self) -> float | None:
        """Share over its expanded uncertainty (Student's t at 95 %), signed."""
        from tankcalc.balance.causes import coverage

        if self.standard_uncertainty <= 0.0:
            return None
        return self.share / (coverage(self.transfers - 1) * self.standard_uncertainty)


def over_many(transfers: Sequence[Transfer]) -> Repeated | None:
    """Return the common share of several transfers between two tanks; None for too few.

    Notes
    -----
    A ratio of sums with the residual standard error of d_i = share * out_i weighted by 1 / out_i:
    a difference that scales with the quantity is a gain or a table, one that does not is noise.

    Examples
    --------
    >>> single = [Transfer("A", "B", 1000.0, 998.0 + k, 5.0) for k in (-0.2, 0.0, 0.2)]
    >>> found = over_many(single)
    >>> round(found.share, 5), round(found.significance, 1)
    (-0.002, -3.8)
    """
    moved = [t.out for t in transfers]
    if len(transfers) < LEAST or min(moved) <= 0.0:
        return None
    total = sum(moved)
    share = sum(t.difference for t in transfers) / total
    left = sum((t.difference - share * t.out) ** 2 / t.out for t in transfers)
    return Repeated(len(transfers), share, (left / (len(transfers) - 1) / total) ** 0.5)
