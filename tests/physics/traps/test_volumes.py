"""Volume curves against formulas and against counting random points."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from physics.constants import bohr_magneton, boltzmann, standard_gravity
from physics.species import State
from physics.traps import Coils, GaussianBeam, Trap
from physics.traps.notes import NoteKind
from physics.traps.potential import Potential
from physics.traps.rays import ray_volumes, shape_of
from physics.traps.stationary import StationaryPoint
from physics.traps.survey import Survey, survey
from physics.traps.volume_curve import VolumeCurve
from physics.traps.volumes import volume_curve_of


def curve_of(found: Survey) -> VolumeCurve:
    assert found.volume_curve is not None
    return found.volume_curve


def shares(found: Survey, *parts: float) -> Any:
    assert found.depth is not None
    return found.depth * np.array(parts)


class Bowl(Potential):
    """A harmonic potential, or one that adds to it a multiple of the fourth power of its root."""

    def gradient(self, points: Any) -> tuple[Any, Any]:
        stiffness = np.diag([1.0, 50.0, 3.0]) * 1e-18
        force = points @ stiffness
        energy = 0.5 * np.sum(points * force, axis=-1)
        return energy + 1e28 * energy**2, force * (1.0 + 2e28 * energy)[..., np.newaxis]


def test_rays_are_exact_where_the_levels_are_ellipsoids() -> None:
    bowl = Bowl(mass=1e-25)
    curvature = np.diag([1.0, 50.0, 3.0]) * 1e-18
    minimum = StationaryPoint(position=np.zeros(3), energy=0.0, falling=0, curvature=curvature)
    shape = shape_of(minimum)
    assert shape is not None
    unit = 4.0 * math.pi / 3.0 * 2.0**1.5 / math.sqrt(np.linalg.det(curvature))
    assert (shape.power, shape.coefficient) == (1.5, pytest.approx(unit, rel=1e-12))
    energies = np.geomspace(1e-32, 1e-28, 50)
    found = ray_volumes(bowl, minimum, shape, energies)
    assert found.limit == energies[-1]
    # U + 1e28 U^2 = E has the volume of a harmonic trap at U.
    U = (np.sqrt(1.0 + 4e28 * energies) - 1.0) / 2e28
    assert found.volumes == pytest.approx(unit * U**1.5, rel=2e-5)


def test_a_harmonic_field_has_the_volume_of_a_harmonic_trap(rubidium: State) -> None:
    # W = (4 pi/3)(2U/m)^{3/2}/(w1 w2 w3), in a field whose bias is far above the knife.
    slope, B0 = 0.500583 * bohr_magneton, 1e-2
    knife = (slope * B0 + boltzmann * 1e-6) / 6.62607015e-34
    coils = Coils(bias=B0, gradient=10.0, curvature=500.0, axis=(1, 0, 0), knife=knife)
    found = survey(Trap(coils=coils, gravity=None), rubidium)
    U = shares(found, 0.2, 0.5, 0.8, 0.95)
    omegas = 2.0 * math.pi * np.asarray(found.frequencies)
    expected = 4.0 * math.pi / 3.0 * (2.0 * U / rubidium.mass) ** 1.5 / np.prod(omegas)
    assert curve_of(found).volume(U) == pytest.approx(expected, rel=1e-3)
    # The rest is the field's own: 1 uK over the 336 uK of the bias; a tenth of the energy leaves a tenth of it.
    low = shares(found, 0.02)
    first = 4.0 * math.pi / 3.0 * (2.0 * low / rubidium.mass) ** 1.5 / np.prod(omegas)
    assert curve_of(found).volume(low) == pytest.approx(first, rel=1e-4)


@pytest.mark.parametrize("gravity", [True, False])
def test_at_its_bottom_a_crossed_trap_is_harmonic(gravity: bool, crossed: Trap, rubidium: State) -> None:
    found = survey(crossed if gravity else replace(crossed, gravity=None), rubidium)
    curve = curve_of(found)
    omegas = 2.0 * math.pi * np.asarray(found.frequencies)
    unit = 4.0 * math.pi / 3.0 * (2.0 / rubidium.mass) ** 1.5 / np.prod(omegas)
    assert curve.coefficient == pytest.approx(unit, rel=1e-9)
    # What is more goes as U: of the order of U over the depth.
    parts = np.array([2e-5, 1e-4, 2e-4, 1e-3])
    U = shares(found, *parts)
    more = curve.volume(U) / (unit * U**1.5) - 1.0
    assert np.all(np.abs(more) < np.maximum(1.2 * parts, 1.2e-4))
    assert more[3] / more[1] == pytest.approx(10.0, rel=0.1)


@pytest.mark.parametrize(("gradient", "gravity"), [(2.0, True), (2.0, False), (0.32, True), (0.306, True)])
def test_a_quadrupole_has_the_volume_of_its_formula(gradient: float, gravity: bool, rubidium: State) -> None:
    # (16 pi/3)(U/mu B')^3; gravity along the strong axis moves and stretches the ellipsoids: over (1 - f^2)^2,
    # f = m g/(mu B'), 0.997 at the lowest gradient.
    trap = Trap(coils=Coils(gradient=gradient, knife=2e6))
    found = survey(trap if gravity else replace(trap, gravity=None), rubidium)
    force = rubidium.zeeman_slope.value * gradient  # type: ignore[union-attr]
    f = rubidium.mass * standard_gravity / force if gravity else 0.0
    U = shares(found, 0.001, 0.2, 0.5, 0.8, 0.95, 1.0)
    expected = 16.0 * math.pi / 3.0 * (U / force) ** 3 / (1.0 - f * f) ** 2
    assert curve_of(found).volume(U) == pytest.approx(expected, rel=1e-4)
    assert curve_of(found).power == 3.0


def test_one_beam_without_gravity_has_the_volume_of_its_integral(single: Trap, rubidium: State) -> None:
    # At a distance of z = x zR the radius of a level u = U/U0 is (w0^2/2)(1 + x^2) ln(1/((1-u)(1+x^2))).
    found = survey(replace(single, gravity=None), rubidium)
    beam = single.beams[0]
    curve = curve_of(found)
    x, weights = np.polynomial.legendre.leggauss(200)
    for u, allowed in ((0.01, 1e-4), (0.2, 1e-4), (0.5, 1e-4), (0.8, 1e-3), (0.94, 5e-3)):
        edge = math.sqrt(u / (1.0 - u))
        q = 1.0 + (edge * x) ** 2
        area = math.pi * 70e-6**2 / 2.0 * q * np.log(1.0 / ((1.0 - u) * q))
        expected = beam.rayleigh_lengths[0] * edge * float(weights @ area)
        assert curve.volume(u * found.depth) == pytest.approx(expected, rel=allowed), u  # type: ignore[operator]
    assert curve.ceiling == pytest.approx(0.95 * found.depth)  # type: ignore[operator]
    assert [note.value for note in found.notes if note.kind is NoteKind.INFINITE_ARMS] == [0.95]
    assert np.isnan(curve.volume(0.96 * found.depth))  # type: ignore[operator]


def sagging_crossing(
    found: Survey, parts: list[float], core: float, far: float, wide: float, seed: int
) -> tuple[Any, Any]:
    """Volume and its variance by random points: in a cube around the crossing, and along its four arms.

    The half edge of the cube is `core` [m], and it holds all where `far` is 0. Arms are followed up to `far` [m], over
    `wide` beam radii to each side. What is beyond the barrier below a beam is told by the slope: there, and only there,
    the potential falls downwards more than half a beam radius below the axis.
    """
    potential = found.potential
    assert potential is not None
    rng, count = np.random.default_rng(seed), 300_000
    limits = found.energy_at_minimum + shares(found, *parts)  # type: ignore[operator]
    near = 2.5e-4
    total, variance = np.zeros(len(parts)), np.zeros(len(parts))

    def count_in(points: Any, each: Any) -> None:
        energy, gradient = potential.gradient(points)
        radius = np.zeros(len(points))
        for beam, along, aside in zip(potential.beams, points[:, :2].T, points[:, 1::-1].T, strict=True):
            width = beam.widths(np.abs(along))[:, 0]
            radius = np.maximum(radius, np.where(np.abs(aside) < 3.0 * width, width, 0.0))
        inside = ~((points[:, 2] < -0.5 * radius) & (gradient[:, 2] > 0.0))
        for k, limit in enumerate(limits):
            values = np.where(inside & (energy < limit), each, 0.0)
            total[k] += np.mean(values)
            variance[k] += np.var(values) / len(values)

    x, y, z = rng.uniform(-core, core, (3, count))
    count_in(np.stack([x, y, z], axis=-1), (2.0 * core) ** 3)
    if far == 0.0:
        return total, variance
    x, y = rng.uniform(-near, near, (2, count))
    z = rng.uniform(-1.2e-4, 1.2e-4, count)
    outside = (np.abs(x) > core) | (np.abs(y) > core) | (np.abs(z) > core)
    count_in(np.stack([x, y, z], axis=-1), np.where(outside, (2.0 * near) ** 2 * 2.4e-4, 0.0))
    for axis, beam in enumerate(potential.beams):
        s = near * np.exp(rng.random(count) * math.log(far / near))
        width = wide * beam.widths(s)[:, 0]
        aside = np.minimum(width, near)
        points = np.empty((count, 3))
        points[:, axis] = rng.choice([-1.0, 1.0], count) * s
        points[:, 1 - axis] = aside * rng.uniform(-1.0, 1.0, count)
        points[:, 2] = width * rng.uniform(-1.0, 1.0, count)
        count_in(points, 2.0 * s * math.log(far / near) * 2.0 * aside * 2.0 * width)
    return total, variance


def test_a_sagging_crossing_has_the_volume_that_random_points_count(crossed: Trap, rubidium: State) -> None:
    found = survey(crossed, rubidium)
    parts = [0.2, 0.5, 0.6, 0.8, 0.95]
    # Below 0.55 of the depth nothing is in the arms; at 0.6 the longer one is filled over 2.6 mm, close to its axis.
    setups = [
        (parts[:1], 4.5e-5, 0.0, 0.0),
        (parts[1:2], 9e-5, 0.0, 0.0),
        (parts[2:3], 9e-5, 4e-3, 0.5),
        (parts[3:], 9e-5, 3e-2, 2.2),
    ]
    runs = [[sagging_crossing(found, *setup, seed) for setup in setups] for seed in range(3)]
    counted = np.mean([np.concatenate([total for total, _ in run]) for run in runs], axis=0)
    deviation = np.sqrt(np.mean([np.concatenate([square for _, square in run]) for run in runs], axis=0) / len(runs))
    assert np.all(deviation < 0.008 * counted)
    U = shares(found, *parts)
    curve = curve_of(found)
    assert np.all(np.abs(curve.volume(U) - counted) < 0.01 * counted + 2.0 * deviation)
    # The arms hold most of the volume above 0.55 of the depth: 7 times the harmonic volume, then 190 times.
    assert counted[2:4] / (curve.coefficient * U[2:4] ** 1.5) == pytest.approx([7.2, 192.5], rel=0.03)
    assert curve.arm_share(U[0]) == 0.0
    assert curve.arm_share(U[3]) > 0.95


def test_an_arm_that_opens_just_below_the_depth_is_counted_however_thin_it_is(rubidium: State) -> None:
    # Arms open at 0.925 of the depth. At 0.95 they are a tenth of a waist thin, and hold a quarter of the volume.
    trap = Trap(
        beams=(
            GaussianBeam(name="A", wavelength=1064e-9, power=0.52, waists=72e-6, direction=(1, 0, 0)),
            GaussianBeam(name="B", wavelength=1064e-9, power=0.48, waists=85e-6, direction=(0, 1, 0)),
        )
    )
    found = survey(trap, rubidium)
    parts = [0.5, 0.9, 0.95, 0.98]
    limits = shares(found, *parts)
    # Columns over a quarter of the plane, closer near the crossing; beyond the barrier below, the energy falls
    # downwards more than half a waist below the axis.
    assert found.potential is not None
    widest, count, z = 85e-6, 120, np.linspace(-1.6e-4, 1.2e-4, 188)
    rule = (np.arange(count) + 0.5) / count
    ends = np.arcsinh(np.array([5e-3, 2e-4]) / (0.6 * widest))
    (x, dx), (y, dy) = (
        (0.6 * widest * np.sinh(end * rule), 0.6 * widest * np.cosh(end * rule) * end / count) for end in ends
    )
    counted = np.zeros(len(parts))
    for place, width in zip(x, dx, strict=True):
        points = np.stack(np.broadcast_arrays(place, y[:, np.newaxis], z), axis=-1)
        height = found.potential.energy(points) - found.energy_at_minimum
        held = ~((z < -0.5 * widest) & (np.gradient(height, axis=1) > 0.0))
        for k, limit in enumerate(limits):
            counted[k] += 4.0 * width * float(dy @ np.sum(held & (height < limit), axis=1)) * (z[1] - z[0])
    curve = curve_of(found)
    assert curve.volume(limits) == pytest.approx(counted, rel=0.015)
    assert curve.arm_share(limits[1]) == 0.0
    assert curve.arm_share(limits[2]) == pytest.approx(0.25, abs=0.02)


def test_a_small_part_of_a_cold_cloud_and_most_of_a_hot_one_is_in_the_arms(crossed: Trap, rubidium: State) -> None:
    curve = curve_of(survey(crossed, rubidium))
    cold, warm, hot = curve.atoms_in_arms(np.array([2e-6, 8e-6, 30e-6]))
    assert 0.0 <= cold < 1e-3
    assert cold < warm < hot
    assert hot > 0.9


def test_a_well_beyond_a_pass_joins_at_the_energy_of_the_pass(rubidium: State) -> None:
    # Two equal beams side by side: twice the volume of one, but only above the pass between them.
    beams = tuple(
        GaussianBeam(name=name, wavelength=1064e-9, power=0.5, waists=40e-6, direction=(1, 0, 0), focus=(0, y, 0))
        for name, y in (("A", -3.6e-5), ("B", 3.6e-5))
    )
    found = survey(Trap(beams=beams), rubidium)
    assert found.basin is not None
    assert found.basin.inner_passes
    at = found.basin.inner_passes[0] - found.basin.minimum.energy
    curve = curve_of(found)
    below, above = curve.volume(np.array([0.96, 1.04]) * at)
    # Random points count 2.74: each by itself grows as well, fast so close to the pass.
    assert above / below == pytest.approx(2.74, rel=0.03)


def test_a_well_in_an_arm_joins_with_all_its_volume(rubidium: State) -> None:
    # Two tilted beams: beyond a pass at 0.862 of the depth an arm has a well of its own, as large as the crossing.
    beams = (
        GaussianBeam(
            name="A", wavelength=1064e-9, power=1.110276, waists=(28.64958e-6, 76.91897e-6),
            direction=(-0.9865, 0.15477, -0.053503), focus=(-1.3007e-6, 0.7104e-6, -6.7676e-6),
        ),
        GaussianBeam(
            name="B", wavelength=1064e-9, power=0.7476028, waists=(65.21079e-6, 52.2886e-6),
            direction=(-0.7022, -0.68331, 0.2), focus=(-1.2158e-6, -9.5677e-6, -2.533e-6),
        ),
    )  # fmt: skip
    found = survey(Trap(beams=beams), rubidium)
    assert found.basin is not None
    assert found.landscape is not None
    assert found.depth is not None
    (join,) = (energy - found.basin.minimum.energy for energy in found.basin.inner_passes)
    assert join / found.depth == pytest.approx(0.862, abs=1e-3)
    U = shares(found, 0.8, 0.9, 0.95, 0.99)
    curve = curve_of(found)
    finer = volume_curve_of(replace(found.landscape, fineness=2.0), found.basin)
    assert curve.volume(U) == pytest.approx(finer.volume(U), rel=0.01)
    below, above = curve.volume(np.array([0.99, 1.02]) * join)
    assert above > 1.8 * below
    # Points at random, each relaxed across the beam and followed to the crossing, count 6.7(3) times harmonic.
    assert curve.volume(U[2]) / (curve.coefficient * U[2] ** 1.5) == pytest.approx(6.6, rel=0.06)
    assert np.all(np.diff(curve.arm_share(np.linspace(0.5, 1.0, 60) * found.depth)) >= -0.02)


def test_volumes_do_not_depend_on_the_size_of_the_cells(crossed: Trap, rubidium: State) -> None:
    from physics.traps.landscape import Landscape

    found = survey(crossed, rubidium)
    assert found.basin is not None
    assert found.landscape is not None
    finer = volume_curve_of(replace(found.landscape, fineness=1.6), found.basin)
    assert isinstance(found.landscape, Landscape)
    U = shares(found, 0.3, 0.6, 0.8, 0.95)
    assert curve_of(found).volume(U) == pytest.approx(finer.volume(U), rel=0.01)
