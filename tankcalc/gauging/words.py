"""Figures inside messages: SI units, as many digits as an operator reads."""

from __future__ import annotations


def pressure(pa: float) -> str:
    """Return a pressure in kPa, to the pascal."""
    return f"{pa / 1000.0:.3f} kPa"


def length(metres: float) -> str:
    """Return a length in m, to the millimetre."""
    return f"{metres:.3f} m"


def listed(words: list[str]) -> str:
    """Return words joined as in a sentence: "a", "a and b", "a, b and c"."""
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"
