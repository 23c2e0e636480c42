"""Cumulative sums over periods: a small loss that goes on shows where no single period does."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from statistics import fmean, stdev

ALLOWANCE = 0.5
"""k: half the shift to be found, in standard uncertainties."""

THRESHOLD = 5.0
"""h: without any shift, one alert in 465 periods on average (h = 4: one in 168)."""

ENOUGH = 20
"""Periods needed before the scatter of the differences says what their uncertainty is."""


@dataclass(frozen=True, slots=True)
class Cusum:
    """Two-sided cumulative sums.

    Attributes
    ----------
    gain, loss : tuple of float
        S+ and S- after each period.
    threshold : float
        h.
    scatter : float or None
        Standard deviation of the standardised differences about their mean: about one where the
        stated uncertainties are honest; None for fewer than `ENOUGH` periods.
    mean : float or None
        Their mean: what goes on from period to period, negative for a loss; None likewise.
    """

    gain: tuple[float, ...]
    loss: tuple[float, ...]
    threshold: float
    scatter: float | None
    mean: float | None = None

    @property
    def first_alert(self) -> int | None:
        """Index of the first period after which a sum is beyond the threshold."""
        pairs = zip(self.gain, self.loss, strict=True)
        return next((k for k, pair in enumerate(pairs) if max(pair) > self.threshold), None)

    @property
    def enough(self) -> bool:
        """Whether there are enough periods to hold the uncertainties against their scatter."""
        return len(self.gain) >= ENOUGH

    @property
    def alert(self) -> str:
        """Which way a sum stands beyond the threshold now: "loss", "gain" or nothing.

        Where both do, the larger one.
        """
        if not self.gain or max(self.gain[-1], self.loss[-1]) <= self.threshold:
            return ""
        return "loss" if self.loss[-1] >= self.gain[-1] else "gain"


def cusum(
    standardised: Sequence[float], allowance: float = ALLOWANCE, threshold: float = THRESHOLD
) -> Cusum:
    """Return the cumulative sums of standardised differences.

    Parameters
    ----------
    standardised : sequence of float
        d / u of each period, in order.
    allowance, threshold : float
        k and h, in standard uncertainties.

    Notes
    -----
    S+ = max(0, S+ + z - k), S- = max(0, S- - z - k), both from zero; not set back by an alert.
    Consecutive periods share a reading, so their differences are slightly anticorrelated, which
    makes false alerts rarer.

    References
    ----------
    E. S. Page, "Continuous inspection schemes", Biometrika 41 (1954) 100.

    Examples
    --------
    >>> found = cusum([-1.5] * 6)
    >>> found.loss, found.first_alert, found.alert
    ((1.0, 2.0, 3.0, 4.0, 5.0, 6.0), 5, 'loss')
    """
    up = down = 0.0
    gain, loss = [], []
    for z in standardised:
        up, down = max(0.0, up + z - allowance), max(0.0, down - z - allowance)
        gain.append(up)
        loss.append(down)
    if len(standardised) < ENOUGH:
        return Cusum(tuple(gain), tuple(loss), threshold, None)
    mean, scatter = fmean(standardised), stdev(standardised)
    return Cusum(tuple(gain), tuple(loss), threshold, scatter, mean)
