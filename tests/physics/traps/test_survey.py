"""Surveys against closed forms: frequencies, depth, the way out, sag."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar

from physics.constants import bohr_magneton, boltzmann, planck, standard_gravity
from physics.light import light_shift, polarizability, scattering_rate
from physics.species import State, load_species
from physics.traps import Coils, GaussianBeam, HarmonicTrap, Trap
from physics.traps.boundary import Exit
from physics.traps.notes import NoteKind
from physics.traps.survey import NoFrequencies, Survey, survey, survey_of_harmonic

TWO_PI = 2.0 * math.pi


def depth_of(beam: GaussianBeam, state: State) -> float:
    """U0 of a beam alone. [J]"""
    alpha = polarizability(state.isotope, beam.wavelength).value
    assert alpha is not None
    return -float(light_shift(alpha, beam.peak_intensity))


def kinds(found: Survey) -> set[NoteKind]:
    return {note.kind for note in found.notes}


def test_one_round_beam_has_the_frequencies_and_the_depth_of_the_textbook(single: Trap, rubidium: State) -> None:
    # Grimm, Weidemueller, Ovchinnikov (2000), eq. (35).
    found = survey(replace(single, gravity=None), rubidium)
    beam = single.beams[0]
    U0, m, w0, zR = depth_of(beam, rubidium), rubidium.mass, 70e-6, float(beam.rayleigh_lengths[0])
    radial, axial = math.sqrt(4.0 * U0 / (m * w0**2)) / TWO_PI, math.sqrt(2.0 * U0 / (m * zR**2)) / TWO_PI
    assert found.frequencies == pytest.approx([axial, radial, radial], rel=1e-9)
    assert found.axes == pytest.approx(np.eye(3), abs=1e-6)
    assert found.depth == pytest.approx(U0, rel=1e-9)
    assert found.minimum == pytest.approx(np.zeros(3), abs=1e-11)
    assert found.mean_frequency == pytest.approx((axial * radial**2) ** (1.0 / 3.0), rel=1e-9)
    assert found.depth_temperature == pytest.approx(U0 / boltzmann, rel=1e-9)
    assert found.escape is not None
    assert (found.escape.kind, found.escape.position, found.escape.direction) == (Exit.OPEN_SPACE, None, None)
    assert found.sag is None
    assert found.arm_depth is None


def test_one_elliptical_beam(rubidium: State) -> None:
    beam = GaussianBeam(name="A", wavelength=1064e-9, power=1.0, waists=(120e-6, 30e-6), direction=(0, 1, 0), m2=1.2)
    found = survey(Trap(beams=(beam,), gravity=None), rubidium)
    U0, m = depth_of(beam, rubidium), rubidium.mass
    zx, zy = beam.rayleigh_lengths
    expected = [2.0 * math.sqrt(U0 / m) / 120e-6, math.sqrt(U0 / m * (1.0 / zx**2 + 1.0 / zy**2)), 0.0]
    expected[2] = 2.0 * math.sqrt(U0 / m) / 30e-6
    assert np.asarray(found.frequencies) * TWO_PI == pytest.approx(expected, rel=1e-9)


def test_where_beams_cross_squares_of_frequencies_add(crossed: Trap, rubidium: State) -> None:
    found = survey(replace(crossed, gravity=None), rubidium)
    A, B = crossed.beams
    a, b, m = depth_of(A, rubidium), depth_of(B, rubidium), rubidium.mass
    along_x = 4.0 * b / (m * 55e-6**2) + 2.0 * a / (m * A.rayleigh_lengths[0] ** 2)
    along_y = 4.0 * a / (m * 70e-6**2) + 2.0 * b / (m * B.rayleigh_lengths[0] ** 2)
    along_z = 4.0 * a / (m * 70e-6**2) + 4.0 * b / (m * 55e-6**2)
    assert (np.asarray(found.frequencies) * TWO_PI) ** 2 == pytest.approx([along_x, along_y, along_z], rel=1e-9)
    assert found.depth == pytest.approx(a + b, rel=1e-9)
    # The weaker beam's arm opens last: atoms get into that of B once they are out of A, of which 1 % is left there.
    assert found.arm_depth == pytest.approx(0.99 * a, rel=5e-3)
    assert [arm.beam for arm in found.arms] == ["B", "B", "A", "A"]


def test_the_way_out_of_a_horizontal_beam_is_the_lowest_barrier_along_it(single: Trap, rubidium: State) -> None:
    # At each distance from the focus the barrier below the beam by itself, in one dimension; atoms take the lowest.
    found = survey(single, rubidium)
    beam, weight = single.beams[0], rubidium.mass * standard_gravity
    U0, zR = depth_of(beam, rubidium), float(beam.rayleigh_lengths[0])

    def energy(s: float, z: float) -> float:
        q = 1.0 + (s / zR) ** 2
        return -U0 / q * math.exp(-2.0 * z**2 / (70e-6**2 * q)) + weight * z

    def force(s: float, z: float) -> float:
        q = 1.0 + (s / zR) ** 2
        w2 = 70e-6**2 * q
        return 4.0 * z / w2 * U0 / q * math.exp(-2.0 * z**2 / w2) + weight

    def barrier(s: float) -> float:
        w = 70e-6 * math.sqrt(1.0 + (s / zR) ** 2)
        return energy(s, brentq(lambda z: force(s, z), -0.5 * w, -6.0 * w))

    bottom = brentq(lambda z: force(0.0, z), -35e-6, 0.0, xtol=1e-18)
    lowest = minimize_scalar(barrier, bounds=(1e-3, 2.5e-2), method="bounded", options={"xatol": 1e-9})
    assert barrier(0.0) > lowest.fun
    assert found.depth == pytest.approx(lowest.fun - energy(0.0, bottom), rel=1e-9)
    assert found.sag == pytest.approx(-bottom, rel=1e-6)
    assert found.escape is not None
    assert found.escape.kind is Exit.PASS
    assert abs(np.asarray(found.escape.position)[0]) == pytest.approx(lowest.x, rel=1e-4)
    assert np.asarray(found.escape.direction)[2] < -0.99


def test_sag_in_a_stiff_trap_is_g_over_omega_squared(crossed: Trap, rubidium: State) -> None:
    found = survey(crossed.with_powers_scaled(20.0), rubidium)
    omega = TWO_PI * found.frequencies[2]
    assert found.sag == pytest.approx(standard_gravity / omega**2, rel=1e-4)
    assert found.minimum[2] == pytest.approx(-found.sag, rel=1e-6)


def test_an_ioffe_trap_has_the_frequencies_of_the_textbook(ioffe: Trap, rubidium: State) -> None:
    found = survey(replace(ioffe, gravity=None), rubidium)
    over_mass = 0.500583 * bohr_magneton / rubidium.mass
    axial, radial = math.sqrt(over_mass * 100.0), math.sqrt(over_mass * (1.5**2 / 1e-4 - 50.0))
    assert np.asarray(found.frequencies) * TWO_PI == pytest.approx([axial, radial, radial], rel=1e-9)


def test_without_a_knife_the_wall_limits_a_magnetic_trap(rubidium: State) -> None:
    trap = Trap(coils=Coils(gradient=2.0), gravity=None)
    slope = 0.500583 * bohr_magneton
    for wall in (0.02, 0.005):
        found = survey(trap, rubidium, wall=wall)
        # The weak axes reach it first.
        assert found.depth == pytest.approx(slope * 1.0 * wall, rel=1e-6)
        assert found.escape is not None
        assert found.escape.kind is Exit.WALL
        assert NoteKind.WALL in kinds(found)
    with pytest.raises(ValueError, match=r"^distance of the wall must be positive, got 0 m$"):
        survey(trap, rubidium, wall=0.0)


def test_a_knife_in_a_harmonic_trap_with_gravity() -> None:
    # (sqrt(E_k) - sqrt(E_s))^2, E_s = m g^2/(2 w^2), for hydrogen in a field that is harmonic to 1e-4 at the knife.
    hydrogen = load_species("1H").state()
    assert hydrogen.zeeman_slope is not None
    slope, m, B0 = hydrogen.zeeman_slope.value, hydrogen.mass, 1e-3
    E_k = 1e-4 * slope * B0
    knife = (E_k + slope * B0) / planck
    coils = Coils(bias=B0, gradient=0.5, curvature=100.0, axis=(1, 0, 0), knife=knife)
    found = survey(Trap(coils=coils), hydrogen)
    omega = math.sqrt(slope / m * (0.5**2 / B0 - 50.0))
    E_s = m * standard_gravity**2 / (2.0 * omega**2)
    assert 0.01 < E_s / E_k < 0.5
    assert found.depth == pytest.approx((math.sqrt(E_k) - math.sqrt(E_s)) ** 2, rel=3e-4)
    assert found.escape is not None
    assert found.escape.kind is Exit.KNIFE
    assert found.escape.direction == pytest.approx([0.0, 0.0, -1.0], abs=1e-3)


def test_a_knife_in_a_quadrupole_with_gravity_takes_atoms_at_the_bottom(rubidium: State) -> None:
    found = survey(Trap(coils=Coils(gradient=2.0, knife=2e6)), rubidium)
    B_k = planck * 2e6 / (0.500583 * bohr_magneton)
    weight = rubidium.mass * standard_gravity
    assert found.depth == pytest.approx(planck * 2e6 - weight * B_k / 2.0, rel=1e-9)
    assert found.escape is not None
    assert found.escape.position == pytest.approx([0.0, 0.0, -B_k / 2.0], rel=1e-6, abs=1e-12)


def test_a_quadrupole_has_a_cusp_and_no_frequencies(rubidium: State) -> None:
    found = survey(Trap(coils=Coils(gradient=2.0, knife=2e6)), rubidium)
    assert found.trapped
    assert found.frequencies is None
    assert found.mean_frequency is None
    assert found.harmonic is None
    assert found.no_frequencies is NoFrequencies.CUSP
    assert found.minimum == pytest.approx(np.zeros(3))
    assert found.sag == pytest.approx(0.0, abs=1e-12)
    assert NoteKind.FIELD_ZERO in kinds(found)
    assert found.spin_flips is not None
    low, high = found.spin_flips.rates(50e-6)
    # chi (hbar/m)(mu B'/kT)^2 with chi from 0.16 to 1.85.
    unit = planck / TWO_PI / rubidium.mass * (0.500583 * bohr_magneton * 2.0 / (boltzmann * 50e-6)) ** 2
    assert [low, high] == pytest.approx([0.16 * unit, 1.85 * unit], rel=1e-6)


def test_a_beam_below_the_zero_of_a_quadrupole(rubidium: State) -> None:
    # Y.-J. Lin et al., Phys. Rev. A 79, 063631 (2009): along the beam the quadrupole holds with
    # (1/2) sqrt(mu B'/(m |z|)), z the distance from its zero; B' is that of the strong, vertical axis.
    beam = GaussianBeam(
        name="A", wavelength=1064e-9, power=2.5, waists=70e-6, direction=(1, 0, 0), focus=(0, 0, -70e-6)
    )
    found = survey(Trap(beams=(beam,), coils=Coils(gradient=0.25)), rubidium)
    z = -float(found.minimum[2])
    assert 60e-6 < z < 80e-6
    magnetic = 0.25 * 0.500583 * bohr_magneton * 0.25 / (rubidium.mass * z)
    light = 2.0 * depth_of(beam, rubidium) / (rubidium.mass * beam.rayleigh_lengths[0] ** 2)
    assert (TWO_PI * found.frequencies[0]) ** 2 == pytest.approx(magnetic + light, rel=1e-4)
    # The zero itself, 70 um above, is no way out: gravity wins below the beam.
    assert found.escape is not None
    assert found.escape.direction == pytest.approx([0.0, 0.0, -1.0], abs=1e-6)


def test_a_plug_of_blue_light_opens_two_minima_beside_the_zero(rubidium: State) -> None:
    plug = GaussianBeam(name="P", wavelength=532e-9, power=5.0, waists=30e-6, direction=(0, 1, 0))
    found = survey(Trap(beams=(plug,), coils=Coils(gradient=2.0, knife=3e6)), rubidium)
    assert found.no_frequencies is None
    assert abs(found.minimum[0]) == pytest.approx(46.3e-6, rel=2e-3)
    assert found.basin is not None
    # Both join below the knife, by the lower of two passes above and below the plug.
    assert len(found.basin.inner_passes) == 1
    assert NoteKind.BLUE_LIGHT in kinds(found)
    # In the plane of the plug and the field's weak axis the minimum is where both forces balance.
    potential = found.potential
    assert potential is not None
    assert np.linalg.norm(potential.gradient(np.asarray(found.minimum))[1]) < 1e-9 * rubidium.mass * standard_gravity


def test_the_deepest_of_the_minima_that_hang_together_is_the_trap(rubidium: State) -> None:
    long = GaussianBeam(name="A", wavelength=1064e-9, power=2.5, waists=70e-6, direction=(1, 0, 0))
    weak = GaussianBeam(name="B", wavelength=1064e-9, power=0.5, waists=40e-6, direction=(0, 1, 0), focus=(-4e-4, 0, 0))
    strong = replace(weak, name="C", power=1.0, focus=(4e-4, 0.0, 0.0))
    for beams in ((long, weak, strong), (strong, weak, long)):
        found = survey(Trap(beams=beams), rubidium)
        assert found.minimum[0] == pytest.approx(4e-4, abs=1e-5)
        assert found.basin is not None
        assert len(found.basin.inner_passes) >= 1


def test_scattering_and_its_heat_at_the_minimum(crossed: Trap, rubidium: State) -> None:
    free = replace(crossed, gravity=None)
    heating = survey(free, rubidium).heating
    light = polarizability(rubidium.isotope, 1064e-9)
    for beam in crossed.beams:
        expected = float(scattering_rate(light, beam.peak_intensity))
        assert heating.scattering_rates[beam.name] == pytest.approx(expected, rel=1e-9)
    assert heating.scattering_rate == pytest.approx(sum(heating.scattering_rates.values()))
    # T_rec Gamma/3 of light of one wavelength.
    recoil = planck**2 / (rubidium.mass * 1064e-9**2 * boltzmann)
    assert heating.heating_rate == pytest.approx(recoil * heating.scattering_rate / 3.0, rel=1e-9)
    assert survey(Trap(coils=Coils(gradient=2.0)), rubidium).heating.scattering_rate == 0.0


def test_published_polarizabilities_and_strong_fields_are_noted(crossed: Trap, rubidium: State) -> None:
    dysprosium = load_species("164Dy").state()
    found = survey(crossed, dysprosium)
    assert found.trapped
    assert NoteKind.PUBLISHED_POLARIZABILITY in kinds(found)
    strong = survey(replace(crossed, coils=Coils(bias=0.01)), rubidium)
    assert [note.value for note in strong.notes if note.kind is NoteKind.LINEAR_ZEEMAN] == pytest.approx(
        [bohr_magneton * 0.01 / planck]
    )
    assert survey(crossed, rubidium).notes == ()
    # In a stretched state it is linear at any field.
    stretched = load_species("87Rb").state("F=2 mF=+2")
    assert survey(replace(crossed, coils=Coils(bias=0.01)), stretched).notes == ()
    near = survey(crossed.with_beam("B", wavelength=796e-9, power=0.02), rubidium)
    assert NoteKind.NEAR_RESONANCE in kinds(near)


def test_a_focus_of_a_wavelength_is_noted(single: Trap, rubidium: State) -> None:
    found = survey(single.with_beam("A", waists=(1.5e-6, 8e-6), power=0.01), rubidium)
    assert [note.value for note in found.notes if note.kind is NoteKind.TIGHT_FOCUS] == pytest.approx([1.5 / 1.064])
    assert NoteKind.TIGHT_FOCUS not in kinds(survey(single.with_beam("A", waists=2.2e-6, power=0.01), rubidium))


def test_a_knife_that_does_nothing_is_noted(crossed: Trap) -> None:
    lithium = load_species("6Li").state("F=1/2 mF=+1/2")
    found = survey(replace(crossed, coils=Coils(bias=1e-4, knife=1e6)), lithium)
    assert found.trapped
    assert NoteKind.KNIFE_IDLE in kinds(found)


def test_a_harmonic_trap_has_the_same_face(rubidium: State) -> None:
    trap = HarmonicTrap(frequencies=(120.0, 90.0, 20.0), depth=2e-29)
    found = survey_of_harmonic(trap, rubidium.mass)
    assert found.trapped
    assert found.frequencies == pytest.approx([120.0, 90.0, 20.0])
    assert found.depth == 2e-29
    assert found.harmonic is trap
    assert (found.sag, found.arms, found.notes, found.spin_flips) == (None, (), (), None)
    assert found.heating.scattering_rate == 0.0
    curve = found.volume_curve
    assert curve is not None
    omegas = TWO_PI * np.array([120.0, 90.0, 20.0])
    U = np.array([1e-31, 3e-30, 2e-29])
    expected = 4.0 * math.pi / 3.0 * (2.0 * U / rubidium.mass) ** 1.5 / np.prod(omegas)
    assert curve.volume(U) == pytest.approx(expected, rel=1e-12)
    assert survey_of_harmonic(HarmonicTrap(frequencies=(1.0, 2.0, 3.0)), rubidium.mass).volume_curve is None
    with pytest.raises(ValueError, match=r"^a survey is of one trap, got an array of shape \(2,\)$"):
        survey_of_harmonic(HarmonicTrap(frequencies=np.ones((2, 3))), rubidium.mass)


def test_a_survey_gives_the_harmonic_trap_of_its_frequencies(crossed: Trap, rubidium: State) -> None:
    found = survey(crossed, rubidium)
    assert found.harmonic is not None
    assert found.harmonic.frequencies == pytest.approx(np.asarray(found.frequencies))
    assert found.harmonic.depth == found.depth
