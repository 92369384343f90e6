"""Incomplete Bose and Fermi functions, against sums and integrals by mpmath."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest

from physics.held_densities import HeldBose, HeldFermi
from physics.statistics import bose, fermi


def held(v: float, top: float, order: float, sign: int) -> float:
    """(2/sqrt(pi)) integral from v to top of (E - v)^order/(e^E - sign) dE, with E = v + r^2."""
    ends = sorted({0.0, top - v, *(p for p in (1e-3, 0.1, 1.0, 5.0, 20.0, -v - 8.0, -v, 8.0 - v) if 0.0 < p < top - v)})
    roots = [mpmath.sqrt(end) for end in ends]
    return float(
        2
        / mpmath.sqrt(mpmath.pi)
        * mpmath.quad(lambda r: 2 * r ** (2 * order + 1) / (mpmath.exp(v + r * r) - sign), roots)
    )


@pytest.mark.parametrize("top", [0.5, 1.5, 5.0, 12.0])
@pytest.mark.parametrize("share", [0.02, 0.3, 0.8, 0.995, 0.9999])
def test_held_bosons(top: float, share: float) -> None:
    v, gas = share * top, HeldBose(top=np.array([top]))
    place = np.array([[v]])
    density, fall = gas.density_and_fall(place)
    # What is held of a gas near the top is what is left of a difference.
    assert density.item() == pytest.approx(held(v, top, 0.5, 1), rel=1e-6)
    assert gas.density(place).item() == density.item()
    assert fall.item() == pytest.approx(0.5 * held(v, top, -0.5, 1), rel=1e-6)
    assert gas.fall(place).item() == fall.item()
    assert gas.kinetic(place).item() == pytest.approx(held(v, top, 1.5, 1), rel=1e-6)


@pytest.mark.parametrize(("v", "top"), [(-3.0, 5.0), (1.0, 8.0), (-40.0, -3.0), (-2.0, 20.0), (-30.0, 40.0)])
def test_held_fermions(v: float, top: float) -> None:
    gas, place = HeldFermi(top=np.array([top])), np.array([[v]])
    density, fall = gas.density_and_fall(place)
    assert density.item() == pytest.approx(held(v, top, 0.5, -1), rel=1e-10)
    assert fall.item() == pytest.approx(0.5 * held(v, top, -0.5, -1), rel=1e-10)
    assert gas.kinetic(place).item() == pytest.approx(held(v, top, 1.5, -1), rel=1e-9)


def test_without_a_cut_the_functions_are_complete() -> None:
    v = np.array([[0.01, 0.4, 3.0, 15.0]])
    density, fall = HeldBose(top=np.array([60.0])).density_and_fall(v)
    np.testing.assert_allclose(density, bose(1.5, v), rtol=1e-13)
    np.testing.assert_allclose(fall, bose(0.5, v), rtol=1e-13)
    np.testing.assert_allclose(HeldFermi(top=np.array([60.0])).density(v), fermi(1.5, -v), rtol=3e-10)


@pytest.mark.parametrize(("eta", "density"), [(5.0, 2.594), (4.0, 2.566)])
def test_a_saturated_gas_that_is_cut_is_less_dense(eta: float, density: float) -> None:
    assert HeldBose(top=np.array([eta])).density(np.zeros((1, 1))).item() == pytest.approx(density, abs=5e-4)


def test_nothing_is_held_above_the_top() -> None:
    for gas in (HeldBose(top=np.array([2.0])), HeldFermi(top=np.array([2.0]))):
        assert gas.density(np.array([[2.0, 3.0]])).tolist() == [[0.0, 0.0]]
        assert gas.kinetic(np.array([[2.0, 3.0]])).tolist() == [[0.0, 0.0]]
