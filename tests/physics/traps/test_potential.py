"""The potential of a trap: derivatives against differences, and each part against its formula."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from physics.constants import bohr_magneton, planck, standard_gravity
from physics.light import light_shift, polarizability
from physics.species import State, load_species
from physics.traps import Coils, FieldSeeker, GaussianBeam, Gravity, Trap
from physics.traps.potential import NoPotential, NotTrapped, Potential, potential_of

POINTS = np.random.default_rng(2).normal(size=(40, 3)) * 4e-5


def difference(function: Callable[[Any], Any], points: Any, step: float) -> Any:
    """Central differences, the derivative's index last."""
    return np.stack(
        [(function(points + step * e) - function(points - step * e)) / (2.0 * step) for e in np.eye(3)], axis=-1
    )


def traps(ellipse: dict[str, Any]) -> list[Trap]:
    beam = GaussianBeam(**ellipse)
    plug = GaussianBeam(name="P", wavelength=532e-9, power=3.0, waists=(30e-6, 50e-6), direction=(0, 0.2, 1))
    return [
        Trap(beams=(beam,), gravity=None),
        Trap(coils=Coils(axis=(1.0, 0.2, 0.3), bias=1e-4, gradient=1.5, curvature=100.0), gravity=None),
        Trap(coils=Coils(gradient=1.5, centre=(1e-5, 0, 0)), gravity=None),
        Trap(beams=(beam, plug), coils=Coils(gradient=0.9, levitation=0.1), gravity=Gravity(direction=(0.1, 0, -1))),
    ]


@pytest.mark.parametrize("index", range(4))
def test_gradient_and_hessian_are_those_of_the_energy(index: int, ellipse: dict[str, Any], rubidium: State) -> None:
    potential = potential_of(traps(ellipse)[index], rubidium)
    energy, gradient, hessian = potential.hessian(POINTS)
    assert energy == pytest.approx(potential.energy(POINTS), rel=1e-13)
    assert gradient == pytest.approx(potential.gradient(POINTS)[1], rel=1e-13)
    scale, bend = np.max(np.abs(gradient)), np.max(np.abs(hessian))
    assert difference(potential.energy, POINTS, 1e-9) == pytest.approx(gradient, abs=1e-7 * scale)
    numeric = difference(lambda r: potential.gradient(r)[1], POINTS, 1e-9)
    assert numeric == pytest.approx(hessian, abs=1e-6 * bend)
    assert hessian == pytest.approx(np.swapaxes(hessian, 1, 2), abs=1e-12 * bend)


def test_points_of_any_shape(crossed: Trap, rubidium: State) -> None:
    potential = potential_of(crossed, rubidium)
    grid = POINTS[:24].reshape(2, 3, 4, 3)
    assert potential.energy(grid).shape == (2, 3, 4)
    assert potential.hessian(grid)[2].shape == (2, 3, 4, 3, 3)
    assert potential.energy(grid)[1, 2, 3] == potential.energy(POINTS[23])


def test_each_part_is_what_its_formula_says(crossed: Trap, rubidium: State) -> None:
    alpha = polarizability(rubidium.isotope, 1064e-9).value
    assert alpha is not None
    dark = Trap(coils=Coils(bias=2e-4, gradient=1.0, curvature=50.0))
    r = np.array([1e-5, 2e-5, 3e-5])
    weight = rubidium.mass * standard_gravity
    assert potential_of(Trap(), rubidium).energy(r) == pytest.approx(weight * 3e-5, rel=1e-12)
    light = light_shift(alpha, sum(beam.intensity(r) for beam in crossed.beams))
    assert potential_of(crossed, rubidium).energy(r) == pytest.approx(float(light) + weight * 3e-5, rel=1e-12)
    assert dark.coils is not None
    field = np.linalg.norm(dark.coils.field(r))
    slope = 0.500583 * bohr_magneton
    assert potential_of(dark, rubidium).energy(r) == pytest.approx(slope * field + weight * 3e-5, rel=1e-9)


def test_gravity_pulls_where_it_points(rubidium: State) -> None:
    aside = Trap(gravity=Gravity(direction=(1, 0, 0)))
    _, gradient = potential_of(aside, rubidium).gradient(np.zeros(3))
    assert gradient == pytest.approx([-rubidium.mass * standard_gravity, 0.0, 0.0], rel=1e-12)
    _, gradient = potential_of(Trap(gravity=None), rubidium).gradient(np.zeros(3))
    assert np.all(gradient == 0.0)


def test_levitation_lifts_the_state_that_is_asked_about_whichever_way_it_seeks() -> None:
    for key, name in (("87Rb", "F=1 mF=-1"), ("133Cs", "F=3 mF=+3")):
        state = load_species(key).state(name)
        assert state.zeeman_slope is not None
        carries = state.mass * standard_gravity / abs(state.zeeman_slope.value)
        potential = potential_of(Trap(coils=Coils(levitation=carries)), state)
        assert np.all(potential.force == 0.0)
        assert potential_of(Trap(coils=Coils(levitation=2.0 * carries)), state).force[2] > 0.0
        assert potential_of(Trap(coils=Coils(levitation=-carries)), state).force == pytest.approx(
            2.0 * potential.weight, rel=1e-12
        )


def test_levitation_of_one_kind_pulls_the_other_down(rubidium: State) -> None:
    cesium = load_species("133Cs").state("F=3 mF=+3")
    coils = Coils(levitation=0.1, lifts=FieldSeeker.HIGH)
    assert potential_of(Trap(coils=coils), cesium).lift[2] > 0.0
    assert potential_of(Trap(coils=coils), rubidium).lift[2] < 0.0


def test_the_knife_meets_atoms_where_their_splitting_is_its_photon(rubidium: State) -> None:
    # 2 MHz on |gF| = 1/2: 0.5 muB B = h f at 2.855 G, where the state has mF times that energy.
    potential = potential_of(Trap(coils=Coils(gradient=1.0, knife=2e6)), rubidium)
    assert potential.knife_energy == pytest.approx(planck * 2e6)
    stretched = load_species("87Rb").state("F=2 mF=+2")
    potential = potential_of(Trap(coils=Coils(gradient=1.0, knife=2e6)), stretched)
    assert potential.knife_energy == pytest.approx(2.0 * planck * 2e6)
    at = np.array([0.0, 0.0, 2e6 * planck / (0.50058278 * bohr_magneton)])
    assert potential.magnetic(at) == pytest.approx(potential.knife_energy, rel=1e-5)


def test_the_knife_leaves_high_field_seekers_alone() -> None:
    state = load_species("87Rb").state("F=1 mF=+1")
    assert potential_of(Trap(coils=Coils(gradient=1.0, knife=2e6)), state).knife_energy is None


def test_a_cusp_is_a_minimum_while_the_field_pulls_harder_than_all_else(rubidium: State) -> None:
    slope = 0.500583 * bohr_magneton
    holds = rubidium.mass * standard_gravity / slope
    for factor, count in ((1.001, 1), (0.999, 0)):
        assert len(potential_of(Trap(coils=Coils(gradient=factor * holds)), rubidium).cusps()) == count
        # On its weak axis a quadrupole has half the gradient.
        weak = Trap(coils=Coils(gradient=2.0 * factor * holds, axis=(1, 0, 0)))
        assert len(potential_of(weak, rubidium).cusps()) == count


def test_free_space_has_one_level_only_without_force_and_shaped_field(crossed: Trap, rubidium: State) -> None:
    free = replace(crossed, gravity=None)
    assert potential_of(free, rubidium).level_outside == 0.0
    assert potential_of(crossed, rubidium).level_outside is None
    biased = replace(free, coils=Coils(bias=1e-4))
    level = potential_of(biased, rubidium).level_outside
    assert level == pytest.approx(0.500583 * bohr_magneton * 1e-4, rel=1e-5)
    assert potential_of(biased, rubidium).energy(np.array([1.0, 1.0, 1.0])) == pytest.approx(level)
    assert potential_of(replace(free, coils=Coils(gradient=1.0)), rubidium).level_outside is None


def test_what_is_not_known_is_refused_with_its_reason(crossed: Trap) -> None:
    thulium = load_species("169Tm").state()
    with pytest.raises(NoPotential) as caught:
        potential_of(crossed, thulium)
    assert (caught.value.reason, caught.value.beam) == (NotTrapped.NO_POLARIZABILITY, "A")
    assert caught.value.light is not None
    mixture = load_species("40K").state("F=9/2 mF=-9/2 and F=9/2 mF=-7/2")
    for coils in (Coils(gradient=1.0), Coils(levitation=0.1), Coils(bias=1e-4, knife=1e6)):
        with pytest.raises(NoPotential) as caught:
            potential_of(Trap(coils=coils), mixture)
        assert caught.value.reason is NotTrapped.NO_MOMENT
    # A bias alone moves nothing, and needs no moment.
    assert isinstance(potential_of(replace(crossed, coils=Coils(bias=1e-2)), mixture), Potential)
    assert isinstance(potential_of(crossed.with_beam("A", on=False).with_beam("B", on=False), thulium), Potential)
