"""Labels beside a drawing, moved apart where they would lie on each other."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

REACH = (1, 3, 3)
"""Rows a label of each rank may move: the surface, an interface, anything else."""


@dataclass(frozen=True, slots=True)
class Label:
    """Words that belong to an elevation; rank 0 the surface, 1 an interface, 2 a limit."""

    elevation_m: float
    text: str
    rank: int = 2


def place(labels: Sequence[Label], rows: Sequence[int], height: int) -> dict[int, Label]:
    """Return the row of each label that finds room, in the order of their elevations.

    ``rows`` says where each would like to lie. The surface is placed first and stays nearest to
    its row; of the limits the nearest to it comes next, and one that finds no room is left out
    rather than put where it would mislead.
    """
    placed: dict[int, Label] = {}
    at = next((label.elevation_m for label in labels if label.rank == 0), None)

    def matters(i: int) -> tuple[int, float]:
        """Rank a label: among limits the nearest to the surface is the next to be met."""
        elevation = labels[i].elevation_m
        return labels[i].rank, -elevation if at is None else abs(elevation - at)

    order = sorted(range(len(labels)), key=matters)
    for i in order:
        label, wanted = labels[i], rows[i]
        reach = REACH[min(label.rank, len(REACH) - 1)]
        near = sorted(range(wanted - reach, wanted + reach + 1), key=lambda row: abs(row - wanted))
        for row in near:
            if 0 <= row < height and row not in placed and _in_order(placed, label, row):
                placed[row] = label
                break
    return placed


def _in_order(placed: dict[int, Label], label: Label, row: int) -> bool:
    """Return whether a label at this row keeps higher elevations above lower ones."""
    return all(
        other.elevation_m >= label.elevation_m
        if at < row
        else other.elevation_m <= label.elevation_m
        for at, other in placed.items()
    )
