"""Readings in, result out: the one calculation that both front ends call."""

from __future__ import annotations

from tankcalc.gauging.evaluate import evaluate

__all__ = ["evaluate"]
