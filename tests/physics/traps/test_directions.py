"""Axes across a direction."""

from __future__ import annotations

import numpy as np
import pytest

from physics.checks import as_floats
from physics.traps.directions import frame_along, unit_vector, vector


@pytest.mark.parametrize(
    "direction", [(1, 0, 0), (0, 1, 0), (1, 2, 3), (0, 0, 1), (0, 0, -1), (1e-4, 0, 1), (-1, 2, -5)]
)
def test_the_axes_across_are_right_handed_and_vertical_is_the_one_nearest_z(direction: tuple[float, ...]) -> None:
    n = unit_vector("direction", direction)
    horizontal, vertical, axis = frame_along(n)
    assert axis == pytest.approx(n)
    assert np.cross(horizontal, vertical) == pytest.approx(n)
    assert np.linalg.norm(vertical) == pytest.approx(1.0)
    if n[0] or n[1]:
        # No vector across the direction comes closer to z.
        assert vertical[2] == pytest.approx(np.hypot(n[0], n[1]))
        assert horizontal[2] == pytest.approx(0.0, abs=1e-15)


def test_across_z_horizontal_is_x_and_vertical_is_y() -> None:
    assert frame_along(as_floats([0.0, 0.0, 1.0])) == pytest.approx(np.eye(3))


def test_a_horizontal_beam_has_its_vertical_axis_along_z() -> None:
    assert frame_along(as_floats([1.0, 0.0, 0.0])) == pytest.approx(np.array([[0, 1, 0], [0, 0, 1], [1, 0, 0]]))


def test_what_is_no_direction_is_refused() -> None:
    with pytest.raises(ValueError, match=r"^direction must not be zero in all three components"):
        unit_vector("direction", (0.0, 0.0, 0.0))
    with pytest.raises(ValueError, match=r"^focus must be three finite numbers, got \(1.0, 2.0\) m$"):
        vector("focus", (1.0, 2.0), "m")
    with pytest.raises(ValueError, match="three finite numbers"):
        vector("focus", (1.0, 2.0, np.inf), "m")
