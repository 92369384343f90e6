"""Steps for stiff equations: order, fast relaxation, the solution between steps, the edge of the range."""

from __future__ import annotations

import math

import numpy as np
import pytest

from physics.checks import Floats
from physics.rosenbrock import StiffIntegrator
from physics.runge_kutta import OutOfRange, Step


def follow(integrator: StiffIntegrator, start: list[float], end: float, step: float | None = None) -> list[Step]:
    time, values, steps = 0.0, np.array(start), []
    while time < end:
        if step is not None:
            integrator.step = step
        taken = integrator.advance(time, values, end)
        if taken is None:
            break
        steps.append(taken)
        time, values = taken.end, taken.finish
    return steps


def curved(time: float, values: Floats) -> list[float]:
    """Has the solution cos t when it starts at 1."""
    return [-20.0 * (values[0] ** 2 - math.cos(time) ** 2) - math.sin(time), values[0]]


def solver(tolerance: float, shifts: dict[int, float] | None = None) -> StiffIntegrator:
    return StiffIntegrator(
        derivatives=curved, shifts=shifts or {0: 1e-7}, tolerance=tolerance, scales=np.ones(2), smallest=1e-12
    )


def test_the_error_falls_with_the_fourth_power_of_the_step() -> None:
    ends = [follow(solver(1e9), [1.0, 0.0], 1.0, h)[-1].finish for h in (1 / 8, 1 / 16, 1 / 32)]
    errors = [np.abs(end - [math.cos(1.0), math.sin(1.0)]) for end in ends]
    assert np.all(errors[0] / errors[1] > 12.0)
    assert np.all(errors[1] / errors[2] > 12.0)


@pytest.mark.parametrize("rate", [3.0, 1e3, 1e7])
def test_fast_relaxation_does_not_cost_steps(rate: float) -> None:
    # y' = -rate (y - cos t) - sin t from 1.5: cos t + e^(-rate t)/2.
    integrator = StiffIntegrator(
        derivatives=lambda t, y: [-rate * (y[0] - math.cos(t)) - math.sin(t), y[0]],
        shifts={0: 1e-6},
        tolerance=1e-6,
        scales=np.ones(2),
        smallest=1e-12,
    )
    steps = follow(integrator, [1.5, 0.0], 5.0)
    # Explicit steps would be as many as rate x time; most are needed where a step is about as long as 1/rate.
    assert len(steps) < 400
    exact = math.cos(5.0) + 0.5 * math.exp(-5.0 * rate)
    assert steps[-1].finish[0] == pytest.approx(exact, abs=2e-6)
    assert steps[-1].finish[1] == pytest.approx(math.sin(5.0) + 0.5 / rate * (1.0 - math.exp(-5.0 * rate)), abs=2e-6)


def test_the_solution_between_steps() -> None:
    steps = follow(solver(1e-7), [1.0, 0.0], 2.0)
    for step in steps:
        for share in (0.0, 0.3, 0.7, 1.0):
            time = step.begin + share * (step.end - step.begin)
            assert step.at(time) == pytest.approx([math.cos(time), math.sin(time)], abs=1e-5)


def test_it_ends_where_the_derivatives_leave_their_range() -> None:
    def until_one(time: float, values: Floats) -> list[float]:
        if values[0] > 1.0:
            raise OutOfRange
        return [1.0, 0.0]

    integrator = StiffIntegrator(
        derivatives=until_one, shifts={0: -1e-6}, tolerance=1e-7, scales=np.ones(2), smallest=1e-6
    )
    steps = follow(integrator, [0.0, 0.0], 5.0)
    assert steps[-1].end == pytest.approx(1.0, abs=1e-4)
