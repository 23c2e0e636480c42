"""What a 4-20 mA signal or a percentage of range says, and which range to set for it.

A signal is carried as its share of the range: 0 at 4 mA, 1 at 20 mA.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from tankcalc.errors import InputError

Status = Literal["good", "saturated", "uncertain", "failed"]
"""What a signal is worth.

good       within the range
saturated  measured, but past the end of the range: little further and it shows no more
uncertain  past what a transmitter measures, short of what it signals a failure with
failed     that of a failed transmitter: it says nothing of the tank
"""

RANGE_A = (0.004, 0.020)
"""Current at the two ends of the range, A."""

MEASURED = (-0.0125, 1.03125)
"""Shares between which a signal is a measurement, 3.8 mA to 20.5 mA: NAMUR NE 43, as several
secondary texts give it; the recommendation itself was not seen."""

FAILED = (-0.025, 1.0625)
"""Shares beyond which a transmitter has failed, below 3.6 mA and above 21.0 mA: as `MEASURED`."""

EDGE = 1e-9
"""A share this close to the edge of a band is on it: decimal text has no exact binary value."""

STEPS = 20
"""The rounding step of a range is at most its span over this: 5 % at either end is what a span of
round figures costs (common practice, no source)."""

ROUNDING = 1e-9
"""Part of a step by which a reading may pass an end of the range: rounding of the arithmetic."""


@dataclass(frozen=True, slots=True)
class Signal:
    """A signal: its share of the range (0 at 4 mA, 1 at 20 mA) and what it is worth."""

    share: float
    status: Status


@dataclass(frozen=True, slots=True)
class Range:
    """A range to set: what 4 mA and 20 mA stand for, and the step both were rounded to, Pa."""

    lrv_pa: float
    urv_pa: float
    step_pa: float


def status(share: float) -> Status:
    """Return what a signal at a share of the range is worth.

    Parameters
    ----------
    share : float
        0 at 4 mA, 1 at 20 mA; any number. NaN counts as failed.

    Notes
    -----
    The edges belong to the better band: 3.8 mA is still measured, 3.6 mA is not yet failed.

    References
    ----------
    NAMUR NE 43, from secondary texts: see `MEASURED` and `FAILED`.

    Examples
    --------
    >>> [status(signal_from_current_a(i / 1000.0).share) for i in (3.5, 3.7, 3.9, 12.0, 20.5, 22.0)]
    ['failed', 'uncertain', 'saturated', 'good', 'saturated', 'failed']
    """
    if _within(share, (0.0, 1.0)):
        return "good"
    if _within(share, MEASURED):
        return "saturated"
    return "uncertain" if _within(share, FAILED) else "failed"


def _within(share: float, band: tuple[float, float]) -> bool:
    return band[0] - EDGE <= share <= band[1] + EDGE


def signal_from_share(share: float) -> Signal:
    """Return the signal at a share of the range, with what it is worth."""
    return Signal(share, status(share))


def signal_from_current_a(current_a: float) -> Signal:
    """Return the signal that a current (A) is, with what it is worth.

    Notes
    -----
    x = (I - 4 mA) / 16 mA.

    Examples
    --------
    >>> signal_from_current_a(0.012)
    Signal(share=0.5, status='good')
    """
    low, high = RANGE_A
    return signal_from_share((current_a - low) / (high - low))


def current_from_share(share: float) -> float:
    """Return the current (A) that stands for a share of the range.

    Notes
    -----
    I = 4 mA + 16 mA x.

    Examples
    --------
    >>> round(current_from_share(0.372), 6)
    0.009952
    """
    low, high = RANGE_A
    return low + share * (high - low)


def measured_current_a(share: float) -> float | None:
    """Return the current (A) a sound transmitter puts out; None past where it saturates.

    Examples
    --------
    >>> measured_current_a(1.2) is None
    True
    """
    return current_from_share(share) if _within(share, MEASURED) else None


def pressure_from_share(share: float, range_pa: tuple[float, float]) -> float:
    """Return the pressure (Pa) that a share of the range stands for.

    Parameters
    ----------
    share : float
        0 at 4 mA, 1 at 20 mA. Of a failed signal there is no pressure: ask `status` first.
    range_pa : (float, float)
        Lower and upper range value, Pa, in the transmitter's own reference; the upper one may be
        the smaller number.

    Returns
    -------
    float
        Pa, in the transmitter's own reference.

    Notes
    -----
    p = LRV + x (URV - LRV), the linear output. A differential transmitter left on square-root
    output (for flow) shows the root of x instead, 70.7 % where 50 % is meant.

    Examples
    --------
    >>> pressure_from_share(signal_from_current_a(0.012).share, (0.0, 100_000.0))
    50000.0
    """
    lrv, urv = range_pa
    return lrv + share * (urv - lrv)


def share_from_pressure_pa(pressure_pa: float, range_pa: tuple[float, float]) -> float:
    """Return the share of the range that a pressure is; the inverse of `pressure_from_share`.

    Raises
    ------
    InputError
        Both ends of the range are the same.

    Examples
    --------
    >>> share_from_pressure_pa(-75_000.0, (-100_000.0, 0.0))
    0.25
    """
    lrv, urv = range_pa
    if lrv == urv:
        raise InputError("both ends of the range are the same: it has no signal.")
    return (pressure_pa - lrv) / (urv - lrv)


def covers(range_pa: tuple[float, float], lowest_pa: float, highest_pa: float) -> bool:
    """Return whether two extremes (Pa) lie within a range."""
    low, high = min(range_pa), max(range_pa)
    slack = ROUNDING * (high - low)
    return low - slack <= lowest_pa and highest_pa <= high + slack


def range_to_set(lowest_pa: float, highest_pa: float, step_unit_pa: float = 1000.0) -> Range:
    """Return the range that holds two extremes, rounded outward to a step of 1, 2 or 5.

    Parameters
    ----------
    lowest_pa, highest_pa : float
        The extremes, Pa in the transmitter's own reference; the highest above the lowest.
    step_unit_pa : float
        Unit in which the step is 1, 2 or 5 times a power of ten, Pa.

    Returns
    -------
    Range
        Both ends are whole steps; each is less than a step from its extreme.

    Notes
    -----
    The step is the largest that is no more than a twentieth of the span (`STEPS`).

    Examples
    --------
    >>> range_to_set(0.0, 120_737.6)
    Range(lrv_pa=0.0, urv_pa=125000.0, step_pa=5000.0)
    >>> range_to_set(-94_176.0, -10_791.0)
    Range(lrv_pa=-96000.0, urv_pa=-10000.0, step_pa=2000.0)
    """
    step = step_unit_pa * _step_below((highest_pa - lowest_pa) / STEPS / step_unit_pa)
    lowest = math.floor(lowest_pa / step + ROUNDING)
    highest = math.ceil(highest_pa / step - ROUNDING)
    return Range(lowest * step, highest * step, step)


def _step_below(size: float) -> float:
    """Return the largest 1, 2 or 5 times a power of ten that is no more than a size above zero."""
    exponent = math.floor(math.log10(size))
    mantissa = size / 10.0**exponent
    first = next(digit for digit in (5, 2, 1) if mantissa >= digit or digit == 1)
    return first * 10.0**exponent if exponent >= 0 else first / 10.0**-exponent
