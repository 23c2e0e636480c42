"""What is going on in every tank now: the log, the profiles and the limits put together.

looks    standing readings of the log as the alerts see them
actions  what people did about alerts, from the log
past     the bounded time back that is read, faults and corrections included
state    one tank: alerts, rate, times to its limits, ages, open faults
site     all tanks of a site

Nothing here is a safety function.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from tankcalc.watch.site import Kept, Watched, watch
    from tankcalc.watch.state import Ages, Fault, TankWatch

_HOME = {
    "Ages": "state",
    "Fault": "state",
    "Kept": "site",
    "TankWatch": "state",
    "Watched": "site",
    "watch": "site",
}

__all__ = ["Ages", "Fault", "Kept", "TankWatch", "Watched", "watch"]


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f"{__name__}.{_HOME[name]}"), name)
