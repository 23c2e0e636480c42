"""How well a fault explains the figures: what is left of chi-square, and how odd the fault is.

The score of an explanation is minus twice the logarithm of its evidence: the probability of the
readings, averaged over what the fault could have been. It has two parts.

What is left of chi-square.  A fault that makes the readings agree leaves about as much as there
are degrees of freedom.

How odd the fault is.  A fault of free size b, which the readings fix with a standard uncertainty
u, is worth the share of its prior that lies where the readings want it: the prior is a Cauchy
distribution of a stated scale s, so that the penalty is

    2 ln(sqrt(pi / 2) sqrt(s^2 + u^2) / u) + 2 ln(1 + (b / s)^2)

The first term makes a fault that could have been anything pay for fitting anything; the second
makes it pay for its size, gently: a Cauchy distribution has long tails, and gross faults exist. A
fault without a free size (a unit, a reference) pays -2 ln p for being one of several that were
tried, p being how likely it is among them: it has to hit the figures by itself, which chance does
not do. Units count as 1, 1/2, 1/3, ... in the order of how usual they are.

Every fault pays for where it leaves the tank: for a density far from the profile's, for a vacuum
that no storage tank stands, or a pressure beyond its relief valves, and for a level far from the
last one where that is known.

The scales are judgements, not measurements; they only order explanations that reconcile the
figures, and nothing is hidden by them.
"""

from __future__ import annotations

import math

DRIFT_SCALE = 20.0
"""Drift of an instrument, in its own standard uncertainties: what is found off is found off by
tens of them."""

BATCH_SCALE = 0.01
"""Density of another batch, as a share: two deliveries of one product differ by a percent."""

WATER_SCALE_M = 0.3
"""Height of free water, or error of its top, m: what collects between two draws is decimetres."""

LEG_SCALE_K = 15.0
"""Error of a leg's mean temperature, K: what sun and frost do to a line on a wall."""

BLANKET_SCALE_PA = 2000.0
"""Pressure above the liquid that is not read, Pa: pressure/vacuum valves hold 0.2 to 2 kPa."""

WORKING_BUT_DEAD = 0.05
"""How often a working p3 shows exactly what a dead one does: once in twenty readings, vented tanks
included. A dead p3 that shows just that has this coincidence for it."""

PROFILE_SCALE = 0.02
"""Departure of the density from the profile's, as a share, for every explanation."""

BEYOND_RELIEF_SCALE_PA = 2000.0
"""Pressure above the liquid beyond what the relief valves hold, or any vacuum where none are
stated, for every explanation, Pa."""

LAST_LEVEL_SCALE_M = 1.0
"""Change since the last reading, m, for every explanation; a tank in use moves by metres."""

LARGEST_DEPARTURE = 0.2
"""A density further than this share from the profile's is that of another kind of liquid."""

IMPROVEMENT = 3.841
"""What chi-square must fall by at least: the value that it exceeds with one degree of freedom once
in twenty times (NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.4, from memory)."""


def size_penalty(size: float, uncertainty: float, scale: float) -> float:
    """Return what a fault of free size pays.

    Parameters
    ----------
    size, uncertainty : float
        What the readings make of it, and how well they fix it (standard uncertainty above zero).
    scale : float
        Scale of the Cauchy distribution of such faults, above zero, in the same unit.

    Examples
    --------
    >>> round(size_penalty(0.0, 1.0, 20.0), 2)
    6.45
    >>> round(size_penalty(20.0, 1.0, 20.0) - size_penalty(0.0, 1.0, 20.0), 2)
    1.39
    """
    width = math.sqrt(math.pi / 2.0) * math.hypot(scale, uncertainty) / uncertainty
    return 2.0 * math.log(width) + tail_penalty(size, scale)


def tail_penalty(size: float, scale: float) -> float:
    """Return what a size pays for lying out in the tails of a Cauchy distribution."""
    return 2.0 * math.log1p((size / scale) ** 2)


def choice_penalty(share: float) -> float:
    """Return what a fault pays for being one of several that were tried, by its likelihood."""
    return -2.0 * math.log(share)


def spread_penalty(spread: float, uncertainty: float) -> float:
    """Return what a correction pays that is known only within a spread (standard deviation)."""
    return 2.0 * math.log(math.hypot(spread, uncertainty) / uncertainty)
