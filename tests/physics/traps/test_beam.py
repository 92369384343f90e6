"""Gaussian beams: power, widths, and what they refuse."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from physics.traps import GaussianBeam

ROUND: dict[str, Any] = {"name": "A", "wavelength": 1064e-9, "power": 2.5, "waists": 70e-6, "direction": (1, 0, 0)}


def test_intensity_across_the_beam_adds_up_to_the_power_at_any_distance(ellipse: dict[str, Any]) -> None:
    beam = GaussianBeam(**ellipse)
    x, weights = np.polynomial.hermite.hermgauss(20)
    for distance in (0.0, 3e-3, -2e-2):
        wu, wv = beam.widths(np.asarray(distance))
        u, v = np.meshgrid(x * wu / math.sqrt(2.0), x * wv / math.sqrt(2.0), indexing="ij")
        points = beam.focus + np.stack([u, v, np.full(u.shape, distance)], axis=-1) @ beam.frame
        flat = beam.intensity(points) * np.exp(x[:, np.newaxis] ** 2 + x**2)
        assert weights @ flat @ weights * wu * wv / 2.0 == pytest.approx(2.5, rel=1e-12)


def test_peak_intensity_and_rayleigh_lengths() -> None:
    beam = GaussianBeam(**ROUND)
    assert beam.intensity(np.zeros(3)) == pytest.approx(2.0 * 2.5 / (math.pi * 70e-6**2), rel=1e-14)
    assert beam.peak_intensity == pytest.approx(2.0 * 2.5 / (math.pi * 70e-6**2), rel=1e-14)
    # zR = pi w0^2/lambda = 14.47 mm.
    assert beam.rayleigh_lengths == pytest.approx([14.468e-3] * 2, rel=1e-4)
    at = np.array([beam.rayleigh_lengths[0], 0.0, 0.0])
    assert beam.intensity(at) == pytest.approx(0.5 * beam.peak_intensity, rel=1e-14)


def test_at_the_waist_the_intensity_is_down_by_e_squared_on_the_axis_it_belongs_to() -> None:
    beam = GaussianBeam(**{**ROUND, "waists": (100e-6, 30e-6)})
    horizontal, vertical = np.array([0.0, 100e-6, 0.0]), np.array([0.0, 0.0, 30e-6])
    for point in (horizontal, vertical):
        assert beam.intensity(point) == pytest.approx(math.exp(-2.0) * beam.peak_intensity, rel=1e-14)
        assert beam.scaled_radius(point) == pytest.approx(1.0, rel=1e-14)


def test_a_poor_beam_spreads_faster() -> None:
    assert GaussianBeam(**ROUND, m2=2.0).rayleigh_lengths == pytest.approx(GaussianBeam(**ROUND).rayleigh_lengths / 2.0)


def test_the_way_the_light_travels_does_not_matter(ellipse: dict[str, Any]) -> None:
    points = np.random.default_rng(1).normal(size=(20, 3)) * 1e-4
    back = {**ellipse, "direction": tuple(-x for x in ellipse["direction"])}
    assert GaussianBeam(**back).intensity(points) == pytest.approx(GaussianBeam(**ellipse).intensity(points), rel=1e-12)


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        ({"name": " "}, r"^beam name must not be empty$"),
        ({"wavelength": 0.0}, r"^wavelength of beam A must be positive and finite, got 0 m$"),
        ({"power": -1.0}, r"^power of beam A must be finite and not negative, got -1 W$"),
        ({"power": math.nan}, r"^power of beam A must be finite and not negative, got nan W$"),
        ({"waists": (1e-5, 2e-5, 3e-5)}, r"^waists of beam A must be one or two lengths"),
        ({"waists": (1e-5, -2e-5)}, r"^waist of beam A must be positive and finite, got -2e-05 m$"),
        ({"m2": 0.9}, r"^m2 of beam A must be 1 or more, got 0.9$"),
        ({"direction": (0, 0, 0)}, r"^direction of beam A must not be zero"),
        ({"focus": (0, 0)}, r"^focus of beam A must be three finite numbers"),
    ],
)
def test_impossible_beams_are_refused_in_one_sentence(change: dict[str, Any], sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        GaussianBeam(**{**ROUND, **change})
