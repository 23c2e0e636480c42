"""Whom to believe: readings that check each other, now and over time.

explanation   what was found: faults as data, and in words
plausibility  how well a fault explains the figures: the score and its stated scales
problem       readings as equations with more of them than unknowns
volume        a given volume as one of them
refits        the estimate without one reading
inquiry       what every search for a fault needs to know
drifts        faults of free size in one reading
slips         another unit, another reference, an ullage for a level
samples       a density at the wrong temperature
cause         something that may be otherwise than taken, followed to where it fits best
causes        free water, the temperature of legs, what lies above
further       which reading would allow a check
suspects      `explain`: all of them, ranked
history       this reading against the earlier ones
"""

from __future__ import annotations

from tankcalc.consistency.explanation import Disagreement, Explanation, words
from tankcalc.consistency.history import Moment, against_history
from tankcalc.consistency.problem import reading_uncertainties
from tankcalc.consistency.suspects import explain

__all__ = [
    "Disagreement",
    "Explanation",
    "Moment",
    "against_history",
    "explain",
    "reading_uncertainties",
    "words",
]
