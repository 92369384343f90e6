"""Stiff ordinary differential equations of a few variables, by linearly implicit steps of fourth order.

Two clouds in close contact come to one temperature in a time that can be a millionth of a ramp's: explicit steps would
have to follow it all along. The steps here are those of `physics.runge_kutta`, with a solution of third order between.

Reference
---------
[1] E. Hairer, G. Wanner, Solving Ordinary Differential Equations II (1996), section IV.7: the stiffly accurate method
    of six stages called RODAS. Coefficients recalled; the tests find its order and its limit of fast relaxation.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from physics.checks import Floats
from physics.runge_kutta import Derivatives, OutOfRange, Step

_GAMMA = 0.25
_TIMES = (0.0, 0.386, 0.21, 0.63, 1.0, 1.0)
_TIME_SLOPES = (0.25, -0.1043, 0.1035, -0.0362, 0.0, 0.0)
_A = (
    (),
    (1.544,),
    (0.9466785280815826, 0.2557011698983284),
    (3.314825187068521, 2.896124015972201, 0.9986419139977817),
    (1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950),
    (1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950, 1.0),
)
_C = (
    (),
    (-5.6688,),
    (-2.430093356833875, -0.2063599157091915),
    (-0.1073529058151375, -9.594562251023355, -20.47028614809616),
    (7.496443313967647, -10.24680431464352, -33.99990352819905, 11.70890893206160),
    (8.083246795921522, -7.981132988064893, -31.52159432874371, 16.31930543123136, -6.058818238834054),
)
_DENSE = np.array(
    (
        (10.12623508344586, -7.487995877610167, -34.80091861555747, -7.992771707568823, 1.025137723295662, 0.0),
        (-0.6762803392801253, 6.087714651680015, 16.43084320892478, 24.76722511418386, -6.594389125716872, 0.0),
    )
)
_SAFETY, _SLOWEST, _FASTEST = 0.9, 0.2, 5.0


@dataclass(kw_only=True, eq=False)
class StiffIntegrator:
    """Steps through a stretch of time; for right-hand sides that depend on only some of the variables.

    Attributes
    ----------
    derivatives : of time and variables; may raise OutOfRange.
    shifts : by the index of each variable that the derivatives depend on, the change by which their slopes are taken,
        towards where there are derivatives.
    tolerance, scales, smallest : as of `physics.runge_kutta.Integrator`.
    """

    derivatives: Derivatives
    shifts: dict[int, float]
    tolerance: float
    scales: Floats
    smallest: float

    def __post_init__(self) -> None:
        self.step: float | None = None
        self._active = list(self.shifts)

    def advance(self, time: float, values: Floats, end: float) -> Step | None:
        """The next step, at most to `end`; None where the derivatives have no value a smallest step ahead."""
        try:
            first = np.array(self.derivatives(time, values))
            slopes = self._slopes(time, values, first)
        except OutOfRange:
            return None
        if self.step is None:
            speed = float(np.max(np.abs(first) / self.scales))
            self.step = min(end - time, 0.01 / speed if speed > 0.0 else end - time)
        while True:
            h = min(self.step, end - time)
            finish = end if end - time - h < 0.01 * h else time + h
            h = finish - time
            try:
                u, result = self._stages(time, values, first, slopes, h)
            except OutOfRange:
                self.step = 0.25 * h
                if self.step < self.smallest:
                    return None
                continue
            error = float(np.max(np.abs(u[5]) / self.scales)) / self.tolerance
            factor = _FASTEST if error < 1e-8 else _SAFETY * error**-0.25
            self.step = h * min(max(factor, _SLOWEST), _FASTEST)
            if error <= 1.0 or h <= self.smallest:
                third, fourth = _DENSE @ u
                polynomial = np.stack([result - values + third, fourth - third, -fourth, np.zeros_like(values)], axis=1)
                return Step(begin=time, end=finish, start=values, finish=result, polynomial=polynomial)

    def _slopes(self, time: float, values: Floats, first: Floats) -> Floats:
        """Derivatives of the right-hand side with respect to the variables that count, in columns."""
        columns = []
        for index, shift in self.shifts.items():
            moved = values.copy()
            moved[index] += shift
            columns.append((np.array(self.derivatives(time, moved)) - first) / shift)
        return np.stack(columns, axis=1)

    def _stages(self, time: float, values: Floats, first: Floats, slopes: Floats, h: float) -> tuple[Floats, Floats]:
        """The six stages, and the result."""
        active, g = self._active, _GAMMA * h
        inverse = np.linalg.inv(np.eye(len(active)) / g - slopes[active])
        shift = 1e-7 * h
        in_time = h * (np.array(self.derivatives(time + shift, values)) - first) / shift
        u = np.zeros((6, len(values)))
        trial = values
        for k in range(6):
            if k > 0:
                trial = values + np.array(_A[k]) @ u[:k]
            right = first if k == 0 else np.array(self.derivatives(time + _TIMES[k] * h, trial))
            right = right + _TIME_SLOPES[k] * in_time
            if k > 0:
                right = right + np.array(_C[k]) @ u[:k] / h
            solved = inverse @ right[active]
            u[k] = g * (right + slopes @ solved)
            u[k, active] = solved
        return u, trial + u[5]
