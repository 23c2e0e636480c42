"""The working from the observed tank to net standard volume, mass and weight."""

from __future__ import annotations

from tankcalc.sums.answer import Sums, sums
from tankcalc.sums.book import ROUNDINGS, Rounding
from tankcalc.sums.given import Line

__all__ = ["ROUNDINGS", "Line", "Rounding", "Sums", "sums"]
