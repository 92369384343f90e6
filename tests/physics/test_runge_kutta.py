"""Integration of ordinary differential equations: an orbit, order of the error, events, ends of the range."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from physics.checks import Floats
from physics.runge_kutta import Integrator, OutOfRange, Step


def steps(integrator: Integrator, values: list[float], end: float) -> list[Step]:
    found: list[Step] = []
    time, here = 0.0, np.array(values)
    while time < end:
        step = integrator.advance(time, here, end)
        if step is None:
            break
        found.append(step)
        time, here = step.end, step.finish
    return found


def pendulum(time: float, y: Floats) -> list[float]:
    return [float(y[1]), -math.sin(float(y[0])) - 0.1 * float(y[1])]


def test_a_damped_pendulum_goes_as_the_library_has_it() -> None:
    integrator = Integrator(derivatives=pendulum, tolerance=1e-9, scales=np.ones(2), smallest=1e-9)
    found = steps(integrator, [2.0, 0.0], 20.0)
    exact = solve_ivp(pendulum, (0.0, 20.0), [2.0, 0.0], method="DOP853", rtol=1e-12, atol=1e-12, dense_output=True)
    assert found[-1].end == 20.0
    np.testing.assert_allclose(found[-1].finish, exact.y[:, -1], atol=2e-7)
    for step in found[:: len(found) // 7]:
        middle = 0.5 * (step.begin + step.end)
        np.testing.assert_allclose(step.at(middle), exact.sol(middle), atol=2e-7)
        np.testing.assert_allclose(step.at(step.end), step.finish, atol=1e-13)


def test_the_error_falls_with_the_tolerance_at_fifth_order() -> None:
    counts, errors = [], []
    for tolerance in (1e-5, 1e-10):
        integrator = Integrator(
            derivatives=lambda t, y: [float(y[0]) * math.cos(t)], tolerance=tolerance, scales=np.ones(1), smallest=1e-9
        )
        found = steps(integrator, [1.0], 10.0)
        counts.append(len(found))
        errors.append(abs(float(found[-1].finish[0]) - math.exp(math.sin(10.0))))
    assert errors[1] < 1e-4 * errors[0]
    # Ten times the steps would be a tolerance 1e5 times smaller at fifth order.
    assert 5.0 < counts[1] / counts[0] < 14.0


def test_a_crossing_is_found_within_its_step() -> None:
    integrator = Integrator(derivatives=lambda t, y: [-float(y[0])], tolerance=1e-10, scales=np.ones(1), smallest=1e-9)
    for step in steps(integrator, [1.0], 5.0):
        if step.finish[0] < 0.1:
            found = step.crossing(lambda t, y: float(y[0]) - 0.1)
            assert found == pytest.approx(math.log(10.0), abs=1e-8)
            return
    pytest.fail("never crossed")


def test_the_solution_ends_where_the_right_hand_side_does() -> None:
    def falling(time: float, y: Floats) -> list[float]:
        if y[0] <= 0.0:
            raise OutOfRange
        return [-1.0 / float(y[0])]

    integrator = Integrator(derivatives=falling, tolerance=1e-8, scales=np.ones(1), smallest=1e-9)
    found = steps(integrator, [1.0], 5.0)
    # y = sqrt(1 - 2t) ends at 1/2.
    assert found[-1].end == pytest.approx(0.5, abs=1e-6)


def test_a_range_left_at_once_gives_no_step() -> None:
    def nowhere(time: float, y: Floats) -> list[float]:
        raise OutOfRange

    integrator = Integrator(derivatives=nowhere, tolerance=1e-8, scales=np.ones(1), smallest=1e-9)
    assert integrator.advance(0.0, np.ones(1), 1.0) is None
