"""The field of coils near their centre, as a trap is made of it.

Bias, gradient and curvature together, or any two of them, make the field of Ioffe and Pritchard along the coils' axis,
third components along it,

    B = (B' x - B'' x z/2, -B' y - B'' y z/2, B0 + (B''/2)(z^2 - (x^2 + y^2)/2)),                             [1]

and a gradient alone a quadrupole, B = B' (-x/2, -y/2, z), strong along the axis. Levitation is a gradient of the
field's magnitude along gravity that is the same everywhere.

References
----------
[1] D. E. Pritchard, Phys. Rev. Lett. 51, 1336 (1983); T. Bergeman, G. Erez, H. J. Metcalf, Phys. Rev. A 35, 1535
    (1987). Recalled.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum
from functools import cached_property

import numpy as np

from physics.checks import Floats, as_floats
from physics.traps.directions import frame_along, unit_vector, vector


class FieldSeeker(Enum):
    """Which way a magnetic field pulls a state."""

    LOW = "low-field seeker"
    HIGH = "high-field seeker"


@dataclass(frozen=True, kw_only=True, eq=False)
class Coils:
    """Coils around a centre. None leaves a part out; of bias, gradient and curvature at least one or a levitation.

    Attributes
    ----------
    axis : three numbers, not all zero.
    centre : (3,). [m]
    bias : float or None. [T] B0, along the axis.
    gradient : float or None. [T/m] B': radial where there is a bias or a curvature, else along the axis (quadrupole).
    curvature : float or None. [T/m^2] B'', along the axis.
    levitation : float or None. [T/m] Gradient of the magnitude along gravity; positive lifts, negative pulls down.
    lifts : FieldSeeker or None. Which states a positive levitation lifts; None: the state that is asked about. Two
        species in one trap need it, where only one of them is levitated.
    knife : float or None. [Hz] Radio frequency that takes atoms away where it meets their Zeeman splitting.

    Raises
    ------
    ValueError : where a value cannot be, in one sentence naming it.
    """

    axis: Sequence[float] | Floats = (0.0, 0.0, 1.0)
    centre: Sequence[float] | Floats = (0.0, 0.0, 0.0)
    bias: float | None = None
    gradient: float | None = None
    curvature: float | None = None
    levitation: float | None = None
    lifts: FieldSeeker | None = None
    knife: float | None = None

    def __post_init__(self) -> None:
        parts = {
            "bias": (self.bias, "T"),
            "gradient": (self.gradient, "T/m"),
            "curvature": (self.curvature, "T/m^2"),
            "levitation": (self.levitation, "T/m"),
        }
        for name, (value, unit) in parts.items():
            if value is not None and not math.isfinite(value):
                raise ValueError(f"{name} of the coils must be finite, got {value:g} {unit}")
        if all(value is None for value, _ in parts.values()):
            raise ValueError(f"coils need at least one of {', '.join(parts)}, got none")
        if self.knife is not None and not 0.0 < self.knife < math.inf:
            raise ValueError(f"knife must be a positive and finite frequency, got {self.knife:g} Hz")
        object.__setattr__(self, "axis", unit_vector("axis of the coils", self.axis))
        object.__setattr__(self, "centre", vector("centre of the coils", self.centre, "m"))

    @cached_property
    def frame(self) -> Floats:
        """(3, 3) Rows: the two axes across, and the axis."""
        return frame_along(as_floats(self.axis))

    @property
    def quadrupole(self) -> bool:
        """Whether the gradient stands alone."""
        return self.gradient is not None and self.bias is None and self.curvature is None

    @property
    def shaped(self) -> bool:
        """Whether the magnitude of the field changes in space, levitation apart."""
        return bool(self.gradient) or bool(self.curvature)

    @property
    def bend(self) -> float:
        """Distance across over which the bias and the gradient make the field turn; 0 without one of them. [m]"""
        return abs(self.bias / self.gradient) if self.bias and self.gradient else 0.0

    @property
    def reach(self) -> float:
        """Distance over which the expansion of the field means something. [m]

        At 2 B'/B'' along the axis the radial gradient of one direction is used up, and zeros of the field lie beyond,
        which real coils do not have.
        """
        return abs(2.0 * self.gradient / self.curvature) if self.gradient and self.curvature else np.inf

    @cached_property
    def slopes(self) -> Floats:
        """(3,) Derivative of each component of the field along its own axis, at the centre. [T/m]"""
        gradient = self.gradient or 0.0
        return as_floats(
            [-0.5 * gradient, -0.5 * gradient, gradient] if self.quadrupole else [gradient, -gradient, 0.0]
        )

    def zeros(self) -> tuple[Floats, ...]:
        """Points (3,) at which the field vanishes, near the centre: of a quadrupole, or on the axis of the other."""
        if not self.gradient:
            return ()
        if self.quadrupole:
            return (as_floats(self.centre),)
        bias, curvature = self.bias or 0.0, self.curvature or 0.0
        if curvature == 0.0 or bias * curvature > 0.0:
            return ()
        distance = math.sqrt(-2.0 * bias / curvature)
        along = (distance,) if distance == 0.0 else (-distance, distance)
        return tuple(as_floats(self.centre + z * as_floats(self.axis)) for z in along)

    def field(self, points: Floats) -> Floats:
        """(..., 3) Field at points (..., 3), in the directions of the laboratory, without levitation. [T]"""
        own, _, _ = self._own(np.asarray(points), order=0)
        field: Floats = own @ self.frame
        return field

    def jacobian(self, point: Floats) -> Floats:
        """(3, 3) Derivatives of the field [T/m] at a point, rows: components in the coils' frame."""
        _, jacobian, _ = self._own(np.asarray(point), order=1)
        assert jacobian is not None
        result: Floats = jacobian @ self.frame
        return result

    def magnitude_derivatives(self, points: Floats, order: int = 2) -> tuple[Floats, Floats | None, Floats | None]:
        """Magnitude of the field [T], its gradient and Hessian at points (..., 3), up to an order.

        At a zero of the field, where there is neither, both are 0.
        """
        field, jacobian, second = self._own(np.asarray(points), order)
        magnitude = np.sqrt(np.sum(field**2, axis=-1))
        if jacobian is None:
            return magnitude, None, None
        inverse = np.zeros(magnitude.shape)
        np.divide(1.0, magnitude, out=inverse, where=magnitude > 0.0)
        b = field * inverse[..., np.newaxis]
        own = np.einsum("...ki,...k->...i", jacobian, b)
        gradient = own @ self.frame
        if second is None:
            return magnitude, gradient, None
        curved = np.einsum("...ki,...kj->...ij", jacobian, jacobian) - own[..., :, np.newaxis] * own[..., np.newaxis, :]
        curved = curved * inverse[..., np.newaxis, np.newaxis] + np.einsum("...k,kij->...ij", b, second)
        hessian: Floats = self.frame.T @ curved @ self.frame
        return magnitude, gradient, hessian

    def _own(self, points: Floats, order: int) -> tuple[Floats, Floats | None, Floats | None]:
        """Field, derivatives and second derivatives (constant), all in the coils' frame."""
        r = (points - self.centre) @ self.frame.T
        x, y, z = r[..., 0], r[..., 1], r[..., 2]
        bias, curvature = self.bias or 0.0, self.curvature or 0.0
        field = self.slopes * r
        field[..., 0] -= 0.5 * curvature * x * z
        field[..., 1] -= 0.5 * curvature * y * z
        field[..., 2] += bias + 0.5 * curvature * (z * z - 0.5 * (x * x + y * y))
        if order == 0:
            return field, None, None
        jacobian = np.zeros((*r.shape, 3))
        jacobian[..., [0, 1, 2], [0, 1, 2]] = self.slopes
        jacobian[..., 0, 0] -= 0.5 * curvature * z
        jacobian[..., 1, 1] -= 0.5 * curvature * z
        jacobian[..., 2, 2] += curvature * z
        jacobian[..., 0, 2] -= 0.5 * curvature * x
        jacobian[..., 1, 2] -= 0.5 * curvature * y
        jacobian[..., 2, 0] -= 0.5 * curvature * x
        jacobian[..., 2, 1] -= 0.5 * curvature * y
        if order == 1:
            return field, jacobian, None
        second = np.zeros((3, 3, 3))
        second[0, 0, 2] = second[0, 2, 0] = second[1, 1, 2] = second[1, 2, 1] = -0.5 * curvature
        second[2, 0, 0] = second[2, 1, 1] = -0.5 * curvature
        second[2, 2, 2] = curvature
        return field, jacobian, second
