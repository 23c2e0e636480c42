"""The level that holds a volume: the inverse of V(z), safeguarded."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tankcalc.geometry.body import Array, Body

GOOD_ENOUGH = 1e-14
"""Residual, as a share of capacity, below which a step that gains nothing ends the search."""

MOST_STEPS = 100

_STEPS_BETWEEN_BREAKS = 24


@dataclass(frozen=True, slots=True)
class Ladder:
    """Elevations, m, and the volumes below them, m3, close enough to bracket a search."""

    z: Array
    volume: Array


def ladder(body: Body) -> Ladder:
    """Return rungs between the breaks of a body, crowded at the breaks, where areas bend most."""
    share = 0.5 - 0.5 * np.cos(np.linspace(0.0, np.pi, _STEPS_BETWEEN_BREAKS + 1)[:-1])
    low, high = body.breaks[:-1, None], body.breaks[1:, None]
    z = np.append((low + (high - low) * share).ravel(), body.top)
    volume, _ = body.volume_and_moment(z)
    return Ladder(z, np.maximum.accumulate(volume))


def level_of_volume(body: Body, rungs: Ladder, volume: Array) -> Array:
    """Return the elevation below which the body holds each volume.

    Parameters
    ----------
    body : Body
        Its volume must rise with elevation.
    rungs : Ladder
        From `ladder` of a body with the same figures.
    volume : ndarray, shape (n,)
        From the volume at the bottom to that at the top, m3.

    Returns
    -------
    ndarray, shape (n,)
        Elevation, m; its volume is the wanted one to 1e-12 of capacity.

    Notes
    -----
    Newton's step with the area as slope, halving the bracket instead wherever the step would
    leave it. A search ends when the volume is met exactly, or within `GOOD_ENOUGH` and no step
    halves the residual any more: at the tip of a cone, where V ~ z^3, a step leaves 0.3 of it.
    """
    search = _Search(body, rungs, volume)
    for _ in range(MOST_STEPS):
        if not search.active.size:
            break
        search.step()
    return search.z


class _Search:
    """All searches of one call; only the active ones are evaluated."""

    def __init__(self, body: Body, rungs: Ladder, volume: Array) -> None:
        above = np.clip(np.searchsorted(rungs.volume, volume), 1, len(rungs.z) - 1)
        self._body, self._volume = body, volume
        self._close = GOOD_ENOUGH * float(rungs.volume[-1])
        self._low, self._high = rungs.z[above - 1].copy(), rungs.z[above].copy()
        below, gained = rungs.volume[above - 1], np.diff(rungs.volume)[above - 1]
        share = np.clip((volume - below) / np.where(gained > 0.0, gained, 1.0), 0.0, 1.0)
        self.z = self._low + share * (self._high - self._low)
        self._best = np.full_like(volume, np.inf)
        self._trial = self.z.copy()
        self.active = np.arange(len(volume))

    def step(self) -> None:
        """Evaluate the trials, keep the better ones, and choose the next."""
        on = self.active
        trial = self._trial[on]
        slope, volume = self._body.area_and_volume(trial)
        residual = volume - self._volume[on]
        size, best = np.abs(residual), self._best[on]
        done = (size == 0.0) | ((best <= self._close) & (size > 0.5 * best))
        better = size < best
        self.z[on] = np.where(better, trial, self.z[on])
        self._best[on] = np.where(better, size, best)
        self._high[on] = np.where(residual > 0.0, trial, self._high[on])
        self._low[on] = np.where(residual < 0.0, trial, self._low[on])
        newton = trial - residual / np.where(slope > 0.0, slope, np.inf)
        low, high = self._low[on], self._high[on]
        inside = (newton > low) & (newton < high)
        self._trial[on] = np.where(inside, newton, 0.5 * (low + high))
        self.active = on[~done & (self._trial[on] != trial)]
