"""What every solid region gives: area, volume and moment of its slices between two elevations."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Sequence
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

Array: TypeAlias = npt.NDArray[np.float64]
Indices: TypeAlias = npt.NDArray[np.intp]


class Body(ABC):
    """A region of space, cut by horizontal planes.

    Attributes
    ----------
    bottom, top : float
        Lowest and highest elevation, m.
    breaks : ndarray, shape (n,)
        Elevations where the area is not smooth, m, ascending, from ``bottom`` to ``top``.
    """

    bottom: float
    top: float
    breaks: Array

    @abstractmethod
    def area(self, z: Array) -> Array:
        """Return the horizontal area at elevations between ``bottom`` and ``top``, m2."""

    @abstractmethod
    def volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        """Return the volume below each elevation, m3, and its moment about z = 0, m4."""

    def area_and_volume(self, z: Array) -> tuple[Array, Array]:
        """Return the area at each elevation, m2, and the volume below it, m3."""
        return self.area(z), self.volume_and_moment(z)[0]


class Assembly(Body):
    """The sum of bodies, each counting between its own bottom and top.

    Bodies with negative areas (deadwood) subtract.
    """

    def __init__(self, parts: Sequence[Body]) -> None:
        self.parts = tuple(parts)
        self.bottom = min(part.bottom for part in self.parts)
        self.top = max(part.top for part in self.parts)
        self.breaks = merged_breaks([part.breaks for part in self.parts])

    def area(self, z: Array) -> Array:
        """Return the sum of the parts' areas, m2.

        A part counts from its bottom to below its top, the highest ones at their top too.
        """
        total = np.zeros_like(z)
        for part in self.parts:
            counts = z >= part.bottom
            if part.top < self.top:
                counts &= z < part.top
            inside = np.minimum(np.maximum(z, part.bottom), part.top)
            total += np.where(counts, part.area(inside), 0.0)
        return total

    def volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        """Return the sums of the parts' volumes, m3, and moments, m4."""
        volume, moment = np.zeros_like(z), np.zeros_like(z)
        for part in self.parts:
            inside = np.minimum(np.maximum(z, part.bottom), part.top)
            part_volume, part_moment = part.volume_and_moment(inside)
            volume += part_volume
            moment += part_moment
        return volume, moment


def merged_breaks(lists: Sequence[Array]) -> Array:
    """Return all elevations of several ascending lists once, those within rounding joined, m.

    Examples
    --------
    >>> merged_breaks([np.array([0.0, 2.0]), np.array([1.0, 2.0 + 1e-15])])
    array([0., 1., 2.])
    """
    every = np.sort(np.concatenate(lists))
    rounding = 1e-13 * (every[-1] - every[0])
    apart = np.concatenate([[True], np.diff(every) > rounding])
    kept: Array = every[apart]
    kept[-1] = every[-1]
    return kept
