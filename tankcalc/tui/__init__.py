"""The console: one screen to type readings on, see the answer, and log it."""

from __future__ import annotations
