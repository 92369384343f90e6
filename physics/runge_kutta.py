"""Ordinary differential equations of a few variables, by explicit steps of fifth order with control of the error.

For right-hand sides of some microseconds: a step of the library's integrators costs as much by itself as all seven
evaluations. The solution between steps is of fourth order.

Reference
---------
[1] J. R. Dormand and P. J. Prince, J. Comput. Appl. Math. 6, 19 (1980); E. Hairer, S. P. Norsett, G. Wanner, Solving
    Ordinary Differential Equations I (1993), section II.5 and II.6.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from physics.checks import Floats

_C = (0.0, 0.2, 0.3, 0.8, 8.0 / 9.0, 1.0, 1.0)
_A = np.zeros((7, 7))
_A[1, :1] = (1 / 5,)
_A[2, :2] = (3 / 40, 9 / 40)
_A[3, :3] = (44 / 45, -56 / 15, 32 / 9)
_A[4, :4] = (19372 / 6561, -25360 / 2187, 64448 / 6561, -212 / 729)
_A[5, :5] = (9017 / 3168, -355 / 33, 46732 / 5247, 49 / 176, -5103 / 18656)
_A[6, :6] = (35 / 384, 0.0, 500 / 1113, 125 / 192, -2187 / 6784, 11 / 84)
_ERROR = np.array((71 / 57600, 0.0, -71 / 16695, 71 / 1920, -17253 / 339200, 22 / 525, -1 / 40))
_DENSE = np.array(
    [
        (1.0, -8048581381 / 2820520608, 8663915743 / 2820520608, -12715105075 / 11282082432),
        (0.0, 0.0, 0.0, 0.0),
        (0.0, 131558114200 / 32700410799, -68118460800 / 10900136933, 87487479700 / 32700410799),
        (0.0, -1754552775 / 470086768, 14199869525 / 1410260304, -10690763975 / 1880347072),
        (0.0, 127303824393 / 49829197408, -318862633887 / 49829197408, 701980252875 / 199316789632),
        (0.0, -282668133 / 205662961, 2019193451 / 616988883, -1453857185 / 822651844),
        (0.0, 40617522 / 29380423, -110615467 / 29380423, 69997945 / 29380423),
    ]
)
_SAFETY, _SLOWEST, _FASTEST = 0.9, 0.2, 5.0


class OutOfRange(Exception):
    """The right-hand side has no value there; a shorter step may stay inside."""


Derivatives = Callable[[float, Floats], list[float]]


@dataclass(frozen=True, kw_only=True, eq=False)
class Step:
    """One accepted step, and the solution within it."""

    begin: float
    end: float
    start: Floats
    finish: Floats
    polynomial: Floats

    def at(self, time: float) -> Floats:
        """The variables at a time within the step."""
        x = (time - self.begin) / (self.end - self.begin)
        result: Floats = self.start + self.polynomial @ np.array((x, x * x, x**3, x**4))
        return result

    def crossing(self, function: Callable[[float, Floats], float]) -> float:
        """Time at which a function of the solution, positive at the begin, has fallen to zero or below: the late end of
        a bracket of 1e-9 of the step. False position, each end that stays twice counted half [1], and halving."""
        low, high = self.begin, self.end
        above, below = function(low, self.start), function(high, self.finish)
        side = 0
        for turn in range(100):
            if high - low <= 1e-9 * (self.end - self.begin):
                break
            middle = 0.5 * (low + high)
            if turn % 4 != 3 and above > below:
                middle = low + (high - low) * above / (above - below)
                # A little beyond the zero, so that the late end comes close to it too.
                middle = min(middle + 2e-10 * (self.end - self.begin), 0.5 * (middle + high))
            if not low < middle < high:
                break
            value = function(middle, self.at(middle))
            if value > 0.0:
                low, above = middle, value
                below = 0.5 * below if side == 1 else below
                side = 1
            else:
                high, below = middle, value
                above = 0.5 * above if side == -1 else above
                side = -1
        return high


@dataclass(kw_only=True, eq=False)
class Integrator:
    """Steps through a stretch of time.

    Attributes
    ----------
    derivatives : of time and variables; may raise OutOfRange.
    tolerance : float. Error of a step, of each variable over its scale.
    scales : (n,) what counts as 1 in each variable.
    smallest : float. Steps below this are not taken: the solution ends where the derivatives leave their range.
    """

    derivatives: Derivatives
    tolerance: float
    scales: Floats
    smallest: float

    def __post_init__(self) -> None:
        self.step: float | None = None
        self._first: Floats | None = None

    def advance(self, time: float, values: Floats, end: float) -> Step | None:
        """The next step, at most to `end`; None where the derivatives have no value a smallest step ahead.

        A new stretch, where derivatives jump, needs `restart` before.
        """
        rates = np.empty((7, len(values)))
        if self._first is None:
            try:
                self._first = np.array(self.derivatives(time, values))
            except OutOfRange:
                return None
        rates[0] = self._first
        if self.step is None:
            speed = float(np.max(np.abs(rates[0]) / self.scales))
            self.step = min(end - time, 0.01 / speed if speed > 0.0 else end - time)
        while True:
            h = min(self.step, end - time)
            # No sliver is left over.
            finish = end if end - time - h < 0.01 * h else time + h
            h = finish - time
            try:
                for k in range(1, 7):
                    trial = values + h * (_A[k, :k] @ rates[:k])
                    rates[k] = self.derivatives(time + _C[k] * h, trial)
            except OutOfRange:
                self.step = 0.25 * h
                if self.step < self.smallest:
                    return None
                continue
            error = float(np.max(np.abs(h * (_ERROR @ rates)) / self.scales)) / self.tolerance
            factor = _FASTEST if error < 1e-8 else _SAFETY * error**-0.2
            self.step = h * min(max(factor, _SLOWEST), _FASTEST)
            if error <= 1.0 or h <= self.smallest:
                self._first = rates[6].copy()
                polynomial = h * (rates.T @ _DENSE)
                return Step(begin=time, end=finish, start=values, finish=trial, polynomial=polynomial)

    def restart(self) -> None:
        """Forget the derivatives at the end of the last step: they jump there."""
        self._first = None
