"""Fields of coils: free of sources and currents, and shaped as their names say."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from physics.traps import Coils

IOFFE = Coils(bias=1.2e-4, gradient=1.5, curvature=90.0, axis=(1.0, 2.0, 0.5), centre=(1e-4, 0.0, 2e-4))
QUADRUPOLE = Coils(gradient=2.0, axis=(1.0, 1.0, 3.0))


@pytest.mark.parametrize("coils", [IOFFE, QUADRUPOLE, Coils(bias=1e-4, curvature=50.0)])
def test_fields_have_neither_sources_nor_curls(coils: Coils) -> None:
    point, step = np.array([1e-3, -2e-3, 5e-4]), 1e-6
    slopes = np.stack(
        [(coils.field(point + step * e) - coils.field(point - step * e)) / (2.0 * step) for e in np.eye(3)], axis=1
    )
    assert np.trace(slopes) == pytest.approx(0.0, abs=1e-9 * np.max(np.abs(slopes)))
    assert slopes == pytest.approx(slopes.T, abs=1e-9 * np.max(np.abs(slopes)))


def test_a_gradient_alone_is_strong_along_the_axis() -> None:
    axis = np.array([1.0, 1.0, 3.0]) / math.sqrt(11.0)
    across = np.array([1.0, -1.0, 0.0]) / math.sqrt(2.0)
    along, aside = (QUADRUPOLE.magnitude_derivatives(1e-3 * n, 0)[0] for n in (axis, across))
    assert along == pytest.approx(2e-3, rel=1e-12)
    assert aside == pytest.approx(1e-3, rel=1e-12)


def test_the_field_on_the_axis_is_bias_and_curvature() -> None:
    axis = np.asarray(IOFFE.axis)
    at = IOFFE.centre + 2e-3 * axis
    assert IOFFE.field(at) == pytest.approx((1.2e-4 + 45.0 * 4e-6) * axis, rel=1e-12)


def test_zeros_of_the_field() -> None:
    assert QUADRUPOLE.zeros()[0] == pytest.approx(np.zeros(3))
    assert IOFFE.zeros() == ()
    reversed_bias = Coils(bias=-1e-4, gradient=1.5, curvature=50.0)
    assert len(reversed_bias.zeros()) == 2
    for zero in reversed_bias.zeros():
        assert np.linalg.norm(reversed_bias.field(zero)) < 1e-18
    assert len(Coils(bias=0.0, gradient=1.5, curvature=50.0).zeros()) == 1
    assert Coils(bias=1e-4, gradient=1.5).zeros() == ()


def test_a_bias_that_is_given_as_zero_is_still_that_of_a_guide() -> None:
    assert Coils(gradient=1.0).quadrupole
    assert not Coils(gradient=1.0, bias=0.0).quadrupole


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        ({}, r"^coils need at least one of bias, gradient, curvature, levitation, got none$"),
        ({"knife": 1e6}, r"^coils need at least one of"),
        ({"bias": math.inf}, r"^bias of the coils must be finite, got inf T$"),
        ({"curvature": math.nan}, r"^curvature of the coils must be finite, got nan T/m\^2$"),
        ({"bias": 1e-4, "knife": 0.0}, r"^knife must be a positive and finite frequency, got 0 Hz$"),
        ({"bias": 1e-4, "axis": (0, 0, 0)}, r"^axis of the coils must not be zero"),
        ({"bias": 1e-4, "centre": (0, 0)}, r"^centre of the coils must be three finite numbers"),
    ],
)
def test_impossible_coils_are_refused_in_one_sentence(given: dict[str, Any], sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        Coils(**given)
