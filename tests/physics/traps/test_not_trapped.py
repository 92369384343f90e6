"""Why a trap holds nothing."""

from __future__ import annotations

from dataclasses import replace

import pytest

from physics.light import NoPolarizability
from physics.species import State, load_species
from physics.traps import Coils, GaussianBeam, Gravity, Trap
from physics.traps.potential import NotTrapped
from physics.traps.survey import Survey, survey


def blue(power: float = 1.0) -> GaussianBeam:
    return GaussianBeam(name="B", wavelength=532e-9, power=power, waists=50e-6, direction=(0, 1, 0))


def check_empty(found: Survey, reason: NotTrapped) -> None:
    assert not found.trapped
    assert found.reason is reason
    values = (found.minimum, found.frequencies, found.mean_frequency, found.depth, found.depth_temperature, found.sag)
    assert all(value is None for value in values)
    assert (found.volume_curve, found.harmonic, found.arm_depth, found.escape) == (None, None, None, None)
    assert found.heating.scattering_rate == 0.0


@pytest.mark.parametrize(
    ("trap", "reason"),
    [
        (Trap(), NotTrapped.NOTHING_ON),
        (Trap(gravity=None), NotTrapped.NOTHING_ON),
        (Trap(coils=Coils(bias=1e-4)), NotTrapped.NOTHING_ON),
        (Trap(coils=Coils(levitation=0.3)), NotTrapped.NOTHING_ON),
        (Trap(beams=(blue(),)), NotTrapped.BLUE_LIGHT),
        (Trap(beams=(blue(),), gravity=None), NotTrapped.BLUE_LIGHT),
        # 0.305 T/m carry rubidium in this state, on the strong axis.
        (Trap(coils=Coils(gradient=0.29)), NotTrapped.GRAVITY),
        (Trap(coils=Coils(gradient=0.5, axis=(1, 0, 0))), NotTrapped.GRAVITY),
        (Trap(coils=Coils(bias=1e-4, gradient=1.0, curvature=2.1e4), gravity=None), NotTrapped.FIELD_OPENS),
        (Trap(coils=Coils(bias=1e-4, gradient=1.5, curvature=100.0, knife=0.69e6)), NotTrapped.KNIFE),
        (Trap(coils=Coils(bias=1e-4, gradient=1.5, curvature=100.0, knife=0.72e6)), NotTrapped.KNIFE),
        (Trap(coils=Coils(bias=1e-4, curvature=50.0), gravity=None), NotTrapped.FIELD_OPENS),
        # A guide, open along its axis.
        (Trap(coils=Coils(bias=1e-4, gradient=1.5), gravity=None), NotTrapped.NO_MINIMUM),
    ],
)
def test_reasons_of_traps_for_rubidium(trap: Trap, reason: NotTrapped, rubidium: State) -> None:
    check_empty(survey(trap, rubidium), reason)


def test_a_knife_above_the_sagged_cloud_leaves_some(rubidium: State) -> None:
    # At 1 G the splitting is 0.7006 MHz; gravity lowers the minimum to where it is 0.8 MHz.
    coils = Coils(bias=1e-4, gradient=1.5, curvature=100.0, axis=(1, 0, 0), knife=0.9e6)
    assert survey(Trap(coils=coils), rubidium).trapped


def test_high_field_seekers_are_not_held_by_coils() -> None:
    state = load_species("87Rb").state("F=1 mF=+1")
    for coils in (Coils(gradient=2.0), Coils(bias=1e-4, gradient=1.5, curvature=100.0)):
        for gravity in (Gravity(), None):
            check_empty(survey(Trap(coils=coils, gravity=gravity), state), NotTrapped.HIGH_FIELD_SEEKER)


def test_a_quadrupole_pushes_high_field_seekers_out_of_a_beam(single: Trap) -> None:
    state = load_species("87Rb").state("F=1 mF=+1")
    assert survey(single, state).trapped
    check_empty(survey(replace(single, coils=Coils(gradient=0.5)), state), NotTrapped.HIGH_FIELD_SEEKER)


def test_atoms_without_a_moment_are_not_held_by_coils() -> None:
    check_empty(survey(Trap(coils=Coils(gradient=2.0)), load_species("88Sr").state()), NotTrapped.NOT_MAGNETIC)


def test_a_mixture_in_coils_has_no_one_moment() -> None:
    mixture = load_species("40K").state("F=9/2 mF=+9/2 and F=9/2 mF=+7/2")
    check_empty(survey(Trap(coils=Coils(gradient=2.0)), mixture), NotTrapped.NO_MOMENT)


def test_unknown_light_names_the_beam_and_what_is_known(crossed: Trap) -> None:
    found = survey(crossed, load_species("169Tm").state())
    check_empty(found, NotTrapped.NO_POLARIZABILITY)
    assert found.beam == "A"
    assert found.light is not None
    assert found.light.reason is NoPolarizability.NOT_IN_DATA
    far = survey(crossed.with_beam("B", wavelength=1550e-9), load_species("164Dy").state())
    check_empty(far, NotTrapped.NO_POLARIZABILITY)
    assert far.beam == "B"
    assert far.light is not None
    assert far.light.reason is NoPolarizability.FAR_FROM_PUBLISHED


def test_gravity_pulls_atoms_out_of_a_weak_or_a_vertical_beam(single: Trap, rubidium: State) -> None:
    check_empty(survey(single.with_powers_scaled(0.1), rubidium), NotTrapped.GRAVITY)
    check_empty(survey(single.with_beam("A", direction=(0, 0, 1)), rubidium), NotTrapped.GRAVITY)
    assert survey(replace(single.with_powers_scaled(0.1), gravity=None), rubidium).trapped


def test_too_much_levitation_pulls_atoms_out(single: Trap, rubidium: State) -> None:
    weak = single.with_powers_scaled(0.1)
    assert survey(replace(weak, coils=Coils(levitation=0.305)), rubidium).trapped
    check_empty(survey(replace(weak, coils=Coils(levitation=0.7)), rubidium), NotTrapped.LEVITATION)


def test_metastable_helium_is_pushed_out_at_1064_nm(crossed: Trap) -> None:
    check_empty(survey(crossed, load_species("4He*").state()), NotTrapped.BLUE_LIGHT)
