"""Normal modes: frequencies, and axes in the order of the laboratory's."""

from __future__ import annotations

import math

import numpy as np
import pytest

from physics.traps.modes import modes_of

MASS = 1.4e-25


def curvature(frequencies: tuple[float, float, float], axes: np.ndarray) -> np.ndarray:
    return axes.T @ np.diag(MASS * (2.0 * math.pi * np.array(frequencies)) ** 2) @ axes


def turn(angle: float) -> np.ndarray:
    """About z."""
    c, s = math.cos(angle), math.sin(angle)
    return np.array([[c, s, 0.0], [-s, c, 0.0], [0.0, 0.0, 1.0]])


@pytest.mark.parametrize("frequencies", [(120.0, 20.0, 300.0), (10.0, 20.0, 5.0)])
def test_frequencies_come_in_the_order_of_the_axes_nearest_to_x_y_and_z(
    frequencies: tuple[float, float, float],
) -> None:
    modes = modes_of(curvature(frequencies, turn(0.5)), MASS)
    assert modes is not None
    assert modes.frequencies == pytest.approx(frequencies, rel=1e-12)
    assert modes.axes == pytest.approx(turn(0.5), abs=1e-12)


def test_past_half_a_right_angle_they_change_places() -> None:
    modes = modes_of(curvature((120.0, 20.0, 300.0), turn(1.0)), MASS)
    assert modes is not None
    assert modes.frequencies == pytest.approx((20.0, 120.0, 300.0), rel=1e-12)


def test_axes_of_equal_frequencies_lie_along_the_laboratory_ones() -> None:
    modes = modes_of(curvature((100.0, 100.0, 300.0), turn(0.3)), MASS)
    assert modes is not None
    assert modes.axes == pytest.approx(np.eye(3), abs=1e-12)
    modes = modes_of(curvature((100.0, 100.0, 100.0), turn(0.3)), MASS)
    assert modes is not None
    assert modes.axes == pytest.approx(np.eye(3), abs=1e-12)


def test_a_flat_direction_has_no_modes() -> None:
    assert modes_of(curvature((100.0, 0.0, 300.0), turn(0.3)), MASS) is None
    assert modes_of(-curvature((100.0, 10.0, 300.0), turn(0.3)), MASS) is None
