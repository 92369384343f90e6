"""A focused laser beam with an elliptical Gaussian profile.

Reference
---------
[1] R. Grimm, M. Weidemueller, Yu. B. Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000), eqs. (34) and (35).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.checks import Floats, as_floats, require_positive
from physics.traps.directions import frame_along, unit_vector, vector


@dataclass(frozen=True, kw_only=True, eq=False)
class GaussianBeam:
    """A Gaussian beam; several add in intensity, without interference.

    Attributes
    ----------
    name : str.
    on : bool. A beam that is off does nothing.
    wavelength : float. [m] In vacuum.
    power : float. [W] Zero or more.
    waists : two floats. [m] 1/e^2 radii of the intensity at the focus, horizontal and vertical: vertical is the
        transverse axis nearest z (`physics.traps.directions`). One number for a round beam.
    direction : three numbers, not all zero. Along which the light travels; the trap of the reverse is the same.
    focus : (3,). [m] Both waists lie there.
    m2 : float. [1] Beam quality, 1 or more: the Rayleigh lengths are 1/m2 of those of an ideal beam.

    Raises
    ------
    ValueError : where a value cannot be, in one sentence naming it.
    """

    name: str
    wavelength: float
    power: float
    waists: Sequence[float] | Floats | float
    direction: Sequence[float] | Floats
    focus: Sequence[float] | Floats = (0.0, 0.0, 0.0)
    on: bool = True
    m2: float = 1.0

    def __post_init__(self) -> None:
        if not self.name.strip():
            raise ValueError("beam name must not be empty")
        require_positive(f"wavelength of beam {self.name}", as_floats(self.wavelength), "m")
        if not 0.0 <= self.power < math.inf:
            raise ValueError(f"power of beam {self.name} must be finite and not negative, got {self.power:g} W")
        waists = as_floats(self.waists)
        if waists.ndim == 0:
            waists = as_floats([waists, waists])
        if waists.shape != (2,):
            raise ValueError(f"waists of beam {self.name} must be one or two lengths, got {self.waists} m")
        require_positive(f"waist of beam {self.name}", waists, "m")
        if not 1.0 <= self.m2 < math.inf:
            raise ValueError(f"m2 of beam {self.name} must be 1 or more, got {self.m2:g}")
        object.__setattr__(self, "waists", waists)
        object.__setattr__(self, "direction", unit_vector(f"direction of beam {self.name}", self.direction))
        object.__setattr__(self, "focus", vector(f"focus of beam {self.name}", self.focus, "m"))

    @cached_property
    def frame(self) -> Floats:
        """(3, 3) Rows: horizontal and vertical transverse axis, direction."""
        return frame_along(as_floats(self.direction))

    @cached_property
    def rayleigh_lengths(self) -> Floats:
        """(2,) pi w0^2/(m2 wavelength), horizontal and vertical. [m]"""
        lengths: Floats = math.pi * as_floats(self.waists) ** 2 / (self.m2 * self.wavelength)
        return lengths

    @property
    def peak_intensity(self) -> float:
        """2P/(pi wx wy). [W/m^2]"""
        return float(2.0 * self.power / (math.pi * np.prod(self.waists)))

    def local(self, points: Floats) -> Floats:
        """(..., 3) Coordinates of points in the beam's own frame, from its focus. [m]"""
        coordinates: Floats = (np.asarray(points) - self.focus) @ self.frame.T
        return coordinates

    def widths(self, distance: Floats) -> Floats:
        """(..., 2) 1/e^2 radii at distances along the beam from the focus. [m]"""
        stretch = 1.0 + (np.asarray(distance)[..., np.newaxis] / self.rayleigh_lengths) ** 2
        radii: Floats = self.waists * np.sqrt(stretch)
        return radii

    def scaled_radius(self, points: Floats) -> Floats:
        """Distance from the axis in local beam radii: the intensity there is exp(-2 times its square) of the axis."""
        away = np.asarray(points, dtype=np.float64) - self.focus
        u, v, s = (away @ axis for axis in self.frame)
        (zu, zv), (wu, wv) = self.rayleigh_lengths, as_floats(self.waists)
        square = u**2 / (wu**2 + (wu / zu * s) ** 2) + v**2 / (wv**2 + (wv / zv * s) ** 2)
        scaled: Floats = np.sqrt(square)
        return scaled

    def intensity(self, points: Floats) -> Floats:
        """Intensity at points (..., 3). [W/m^2]"""
        intensity, _, _ = self.intensity_derivatives(points, order=0)
        return intensity

    def intensity_derivatives(self, points: Floats, order: int = 2) -> tuple[Floats, Floats | None, Floats | None]:
        """Intensity [W/m^2], its gradient (..., 3) and Hessian (..., 3, 3) at points (..., 3), up to an order."""
        # One array a coordinate: most of the time of a survey is spent here.
        away = np.asarray(points, dtype=np.float64) - self.focus
        horizontal, vertical, axis = self.frame
        u, v, s = away @ horizontal, away @ vertical, away @ axis
        (zu, zv), (wu, wv) = self.rayleigh_lengths, as_floats(self.waists)
        # p: inverse squares of the radii; a: squares of the distances from the axis over those of the radii.
        pu = 1.0 / (wu**2 + (wu / zu * s) ** 2)
        pv = pu if wu == wv else 1.0 / (wv**2 + (wv / zv * s) ** 2)
        au, av = u * u * pu, v * v * pv
        with np.errstate(under="ignore"):
            intensity = np.exp(-2.0 * (au + av)) * ((2.0 * self.power / math.pi) * np.sqrt(pu * pv))
        if order == 0:
            return intensity, None, None
        # Derivatives of the logarithm of the intensity, then the product rule.
        lu, lv = 2.0 * (wu / zu) ** 2 * s * pu, 2.0 * (wv / zv) ** 2 * s * pv
        fu, fv = -4.0 * u * pu, -4.0 * v * pv
        fs = (2.0 * au - 0.5) * lu + (2.0 * av - 0.5) * lv
        with np.errstate(under="ignore"):
            gradient = (intensity * fu)[..., np.newaxis] * horizontal
            gradient += (intensity * fv)[..., np.newaxis] * vertical
            gradient += (intensity * fs)[..., np.newaxis] * axis
        if order == 1:
            return intensity, gradient, None
        first = np.stack([fu, fv, fs], axis=-1)
        second = first[..., :, np.newaxis] * first[..., np.newaxis, :]
        second[..., 0, 0] -= 4.0 * pu
        second[..., 1, 1] -= 4.0 * pv
        mixed = np.stack([4.0 * u * pu * lu, 4.0 * v * pv * lv], axis=-1)
        second[..., :2, 2] += mixed
        second[..., 2, :2] += mixed
        bend_u, bend_v = 2.0 * (wu / zu) ** 2 * pu, 2.0 * (wv / zv) ** 2 * pv
        second[..., 2, 2] += (2.0 * au - 0.5) * bend_u + (0.5 - 4.0 * au) * lu**2
        second[..., 2, 2] += (2.0 * av - 0.5) * bend_v + (0.5 - 4.0 * av) * lv**2
        with np.errstate(under="ignore"):
            second *= intensity[..., np.newaxis, np.newaxis]
        hessian: Floats = self.frame.T @ second @ self.frame
        return intensity, gradient, hessian
