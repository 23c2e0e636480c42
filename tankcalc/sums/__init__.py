"""The working from the observed tank to net standard volume, mass and weight."""

from __future__ import annotations

from tankcalc.sums.answer import sums
from tankcalc.sums.book import ROUNDINGS, Rounding
from tankcalc.sums.working import Line

__all__ = ["ROUNDINGS", "Line", "Rounding", "sums"]
