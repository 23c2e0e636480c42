"""A vessel as it stands under load: grown with temperature, stretched by the head in it."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from tankcalc.geometry.body import Array
from tankcalc.geometry.given import Given, flat, held, refuse_outside
from tankcalc.geometry.vessel import ROUNDING_M, Vessel

STEPS = 30
"""Most rounds for the level of a volume; each leaves a thousandth of the error or less."""


@dataclass(frozen=True, slots=True)
class Course:
    """A course of a vertical shell: from, to, internal radius, thickness of the plate, all m."""

    bottom_m: float
    top_m: float
    radius_m: float
    thickness_m: float


@dataclass(frozen=True, slots=True)
class Stretch:
    """What the head of a liquid adds to the volume of a vertical shell.

    Attributes
    ----------
    courses : tuple of Course
        From the bottom up.
    head_pa_m : float
        Density times gravity of the liquid, less that which the vessel's own figures already
        allow for, Pa/m; negative where they allow for more.
    modulus_pa : float
        Young's modulus of the plate, Pa.

    Notes
    -----
    Thin wall, each ring free: at depth d the radius grows by rho g d R^2 / (E t), and the area by
    2 pi R^3 rho g d / (E t). The stiffness of bottom and roof, and the plate's Poisson effect, are
    neglected, as tank calibration does (principle of the liquid-head correction of ISO 7507-1 and
    API MPMS 2.2A; from memory). One mean density stands for the whole column: the correction is
    about 0.06 % of the volume, so 1 % of density is 6e-6 of it.
    """

    courses: tuple[Course, ...]
    head_pa_m: float
    modulus_pa: float

    def gain_below(self, z_m: Array, surface_m: Array) -> Array:
        """Return what the head of a surface (m) adds to the volume below elevations (m), m3."""
        volume = np.zeros(np.broadcast_shapes(z_m.shape, surface_m.shape))
        for course in self.courses:
            over = np.maximum(surface_m - course.bottom_m, 0.0)
            past = np.maximum(surface_m - np.clip(z_m, course.bottom_m, course.top_m), 0.0)
            volume += self._share(course) * (over**2 - past**2)
        return volume

    def mass_gain(
        self, density: Callable[[Array], Array], jumps_m: Sequence[float], surface_m: Array
    ) -> Array:
        """Return the mass (kg) of what the head adds, where density depends on elevation.

        Parameters
        ----------
        density : callable
            Density at elevations, kg/m3, smooth between the jumps; at a jump, that above it.
        jumps_m : sequence of float
            Elevations at which it jumps, m.
        surface_m : array
            Surfaces, m.

        Notes
        -----
        Integral of rho(z) times the growth of the area, 2 k (surface - z), by Simpson's rule
        between courses and jumps: exact for a density that is linear there.
        """
        mass = np.zeros_like(surface_m)
        for course in self.courses:
            inside = (z for z in jumps_m if course.bottom_m < z < course.top_m)
            edges = [course.bottom_m, *sorted(inside), course.top_m]
            for low, high in itertools.pairwise(edges):
                bottom = np.minimum(low, surface_m)
                top = np.minimum(high, surface_m)
                third = (top - bottom) / 6.0
                middle = 0.5 * (bottom + top)
                under = bottom + (1.0 - 1e-12) * (top - bottom)
                weighed = density(bottom) * (surface_m - bottom)
                weighed = weighed + 4.0 * density(middle) * (surface_m - middle)
                weighed = weighed + density(under) * (surface_m - top)
                mass += 2.0 * self._share(course) * third * weighed
        return mass

    def _share(self, course: Course) -> float:
        share = np.pi * course.radius_m**3 * self.head_pa_m
        return float(share / (self.modulus_pa * course.thickness_m))

    def gain(self, surface_m: Array) -> tuple[Array, Array, Array]:
        """Return what a surface (m) adds: volume (m3), its moment (m4), and area (m2).

        The area is the derivative of the volume by the surface; the moment is that of the volume
        so gained as the surface rises.
        """
        volume, moment, area = (np.zeros_like(surface_m) for _ in range(3))
        for course in self.courses:
            share = self._share(course)
            over = np.maximum(surface_m - course.bottom_m, 0.0)
            past = np.maximum(surface_m - course.top_m, 0.0)
            volume += share * (over**2 - past**2)
            area += 2.0 * share * (over - past)
            # Integral of z d(volume): z = bottom + over below, top + past above.
            moment += share * (
                2.0 / 3.0 * (over**3 - past**3) + course.bottom_m * over**2 - course.top_m * past**2
            )
        return volume, moment, area


class LoadedVessel(Vessel):
    """A vessel whose figures are those of another, grown and stretched.

    Parameters
    ----------
    bare : Vessel
        As measured, or as its table says.
    across : float
        Factor on horizontal lengths.
    upright : float
        Factor on elevations, about the datum; 1 for a vertical shell, whose levels are measured by
        a tape or a pressure and not as a share of the height.
    stretch : Stretch or None
        What the head adds.

    Examples
    --------
    >>> from tankcalc.geometry import sphere
    >>> warm = LoadedVessel(sphere(10.0), across=1.001, upright=1.001)
    >>> round(warm.capacity / sphere(10.0).capacity, 9)
    1.003003001
    """

    def __init__(
        self, bare: Vessel, across: float, upright: float = 1.0, stretch: Stretch | None = None
    ) -> None:
        self._bare, self._area_factor, self._upright = bare, across * across, upright
        self._stretch = stretch
        self.kind, self.body, self.datum = bare.kind, bare.body, bare.datum
        self.z_min, self.z_max = bare.z_min * upright, bare.z_max * upright
        self.breaks = bare.breaks * upright
        ends = np.array([self.z_min, self.z_max])
        self._volume_at_bottom, self.capacity = map(float, self._volume_and_moment(ends)[0])

    def outline(self) -> Array:
        """Return the side view of the bare vessel, (n, 2), m: no growth could be seen in it."""
        return self._bare.outline()

    def _inside(self, z: Given) -> Array:
        elevations = flat(z)
        limits = self.z_min, self.z_max
        refuse_outside(elevations, limits, ROUNDING_M, ("An elevation", "m", "the vessel"))
        return held(elevations, *limits)

    def _area(self, z: Array) -> Array:
        area = self._area_factor * self._bare.area(self._bare_elevations(z))
        return area if self.stretch is None else area + self.stretch.gain(z)[2]

    def _volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        volume, moment = self._bare.volume_and_moment(self._bare_elevations(z))
        volume = self._area_factor * self._upright * volume
        moment = self._area_factor * self._upright**2 * moment
        if self.stretch is not None:
            more, lever, _ = self.stretch.gain(z)
            volume, moment = volume + more, moment + lever
        return volume, moment

    def _level(self, volume: Array) -> Array:
        level = self._level_without_gain(volume)
        if self.stretch is None:
            return level
        for _ in range(STEPS):
            better = self._level_without_gain(volume - self.stretch.gain(level)[0])
            settled = np.all(np.abs(better - level) <= 1e-14 * (1.0 + np.abs(level)))
            level = better
            if settled:
                break
        return level

    @property
    def stretch(self) -> Stretch | None:
        """What the head of a liquid adds to the volume."""
        return self._stretch

    @property
    def unstretched(self) -> Vessel:
        """The same vessel, grown but without what the head adds."""
        if self.stretch is None:
            return self
        return LoadedVessel(self._bare, self._area_factor**0.5, self._upright)

    def volume_below(self, z: Array, surface: Array) -> Array:
        """Return the volume below elevations under a surface, m3; as `Vessel.volume_below`."""
        if self.stretch is None:
            return super().volume_below(z, surface)
        held_at = self._inside(z).reshape(np.shape(z))
        bare = np.asarray(self.unstretched.volume(held_at))
        return bare + self.stretch.gain_below(held_at, np.asarray(surface))

    def _bare_elevations(self, z: Array) -> Array:
        return held(z / self._upright, self._bare.z_min, self._bare.z_max)

    def _level_without_gain(self, volume: Array) -> Array:
        bare = volume / (self._area_factor * self._upright)
        least = float(self._bare.volume(self._bare.z_min))
        return self._upright * self._bare.level(held(bare, least, self._bare.capacity))
