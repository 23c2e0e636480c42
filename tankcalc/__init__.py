"""What a storage tank holds, from the pressure its transmitters read."""

from __future__ import annotations

__version__ = "0.1.0"
