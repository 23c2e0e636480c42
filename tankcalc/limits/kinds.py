"""Every alert there is, and which of them is the cause of which."""

from __future__ import annotations

from tankcalc.limits.levels import HIGH_LIMITS, LOW_LIMITS
from tankcalc.limits.looks import FOLLOWERS

STALE = "stale"
MOVEMENT = "movement"
REFUSED = "refused"
DISAGREEMENT = "disagreement"
TEMPERATURE = "temperature_outside"
VENT = "vent_blocked"
VACUUM = "vacuum_beyond_relief"
PRESSURE = "pressure_beyond_relief"
RATES = ("rate_in", "rate_out")
INSTRUMENTS = ("p1", "p2", "p3", "dp")

ORDER = (
    *(f"above_{name}" for name in reversed(HIGH_LIMITS)),
    VACUUM,
    VENT,
    PRESSURE,
    *(f"below_{name}" for name in LOW_LIMITS),
    *RATES,
    *(f"failed_{tag}" for tag in INSTRUMENTS),
    STALE,
    TEMPERATURE,
    *(f"stuck_{name}" for name in FOLLOWERS),
    REFUSED,
    DISAGREEMENT,
    MOVEMENT,
)
"""Every alert there is, the most pressing first."""

IMMEDIATE = frozenset({"above_critical_high", VENT, VACUUM})
"""Alerts that no delay holds back."""


def causes_of(key: str) -> tuple[str, ...]:
    """Return the alerts that explain another one: while one of them lasts, it is none of its own.

    The causes of a cause are among them, and come before it: the first that lasts is the root.

    Examples
    --------
    >>> causes_of("above_maximum_working")
    ('above_critical_high', 'above_overfill_action', 'above_high_high')
    """
    failed = tuple(f"failed_{tag}" for tag in INSTRUMENTS)
    stuck = tuple(f"stuck_{name}" for name in FOLLOWERS)
    if key.startswith("above_"):
        above = tuple(f"above_{name}" for name in reversed(HIGH_LIMITS))
        return above[: above.index(key)]
    if key.startswith("stuck_"):
        name = key.removeprefix("stuck_")
        return (f"failed_{name}",) if name in INSTRUMENTS else ()
    return {
        "below_minimum_working": ("below_low_low",),
        VENT: ("failed_p3", VACUUM),
        VACUUM: ("failed_p3",),
        PRESSURE: ("failed_p3",),
        REFUSED: (*failed, TEMPERATURE, *stuck),
        DISAGREEMENT: (*failed, *stuck),
        "rate_in": (*failed, *stuck, DISAGREEMENT),
        "rate_out": (*failed, *stuck, DISAGREEMENT),
        MOVEMENT: (*failed, *stuck, DISAGREEMENT, *RATES),
    }.get(key, ())
