"""A tank at rest: the slope of what it holds, with a standard error that knows of its noise.

Noise of successive readings is seldom independent: it goes with the sun, the wind and the
instrument's temperature. Treated as independent it makes a slope look many times better than it
is, so the standard error here counts *effective* readings; and where there are three whole daily
cycles their means are compared, in which the sun cancels.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from tankcalc.balance.causes import coverage

FloatArray = npt.NDArray[np.float64]

DAY_H = 24.0
LEAST_CYCLES = 3
"""Whole daily cycles from which their means are compared."""

LEAST_PER_CYCLE = 4
"""Readings that a daily mean needs."""

LEAST = 4
"""Readings that a slope with a standard error needs."""

WINDOW = 1.5
"""The autocorrelation is summed up to this many times its own sum."""

SMALLEST = 0.05
"""Below this the correction for the fitted line says no more than that hardly anything is known."""


@dataclass(frozen=True, slots=True)
class Drift:
    """A slope over time.

    Attributes
    ----------
    per_hour : float
        Slope, in the unit of the values an hour.
    standard_error : float
        With the autocorrelation counted.
    white_standard_error : float
        What it would be were the readings independent.
    readings : int
        How many.
    effective : float
        As how many independent ones they count.
    hours : float
        From the first to the last.
    cycles : int
        Whole daily cycles whose means were compared; 0: the readings themselves were.
    """

    per_hour: float
    standard_error: float
    white_standard_error: float
    readings: int
    effective: float
    hours: float
    cycles: int

    @property
    def significance(self) -> float | None:
        """Slope over its expanded uncertainty (95 %, Student's t), signed; None without one."""
        if self.standard_error <= 0.0:
            return None
        return self.per_hour / (coverage(max(self.effective - 2.0, 1.0)) * self.standard_error)

    @property
    def whole_days(self) -> bool:
        """Whether daily means were compared, so that the sun has no part in it."""
        return self.cycles > 0


def drift(hours: Sequence[float], values: Sequence[float]) -> Drift | None:
    """Return the slope of values over time; None for too few readings.

    Parameters
    ----------
    hours : sequence of float (n,)
        Rising, about evenly spaced.
    values : sequence of float (n,)
        Mass in kg, pressure in Pa, or whatever is watched.

    Notes
    -----
    Over three whole daily cycles or more, least squares through their means (the last, part
    cycle is left out). Otherwise least squares through the readings: the white standard error
    s / sqrt(sum (t - mean t)^2) times sqrt(n / n_eff), with n_eff from `effective_number` of the
    residuals.
    """
    t, y = np.asarray(hours, dtype=float), np.asarray(values, dtype=float)
    if len(t) < LEAST or t[-1] <= t[0]:
        return None
    means = _daily_means(t, y)
    if means is not None:
        days, level = means
        slope, error, _ = line(days, level)
        count = float(len(days))
        return Drift(slope, error, error, len(t), count, float(t[-1] - t[0]), len(days))
    slope, white, left = line(t, y)
    effective = effective_number(left)
    # The line took two effective readings' worth of the noise with it.
    error = slope_error(white, len(t), effective) / (1.0 - min(2.0 / effective, 2.0 / 3.0)) ** 0.5
    return Drift(slope, error, white, len(t), effective, float(t[-1] - t[0]), 0)


def line(t: FloatArray, y: FloatArray) -> tuple[float, float, FloatArray]:
    """Return slope, its standard error for independent noise, and the residuals.

    Examples
    --------
    >>> slope, error, _ = line(np.arange(4.0), np.array([0.0, 1.1, 1.9, 3.0]))
    >>> round(slope, 3), round(error, 4)
    (0.98, 0.0424)
    """
    away = t - t.mean()
    spread = float(away @ away)
    slope = float(away @ y) / spread
    left = y - y.mean() - slope * away
    variance = float(left @ left) / (len(t) - 2) if len(t) > 2 else 0.0
    return slope, float(np.sqrt(variance / spread)), left


def slope_error(white: float, readings: int, effective: float) -> float:
    """Return the standard error of a slope from that for independent noise.

    Examples
    --------
    The noise of 5 Pa once a minute for 12 h, as independent and as 12 effective readings:

    >>> even = white_error(5.0, 720, 12.0)
    >>> round(even, 3), round(slope_error(even, 720, 12.0), 2)
    (0.054, 0.42)
    """
    return white * float(np.sqrt(readings / effective))


def white_error(noise: float, readings: int, hours: float) -> float:
    """Return the standard error of a slope through evenly spaced readings of independent noise.

    Notes
    -----
    noise / sqrt(sum (t - mean t)^2), which for many even readings is noise sqrt(12 / n) / T.
    """
    t = np.linspace(0.0, hours, readings)
    return noise / float(np.sqrt(np.sum((t - t.mean()) ** 2)))


def effective_number(residuals: FloatArray) -> float:
    """Return as how many independent readings those behind a fitted line count, 3 to n.

    Parameters
    ----------
    residuals : array (n,)
        What is left of evenly spaced readings after a least-squares line.

    Notes
    -----
    n / tau with the integrated autocorrelation time tau = 1 + 2 sum rho(k), summed up to the
    first lag of at least `WINDOW` tau (automatic windowing). A fitted line takes the slowest
    noise away with it and lowers every rho(k) by about 2 tau / n (1 - rho(k)); solved for tau,
    the sum S up to lag M becomes tau = S / (1 + 2 (S - 1) / n - 4 M / n). Anticorrelation is not
    counted as a gain. Simulated with first-order noise of 8 to 720 effective readings, 95 %
    bounds by it miss in 4 to 9 % of cases.

    References
    ----------
    A. D. Sokal, "Monte Carlo methods in statistical mechanics: foundations and new algorithms"
    (1997), section 3, for the window; the correction for the line is derived here.
    """
    count = len(residuals)
    square = float(residuals @ residuals)
    if count < LEAST or square <= 0.0:
        return float(count)
    # By the transform: the sum of products at every lag at once.
    size = 1 << (2 * count - 1).bit_length()
    power = np.abs(np.fft.rfft(residuals, size)) ** 2
    rho = np.fft.irfft(power, size)[:count] / square
    lags = np.arange(1, count)
    sums = 1.0 + 2.0 * np.cumsum(rho[1:])
    below = 1.0 + 2.0 * (sums - 1.0) / count - 4.0 * lags / count
    tau = np.where(below > SMALLEST, sums / np.maximum(below, SMALLEST), count)
    within = lags >= WINDOW * tau
    chosen = float(tau[np.argmax(within)]) if within.any() else float(count)
    return float(np.clip(count / max(chosen, 1.0), min(3.0, count), count))


def _daily_means(t: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray] | None:
    """Return middle times and means of the whole daily cycles, None where there are too few."""
    # The last reading of an even series stands for the step up to the next one.
    step = float(np.median(np.diff(t)))
    cycles = int((t[-1] - t[0] + step) / DAY_H + 1e-9)
    if cycles < LEAST_CYCLES:
        return None
    number = ((t - t[0] + 1e-9) // DAY_H).astype(int)
    groups = [number == k for k in range(cycles)]
    if any(np.count_nonzero(g) < LEAST_PER_CYCLE for g in groups):
        return None
    middles = np.array([t[g].mean() for g in groups])
    return middles, np.array([y[g].mean() for g in groups])
