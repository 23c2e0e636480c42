"""What differences go with: time, throughput, or the shape of a capacity table."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

RANK_TOLERANCE = 1e-9
"""Singular values of the unit columns below this share of the largest count as zero."""

HARDLY = 30.0
"""Condition number of the unit columns from which slopes can hardly be told apart (common
practice: Belsley, Kuh and Welsch)."""


@dataclass(frozen=True, slots=True)
class Slope:
    """How much of the difference goes with one cause.

    Attributes
    ----------
    name : str
        The cause.
    value, standard_error : float
        Per unit of the cause.
    t : float
        Value over standard error; infinite where the fit is exact.
    probability : float
        Of a t as large as this by chance, two-sided (Student's distribution).
    """

    name: str
    value: float
    standard_error: float
    t: float
    probability: float


@dataclass(frozen=True, slots=True)
class Causes:
    """A regression of differences.

    Attributes
    ----------
    slopes : tuple of Slope
        Of the causes that can be told, in the order given.
    unvaried : tuple of str
        Causes that were zero throughout: nothing can be said of them.
    together : tuple of str
        Causes that varied only together and cannot be told apart.
    hardly : bool
        Whether those that can be told apart nearly vary together all the same.
    residual : float
        Standard deviation of what is left, in the unit of the differences.
    freedom : int
        Degrees of freedom.
    """

    slopes: tuple[Slope, ...]
    unvaried: tuple[str, ...]
    together: tuple[str, ...]
    hardly: bool
    residual: float
    freedom: int


def regress(differences: Sequence[float], causes: dict[str, Sequence[float]]) -> Causes | None:
    """Return the slopes of d_i = sum of slope_j x_ij + e_i by least squares.

    Parameters
    ----------
    differences : sequence of float (n,)
        In kg or standard m3.
    causes : dict of str to sequence of float (n,)
        By name; "hours" stands for the constant, so no constant is added.

    Returns
    -------
    Causes or None
        None where there are not more differences than causes that can be told apart.

    Notes
    -----
    The rank is that of the columns scaled to unit length. A cause can be told if no combination
    of causes that leaves every row at zero involves it. Errors of the causes themselves are
    neglected: times, throughputs and levels are known far better than their differences.

    References
    ----------
    The regression of statistical inventory reconciliation; least squares with Student's t as in
    any textbook (e.g. Draper and Smith, "Applied Regression Analysis").

    Examples
    --------
    >>> found = regress([-2.0, -4.1, -2.9, -5.0], {"hours": [24, 48, 36, 60]})
    >>> round(found.slopes[0].value, 4), found.freedom
    (-0.0835, 3)
    """
    y = np.asarray(differences, dtype=float)
    table = np.column_stack([np.asarray(x, dtype=float) for x in causes.values()])
    lengths = np.sqrt(np.sum(table**2, axis=0))
    names = [name for name, length in zip(causes, lengths, strict=True) if length > 0.0]
    unvaried = tuple(name for name in causes if name not in names)
    if not names:
        return None
    lengths = lengths[lengths > 0.0]
    columns = table[:, [list(causes).index(name) for name in names]] / lengths
    u, sizes, v = np.linalg.svd(columns, full_matrices=False)
    kept = sizes > RANK_TOLERANCE * sizes[0]
    freedom = len(y) - int(np.count_nonzero(kept))
    if freedom < 1:
        return None
    inverse = (v[kept].T / sizes[kept]) @ u[:, kept].T
    slopes = inverse @ y
    variance = float(np.sum((y - columns @ slopes) ** 2)) / freedom
    errors = np.sqrt(variance * np.sum(inverse**2, axis=1))
    # What the kept directions do not span of a cause's own axis cannot be told.
    apart = np.sum(v[kept] ** 2, axis=0) > 1.0 - 1e-10
    return Causes(
        tuple(
            _slope(name, slopes[k] / lengths[k], errors[k] / lengths[k], freedom)
            for k, name in enumerate(names)
            if apart[k]
        ),
        unvaried,
        tuple(name for k, name in enumerate(names) if not apart[k]),
        bool(sizes[0] > HARDLY * sizes[kept][-1]),
        float(np.sqrt(variance)),
        freedom,
    )


def _slope(name: str, value: float, error: float, freedom: int) -> Slope:
    t = float(value / error) if error > 0.0 else float(np.copysign(np.inf, value))
    return Slope(name, float(value), float(error), t, two_sided(t, freedom))


def two_sided(t: float, freedom: float) -> float:
    """Return the probability of a Student's t at least as large either way.

    Examples
    --------
    >>> round(two_sided(2.086, 20), 4)
    0.05
    """
    from scipy.special import stdtr

    return 2.0 * float(stdtr(freedom, -abs(t)))


def coverage(freedom: float) -> float:
    """Return the coverage factor for 95.45 %: two for many degrees of freedom, more for few.

    References
    ----------
    JCGM 100:2008, annex G.3 and table G.2.

    Examples
    --------
    >>> round(coverage(10), 2), round(coverage(1e9), 2)
    (2.28, 2.0)
    """
    from scipy.special import stdtrit

    return float(stdtrit(freedom, 1.0 - 0.04550026389635842 / 2.0))
