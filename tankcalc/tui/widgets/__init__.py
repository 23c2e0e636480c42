"""The parts of the screen."""

from __future__ import annotations
