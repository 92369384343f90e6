"""Cut clouds in traps of any volume curve: power laws give the closed forms, others a direct sum over phase space."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from scipy.integrate import quad

from physics import truncated_boltzmann as cut
from physics.curve_shape import CurveShape
from physics.truncated_averages import relative_number, truncated_averages

ETA = np.geomspace(0.05, 1900.0, 60)


@pytest.mark.parametrize("exponent", [1.0, cut.HARMONIC, 2.2, cut.QUADRUPOLE])
@pytest.mark.parametrize("tabulated", [False, True])
def test_power_laws_give_the_closed_forms(exponent: float, tabulated: bool) -> None:
    curve = CurveShape(exponent=exponent)
    if tabulated:
        u = np.geomspace(1e-4, 1.0, 40)
        curve = CurveShape(energies=u, volumes=u**exponent, exponent=exponent)
    found = truncated_averages(curve, ETA)
    number = math.gamma(exponent + 1.0) * ETA**-exponent * cut.reduced_number(exponent, ETA)
    np.testing.assert_allclose(found.number, number, rtol=1e-9)
    np.testing.assert_allclose(found.energy, cut.mean_energy(exponent, ETA), rtol=1e-9)
    np.testing.assert_allclose(found.heat_capacity, cut.heat_capacity(exponent, ETA), rtol=1e-8)
    np.testing.assert_allclose(found.evaporation, cut.evaporation_volume(exponent, ETA), rtol=1e-9)
    np.testing.assert_allclose(found.excess, cut.excess_energy(exponent, ETA), rtol=1e-8)
    np.testing.assert_allclose(found.spilling, cut.spilled_share(exponent, ETA), rtol=1e-9, atol=1e-300)
    np.testing.assert_allclose(relative_number(curve, ETA), number, rtol=1e-9)
    assert curve.highest_energy == pytest.approx(cut.highest_energy(exponent), rel=1e-10)


@pytest.mark.parametrize("exponent", [cut.HARMONIC, cut.QUADRUPOLE])
def test_losses_of_an_uncut_cloud_take_cold_atoms(exponent: float) -> None:
    # n ~ e^(-U/kT): <n> = n(0)/2^d and <n^2> = n(0)^2/3^d, with d/2 and d/3 kT of potential energy where atoms meet:
    # 9/4 and 2 kT in a harmonic trap.
    found = truncated_averages(CurveShape(exponent=exponent), 200.0)
    assert float(found.pair) == pytest.approx(2.0**-exponent, rel=1e-10)
    assert float(found.triple) == pytest.approx(3.0**-exponent, rel=1e-10)
    assert float(found.pair_energy) == pytest.approx(1.5 + exponent / 2.0, rel=1e-10)
    assert float(found.triple_energy) == pytest.approx(1.5 + exponent / 3.0, rel=1e-10)


def dimple(u: np.ndarray) -> np.ndarray:
    """A harmonic trap with an arm that opens at half of the depth."""
    return 0.3 * u**1.5 + 0.7 * u**6


@pytest.mark.parametrize("limit", [1.0, 0.62])
def test_where_arms_open_the_quadrature_is_exact(limit: float) -> None:
    # Between its points the curve is one cubic, summed here piece by piece.
    u = np.concatenate([np.geomspace(1e-4, 1.0 / 128.0, 32)[:-1], np.arange(1, 129) / 128.0])
    w = u**1.5 * (1.0 + 3.0 * (u > 0.54) + 20.0 * np.maximum(u - 0.54, 0.0))
    curve = CurveShape(energies=u, volumes=w / w[-1])
    at, dw = curve.measure_below(limit)
    assert float(np.sum(dw)) == pytest.approx(float(curve.volume(limit)), rel=1e-6)
    pieces = list(pairwise([0.0, *u[u < limit], limit]))

    def filled(v: Any, eta: float) -> Any:
        return np.exp(-eta * v) * (limit - v) ** 1.5

    for eta in (0.5, 6.0, 11.0):
        each = [
            quad(lambda v, eta=eta: float(curve.slope(v)) * filled(v, eta), *piece, epsrel=1e-10) for piece in pieces
        ]
        found = float(np.sum(dw * filled(at, eta)))
        assert found == pytest.approx(math.fsum(value for value, _ in each), rel=1e-6), eta


@pytest.mark.parametrize("eta", [0.8, 4.0, 9.0])
def test_any_curve_gives_the_sum_over_phase_space(eta: float) -> None:
    u = np.concatenate([np.geomspace(1e-5, 0.05, 40), np.linspace(0.055, 1.0, 160)])
    found = truncated_averages(CurveShape(energies=u, volumes=dimple(u)), eta)

    def over(function) -> float:  # type: ignore[no-untyped-def]
        """Integral over dW."""
        density = lambda v: (0.45 * math.sqrt(v) + 4.2 * v**5) * function(v)  # noqa: E731
        return float(quad(density, 0.0, 1.0, epsabs=0.0, epsrel=1e-11, limit=200)[0])

    def levels(energy: float) -> float:
        """Levels below an energy, over 4 pi/3 (2m)^(3/2)/h^3 and W e_t^(3/2)."""
        upper = lambda v: (0.45 * math.sqrt(v) + 4.2 * v**5) * (energy - v) ** 1.5  # noqa: E731
        return float(quad(upper, 0.0, energy, epsabs=0.0, epsrel=1e-9, limit=200)[0])

    # n_ref e^(-U/kT) P(3/2, ...); in terms of the levels S(e): N = S(e_t) e^-eta + int S e^(-e/kT) de/kT.
    unit = 4.0 / (3.0 * math.sqrt(math.pi)) * eta**1.5
    x = np.polynomial.legendre.leggauss(40)
    grid, weights = 0.5 * (x[0] + 1.0), 0.5 * x[1]
    S = np.array([levels(float(e)) for e in grid])
    number = unit * (levels(1.0) * math.exp(-eta) + eta * float(np.sum(weights * S * np.exp(-eta * grid))))
    assert float(found.number) == pytest.approx(number, rel=2e-6)
    evaporated = unit * eta * float(np.sum(weights * S * eta * (1.0 - grid) * np.exp(-eta * grid)))
    assert float(found.evaporation) == pytest.approx(evaporated / number, rel=2e-6)
    taken = unit * eta * float(np.sum(weights * S * (np.exp(-eta * grid) - math.exp(-eta))))
    assert float(found.excess) == pytest.approx(1.0 - taken / evaporated, rel=2e-5)
    density = lambda v: math.exp(-eta * v) * float(cut.incomplete_gamma(1.5, eta * (1.0 - v)))  # noqa: E731
    assert float(found.pair) == pytest.approx(over(lambda v: density(v) ** 2) / number, rel=1e-5)
    assert float(found.triple) == pytest.approx(over(lambda v: density(v) ** 3) / number, rel=1e-5)


def test_a_curve_is_read_back_from_its_volumes() -> None:
    u = np.geomspace(1e-4, 1.0, 80)
    curve = CurveShape(energies=u, volumes=dimple(u))
    asked = np.array([1e-6, 1e-3, 0.2, 0.77, 1.0])
    np.testing.assert_allclose(curve.energy(curve.volume(asked)), asked, rtol=1e-9)
    np.testing.assert_allclose(curve.volume(asked[1:]), dimple(asked[1:]), rtol=1e-5)
    assert CurveShape().energy(np.asarray(0.125)) == pytest.approx(0.25)


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        ({"exponent": 0.0}, r"^exponent of a volume curve must be positive and finite, got 0$"),
        ({"energies": [0.5, 1.0]}, r"^a volume curve needs energies and volumes, got only one of them$"),
        ({"energies": [0.5, 1.0], "volumes": [1.0]}, r"^energies and volumes must be lists of one length"),
        ({"energies": [0.5, 0.9], "volumes": [0.3, 1.0]}, r"^energies of a volume curve must end at 1, at the depth"),
        ({"energies": [0.5, 1.0], "volumes": [1.0, 1.0]}, r"^volumes of a volume curve must increase$"),
        ({"energies": [0.0, 1.0], "volumes": [0.5, 1.0]}, r"^energy of a volume curve must be positive"),
    ],
)
def test_curves_that_cannot_be_are_refused_in_a_sentence(given: dict[str, object], sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        CurveShape(**given)  # type: ignore[arg-type]
