"""Clouds that are handed at once between traps of beams and coils, place by place."""

from __future__ import annotations

import math
import pickle
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from scipy.special import gammainc

from physics.constants import boltzmann
from physics.light import polarizability
from physics.species import load_species
from physics.surveyed_path import point_of
from physics.transfer import sudden_transfer
from physics.trap_path import TrapPoint
from physics.traps.beam import GaussianBeam
from physics.traps.coils import Coils
from physics.traps.survey import survey
from physics.traps.trap import Gravity, Trap
from physics.truncated_averages import truncated_averages

RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
FORCES = ((2.5, 70e-6, 0), (1.7, 55e-6, 1))
"""Power, waist and axis of each beam."""


def crossed(*focus: float, angle: float = 0.0, power: float = 1.0) -> Trap:
    """Two beams across each other, turned about the vertical."""
    ways = ((math.cos(angle), math.sin(angle), 0.0), (-math.sin(angle), math.cos(angle), 0.0))
    return Trap(
        beams=tuple(
            GaussianBeam(
                name="AB"[k], wavelength=1064e-9, power=power * P, waists=w, direction=ways[k], focus=focus or (0, 0, 0)
            )
            for k, (P, w, _) in enumerate(FORCES)
        )
    )


def point(trap: Trap) -> TrapPoint:
    return point_of(survey(trap, RUBIDIUM))


@pytest.fixture(scope="module")
def here() -> TrapPoint:
    return point(crossed())


def temperature_of(trap: TrapPoint, eta: float) -> float:
    assert trap.depth is not None
    return trap.depth / boltzmann / eta


@pytest.mark.parametrize("eta", [3.0, 8.0, 20.0])
def test_the_same_trap_changes_nothing(here: TrapPoint, eta: float) -> None:
    T = temperature_of(here, eta)
    found = sudden_transfer(T, here, pickle.loads(pickle.dumps(here)))
    assert found.share == pytest.approx(1.0, abs=1e-12)
    mean = float(truncated_averages(here.curve, eta).energy)
    assert found.energy == pytest.approx(mean * boltzmann * T, rel=1e-12)


def energy_by_hand(r: Any, shift: Any) -> Any:
    """Light and gravity of the crossed beams, moved."""
    alpha, mass = polarizability(RUBIDIUM.isotope, 1064e-9).value, RUBIDIUM.mass
    assert alpha is not None
    d = r - shift
    total = mass * 9.80665 * r[:, 2]
    for P, w, axis in FORCES:
        square = w**2 * (1.0 + (d[:, axis] * 1064e-9 / (math.pi * w**2)) ** 2)
        across = d[:, 1 - axis] ** 2 + d[:, 2] ** 2
        total -= (
            alpha / (2 * 8.8541878188e-12 * 299792458.0) * 2 * P / (math.pi * square) * np.exp(-2 * across / square)
        )
    return total


@pytest.mark.parametrize(
    ("eta", "shift"), [(10.0, (5e-6, 0.0, 0.0)), (10.0, (2e-5, 1e-5, -5e-6)), (16.0, (0.0, 0.0, 2.5e-5))]
)
def test_a_drawn_sample_is_caught_as_often_by_displaced_beams(here: TrapPoint, eta: float, shift: Any) -> None:
    # Importance sampling of places: a core, and two tubes that follow the beams' widths; momenta by P(3/2, .).
    rng, n, spread = np.random.default_rng(3), 400_000, 1.5e-4
    T, bottom = temperature_of(here, eta), np.array(here.minimum)
    kT, lowest = boltzmann * T, energy_by_hand(np.array([here.minimum]), 0.0)[0]
    assert here.frequencies is not None
    size = 1.5 * np.sqrt(kT / RUBIDIUM.mass) / (2.0 * math.pi * np.array(here.frequencies))
    r = bottom + rng.normal(size=(n, 3)) * size
    which = rng.integers(0, 3, n)
    for k, (_, w, axis) in enumerate(FORCES):
        these = which == k
        along = rng.standard_cauchy(int(np.sum(these))) * spread
        width = 0.45 * w * np.sqrt(1.0 + (along * 1064e-9 / (math.pi * w**2)) ** 2)
        r[these] = bottom + rng.normal(size=(len(along), 3)) * width[:, np.newaxis]
        r[these, axis] = along
    drawn = np.prod(np.exp(-0.5 * ((r - bottom) / size) ** 2) / (math.sqrt(2.0 * math.pi) * size), axis=1)
    for _, w, axis in FORCES:
        width = 0.45 * w * np.sqrt(1.0 + (r[:, axis] * 1064e-9 / (math.pi * w**2)) ** 2)
        square = ((r[:, 1 - axis] - bottom[1 - axis]) ** 2 + (r[:, 2] - bottom[2]) ** 2) / width**2
        cauchy = 1.0 / (math.pi * spread * (1.0 + (r[:, axis] / spread) ** 2))
        drawn += cauchy * np.exp(-0.5 * square) / (2.0 * math.pi * width**2)
    away = np.array(shift)
    u = (energy_by_hand(r, 0.0) - lowest) / kT
    v = (energy_by_hand(r, away) - lowest - RUBIDIUM.mass * 9.80665 * away[2]) / kT
    # Gravity takes atoms down over an edge about 1.4 waists below.
    filled = np.where(r[:, 2] > -1e-4, np.maximum(eta - u, 0.0), 0.0)
    kept = np.minimum(filled, np.where(r[:, 2] - away[2] > -1e-4, np.maximum(eta - v, 0.0), 0.0))
    weights = np.where(filled > 0.0, np.exp(-np.minimum(u, eta)) / drawn, 0.0)
    before, after = weights * gammainc(1.5, filled), weights * gammainc(1.5, kept)
    share = np.sum(after) / np.sum(before)
    energies = weights * (np.where(kept > 0.0, v, 0.0) * gammainc(1.5, kept) + 1.5 * gammainc(2.5, kept))
    energy = np.sum(energies) / np.sum(after)
    error = math.sqrt(np.sum((after - share * before) ** 2)) / np.sum(before)
    energy_error = math.sqrt(np.sum((energies - energy * after) ** 2)) / np.sum(after)
    assert error < 0.003
    found = sudden_transfer(T, here, point(crossed(*shift)))
    # Volumes in the arms are counted to about a percent.
    assert found.share == pytest.approx(share, abs=3.0 * error + 0.002)
    assert found.energy / kT == pytest.approx(energy, abs=3.0 * energy_error + 0.004 * energy)


def test_turning_the_whole_set_up_changes_nothing(here: TrapPoint) -> None:
    T = temperature_of(here, 9.0)
    found = sudden_transfer(T, here, point(crossed(1.5e-5, 5e-6, -5e-6, power=0.8)))
    c, s = math.cos(0.6), math.sin(0.6)
    there = point(crossed(1.5e-5 * c - 5e-6 * s, 1.5e-5 * s + 5e-6 * c, -5e-6, angle=0.6, power=0.8))
    turned = sudden_transfer(T, point(crossed(angle=0.6)), there)
    assert turned.share == pytest.approx(found.share, rel=1e-6)
    assert turned.energy == pytest.approx(found.energy, rel=1e-6)


def test_a_small_cold_cloud_gains_the_energy_of_the_way() -> None:
    # Deep in the light, without gravity: m w^2 d^2/2 an atom, along each axis of other beams that cross it.
    free = replace(crossed(), gravity=None)
    old = point(free)
    T = temperature_of(old, 2000.0)
    shift = (4e-7, -2e-7, 3e-7)
    new = point(replace(crossed(*shift, power=1.3), gravity=None))
    found = sudden_transfer(T, old, new)
    assert old.frequencies is not None
    assert new.frequencies is not None
    kT = boltzmann * T
    pairs = zip(old.frequencies, new.frequencies, shift, strict=True)
    energy = 1.5 * kT + sum(
        0.5 * kT * (b / a) ** 2 + 0.5 * RUBIDIUM.mass * (2 * math.pi * b * d) ** 2 for a, b, d in pairs
    )
    assert found.share == pytest.approx(1.0, abs=1e-6)
    assert found.energy == pytest.approx(energy, rel=3e-3)


def test_a_trap_elsewhere_catches_nothing(here: TrapPoint) -> None:
    assert sudden_transfer(temperature_of(here, 8.0), here, point(crossed(0.0, 0.0, 1e-3))).share == 0.0


def test_a_quadrupole_hands_its_cloud_to_a_beam_below_its_zero() -> None:
    # The sag of the light's minimum, and the shape of both, count: a beam above the zero catches fewer.
    def caught(height: float) -> float:
        beam = GaussianBeam(
            name="A", wavelength=1064e-9, power=5.0, waists=60e-6, direction=(1, 0, 0), focus=(0, 0, height)
        )
        field = Trap(coils=Coils(gradient=1.6, knife=8e6), gravity=Gravity())
        return sudden_transfer(2e-5, point(field), point(Trap(beams=(beam,)))).share

    middle, above = caught(0.0), caught(1.2e-4)
    assert 0.0 < above < 0.5 * middle < 0.5
