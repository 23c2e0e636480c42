"""Settings of every test."""

from __future__ import annotations

from hypothesis import settings

# A busy machine is slow, not wrong.
settings.register_profile("no deadline", deadline=None)
settings.load_profile("no deadline")
