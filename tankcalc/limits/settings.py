"""What a site chooses of alerts and rates; every figure has a default."""

from __future__ import annotations

from dataclasses import dataclass

RANDOM_SHARE = 1.0 / 3.0
"""Share of a transmitter's stated accuracy that differs from reading to reading. The rest (zero,
calibration, drift) is the same in two readings of one instrument and cancels in their difference
(common practice, no source: noise of 10 Pa beside a zero of 30 Pa)."""


@dataclass(frozen=True, slots=True)
class AlertSettings:
    """Dead bands, delays and ages of a site's alerts.

    Attributes
    ----------
    level_dead_band, pressure_dead_band, flow_dead_band : float
        How far a figure must come back before its alert returns, as shares: of the height of the
        vessel, of the span between vacuum and relief, of the largest flow (starting values of
        EEMUA 191 as cited in public text, from memory).
    on_delay_s, off_delay_s : float
        How long a condition must last before it is raised, or be gone before it returns, s.
        Zero by default: a log by hand has an hour between readings.
    stale_after_s : float
        Age of the last reading from which it is stale, s. By default an hour beyond a 12-hour
        shift (common practice, no source).
    stuck_after : int
        Number of identical readings in a row that is told, 2 or more (common practice).
    """

    level_dead_band: float = 0.02
    pressure_dead_band: float = 0.02
    flow_dead_band: float = 0.05
    on_delay_s: float = 0.0
    off_delay_s: float = 0.0
    stale_after_s: float = 13 * 3600.0
    stuck_after: int = 3


@dataclass(frozen=True, slots=True)
class RateSettings:
    """How a site takes its readings.

    Attributes
    ----------
    read_every_s : float or None
        Time between planned readings, s; None: not stated.
    random_share : float
        Share of a transmitter's accuracy that is random, 0 to 1.
    """

    read_every_s: float | None = None
    random_share: float = RANDOM_SHARE
