"""Saturated liquids by the reference equations of CoolProp, an optional library."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any, ClassVar, NamedTuple

import numpy as np

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.components import COMPONENTS, whole
from tankcalc.fluids.models import DensityModel, FloatArray

if TYPE_CHECKING:
    from types import ModuleType

METHOD = "saturated"

NODES = 64
"""Chebyshev points over the range: the curve is then within 1e-6 of the library's."""

COUNTS = 0.1
"""A component of at least this mole fraction may freeze out at its own triple point."""


class _Curve(NamedTuple):
    """Density over the whole range, as Chebyshev coefficients."""

    low_k: float
    high_k: float
    coefficients: FloatArray


@dataclass(frozen=True)
class Saturated(DensityModel):
    """A pure liquid, or a mixture, at its bubble point.

    Parameters
    ----------
    composition : tuple of (str, float)
        Components, named as in `components.COMPONENTS`, with mole fractions that sum to 1.

    Raises
    ------
    InputError
        CoolProp is not installed, fractions that make no whole, or components that the library
        cannot mix.

    Notes
    -----
    A pure liquid from its triple point to 0.98 of its critical temperature. A mixture from the
    highest triple point among components of 10 % and more (and 0.4 of the mean critical
    temperature) to 0.95 of the mean critical temperature, weighted by mole fractions. The curve
    is worked out once at 64 temperatures. The pressure above the bubble point is neglected.

    References
    ----------
    I. H. Bell et al., "Pure and pseudo-pure fluid thermophysical property evaluation and the
    open-source thermophysical property library CoolProp", Ind. Eng. Chem. Res. 53 (2014)
    2498-2508, and the reference equation of each fluid named there.
    """

    kind: ClassVar[str] = "liquefied gas"
    composition: tuple[tuple[str, float], ...]

    def __post_init__(self) -> None:
        whole(self.composition, "mole fractions")
        self._curve  # noqa: B018 - what cannot be computed is refused when the file is read

    @property
    def source(self) -> str:  # type: ignore[override]
        """The library and its version."""
        return f"saturated liquid by the reference equations in CoolProp {_library().__version__}"

    @property
    def limits_k(self) -> tuple[float, float]:  # type: ignore[override]
        """Temperatures (K) from freezing to near the critical point."""
        return (self._curve.low_k, self._curve.high_k)

    @cached_property
    def _curve(self) -> _Curve:
        library = _library()
        names = [COMPONENTS[name].library for name, _ in self.composition]
        shares = [share for _, share in self.composition]
        pure = [library.AbstractState("HEOS", name) for name in names]
        low, high = _limits(pure, shares)
        x = np.cos(np.pi * (np.arange(NODES) + 0.5) / NODES)
        try:
            state = library.AbstractState("HEOS", "&".join(names))
            if len(names) > 1:
                state.set_mole_fractions(shares)
            rho = [_density(library, state, t) for t in low + 0.5 * (high - low) * (1.0 + x)]
        except ValueError as error:
            what = " and ".join(name for name, _ in self.composition)
            raise InputError(
                f"CoolProp finds no saturated liquid of {what} mixed so. "
                "Use a table of measured densities."
            ) from error
        coefficients = np.polynomial.chebyshev.chebfit(x, np.asarray(rho), NODES - 1)
        return _Curve(low, high, np.asarray(coefficients))

    def checked_density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3), refusing temperatures at which there is no liquid.

        Raises
        ------
        RangeError
            A temperature lies outside ``limits_k``.
        """
        try:
            return super().checked_density(temperature_k)
        except RangeError as error:
            raise RangeError(
                f"{error} Below lies the triple point, above it nears the critical temperature."
            ) from None

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        low, high, coefficients = self._curve
        x = (2.0 * np.asarray(temperature_k) - low - high) / (high - low)
        return np.asarray(np.polynomial.chebyshev.chebval(x, coefficients))


def _library() -> ModuleType:
    """Return CoolProp, or say how to get it."""
    try:
        import CoolProp
    except ImportError:
        raise InputError(
            "this liquid needs the library CoolProp, which is not installed. "
            "Install it with: pip install 'tankcalc[gases]'"
        ) from None
    return CoolProp


def _limits(pure: list[Any], shares: list[float]) -> tuple[float, float]:
    """Return the lowest and the highest temperature (K) of a mixture, or of one liquid."""
    if len(pure) == 1:
        return float(pure[0].Ttriple()), 0.98 * float(pure[0].T_critical())
    mean = sum(x * float(p.T_critical()) for p, x in zip(pure, shares, strict=True))
    triple = [float(p.Ttriple()) for p, x in zip(pure, shares, strict=True) if x >= COUNTS]
    return max([*triple, 0.4 * mean]), 0.95 * mean


def _density(library: Any, state: Any, temperature_k: float) -> float:
    state.update(library.QT_INPUTS, 0.0, float(temperature_k))
    return float(state.rhomass())
