"""Saturated liquids by the reference equations of CoolProp, an optional library."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any, ClassVar, NamedTuple

import numpy as np

from tankcalc.constants import GAS_CONSTANT_J_MOL_K, ICE_POINT_K
from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.components import COMPONENTS, whole
from tankcalc.fluids.models import DensityModel, FloatArray
from tankcalc.fluids.vapour import Vapour

if TYPE_CHECKING:
    from types import ModuleType

METHOD = "saturated"

NODES = 64
"""Chebyshev points over the range: the curve is then within 1e-6 of the library's."""

USUAL_K = ICE_POINT_K + 15.0
"""Temperature of the vapour that counts, where the liquid has it, K."""

COUNTS = 0.1
"""A component of at least this mole fraction may freeze out at its own triple point."""


class _Curve(NamedTuple):
    """Density and log of pressure over the whole range, as Chebyshev coefficients."""

    low_k: float
    high_k: float
    density: FloatArray
    log_pa: FloatArray

    def at(self, coefficients: FloatArray, temperature_k: FloatArray | float) -> FloatArray:
        """Return one of the two at temperatures in K."""
        x = (2.0 * np.asarray(temperature_k) - self.low_k - self.high_k) / (
            self.high_k - self.low_k
        )
        return np.asarray(np.polynomial.chebyshev.chebval(x, coefficients))


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
        names, shares = self._names, self._shares
        pure = [library.AbstractState("HEOS", name) for name in names]
        low, high = _limits(pure, shares)
        x = np.cos(np.pi * (np.arange(NODES) + 0.5) / NODES)
        try:
            state = self._state()
            boiling = [_boiling(library, state, t) for t in low + 0.5 * (high - low) * (1.0 + x)]
        except ValueError as error:
            what = " and ".join(name for name, _ in self.composition)
            raise InputError(
                f"CoolProp finds no saturated liquid of {what} mixed so. "
                "Use a table of measured densities."
            ) from error
        rho, pa = np.asarray(boiling).T
        fits = [np.polynomial.chebyshev.chebfit(x, y, NODES - 1) for y in (rho, np.log(pa))]
        return _Curve(low, high, *map(np.asarray, fits))

    @property
    def _names(self) -> list[str]:
        return [COMPONENTS[name].library for name, _ in self.composition]

    @property
    def _shares(self) -> list[float]:
        return [share for _, share in self.composition]

    def _state(self) -> Any:
        """Return the library's state of this liquid."""
        state = _library().AbstractState("HEOS", "&".join(self._names))
        if len(self.composition) > 1:
            state.set_mole_fractions(self._shares)
        return state

    @cached_property
    def vapour(self) -> Vapour | None:
        """The vapour in equilibrium at 15 degC, or at the nearest temperature inside the limits.

        Its molar mass, and its compressibility p / (rho R T), as it boils there.
        """
        library, state = _library(), self._state()
        t = min(max(USUAL_K, self.limits_k[0]), self.limits_k[1])
        try:
            state.update(library.QT_INPUTS, 0.0, t)
            moles = float(state.saturated_vapor_keyed_output(library.iDmolar))
            shares = state.mole_fractions_vapor() if len(self._names) > 1 else [1.0]
        except ValueError:
            return None  # a notice tells of it where it matters
        masses = [float(library.AbstractState("HEOS", name).molar_mass()) for name in self._names]
        mass = sum(y * m for y, m in zip(shares, masses, strict=True))
        compressibility = float(state.p()) / (moles * GAS_CONSTANT_J_MOL_K * t)
        return Vapour(molar_mass_kg_mol=float(mass), compressibility=compressibility)

    def saturation_pa(self, temperature_k: float) -> float | None:
        """Return the bubble-point pressure (Pa, absolute); None outside the limits."""
        curve = self._curve
        if not curve.low_k <= temperature_k <= curve.high_k:
            return None
        return float(np.exp(curve.at(curve.log_pa, temperature_k)))

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
        return self._curve.at(self._curve.density, temperature_k)


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


def _boiling(library: Any, state: Any, temperature_k: float) -> tuple[float, float]:
    """Return density (kg/m3) and pressure (Pa) at the bubble point."""
    state.update(library.QT_INPUTS, 0.0, float(temperature_k))
    return float(state.rhomass()), float(state.p())
