"""Traps solved backwards."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from types import SimpleNamespace
from typing import Any

import pytest

from physics.constants import boltzmann, standard_gravity
from physics.light import light_shift, polarizability
from physics.species import State, load_species
from physics.traps import Coils, Trap, solving
from physics.traps.solving import (
    NoSolution,
    Solved,
    levitation_gradient,
    lowest_power,
    lowest_value,
    solve,
)
from physics.traps.survey import Survey, survey


def depth(found: Survey) -> float | None:
    return found.depth


def mean_frequency(found: Survey) -> float | None:
    return found.mean_frequency


def power_for(reading: Callable[[Survey], float | None], target: float, trap: Trap, beam: str, state: State) -> Solved:
    return solve(
        lambda power: trap.with_beam(beam, power=power), reading, target, 1.0, state, control=f"power of {beam} in W"
    )


def test_lowest_power_of_one_beam_is_that_of_its_formula(single: Trap, rubidium: State) -> None:
    # U0 = (sqrt(e)/2) m g w0: the steepest slope of the profile, at half the waist, carries the atom.
    found = lowest_power(single, rubidium, "A")
    alpha = polarizability(rubidium.isotope, 1064e-9).value
    assert alpha is not None
    U0 = -float(light_shift(alpha, replace(single.beams[0], power=found).peak_intensity))
    assert U0 / (rubidium.mass * standard_gravity * 70e-6) == pytest.approx(math.sqrt(math.e) / 2.0, rel=1e-5)
    assert survey(single.with_beam("A", power=1.001 * found), rubidium).trapped
    assert not survey(single.with_beam("A", power=0.999 * found), rubidium).trapped


def test_lowest_power_is_found_from_below_too(single: Trap, rubidium: State) -> None:
    from_above = lowest_power(single, rubidium, "A")
    assert lowest_power(single.with_beam("A", power=0.05), rubidium, "A") == pytest.approx(from_above, rel=1e-4)


def test_a_beam_that_is_not_needed_has_no_lowest_power(crossed: Trap, rubidium: State) -> None:
    with pytest.raises(NoSolution, match=r"^the trap holds atoms without beam A too$"):
        lowest_power(crossed, rubidium, "A")
    blue = Trap(beams=(replace(crossed.beams[0], wavelength=532e-9),))
    with pytest.raises(NoSolution, match=r"^the trap holds nothing up to a power of"):
        lowest_power(blue, rubidium, "A")


def test_the_lowest_value_of_any_control_is_found_by_halving(single: Trap, rubidium: State) -> None:
    by_halving = lowest_value(lambda power: single.with_beam("A", power=power), 1.0, rubidium)
    assert by_halving == pytest.approx(lowest_power(single, rubidium, "A"), rel=1e-4)
    # a quadrupole holds once mu B' = m g on its strong, upright axis
    assert rubidium.zeeman_slope is not None
    weight = rubidium.mass * standard_gravity
    gradient = lowest_value(lambda value: Trap(coils=Coils(gradient=value)), 1.0, rubidium)
    assert gradient == pytest.approx(weight / rubidium.zeeman_slope.value, rel=1e-5)
    free = replace(single, gravity=None)
    with pytest.raises(NoSolution, match=r"^the trap still holds atoms with a power in W of 0.00\d+$"):
        lowest_value(lambda power: free.with_beam("A", power=power), 1.0, rubidium, control="power in W")
    with pytest.raises(NoSolution, match=r"^the trap holds nothing with a power in W from 1e-08 to 2.05e-05$"):
        lowest_value(lambda power: single.with_beam("A", power=power), 1e-8, rubidium, control="power in W")
    with pytest.raises(ValueError, match=r"^value must start from a positive value, got 0$"):
        lowest_value(lambda power: single.with_beam("A", power=power), 0.0, rubidium)


def test_power_for_a_depth_and_for_a_mean_frequency(crossed: Trap, rubidium: State) -> None:
    deep = power_for(depth, 80e-6 * boltzmann, crossed, "A", rubidium)
    assert deep.survey.depth == pytest.approx(80e-6 * boltzmann, rel=1e-4)
    assert survey(crossed.with_beam("A", power=deep.value), rubidium).depth == deep.survey.depth
    stiff = power_for(mean_frequency, 350.0, crossed, "B", rubidium)
    assert stiff.survey.mean_frequency == pytest.approx(350.0, rel=1e-5)
    assert stiff.trap.beam("B").power == stiff.value
    assert stiff.trap.beam("A").power == 2.5


def test_without_gravity_all_powers_follow_the_square_of_the_frequency(crossed: Trap, rubidium: State) -> None:
    free = replace(crossed, gravity=None)
    now = survey(free, rubidium)
    assert now.mean_frequency is not None
    assert now.depth is not None
    doubled = solve(free.with_powers_scaled, mean_frequency, 2.0 * now.mean_frequency, 1.0, rubidium)
    assert doubled.value == pytest.approx(4.0, rel=1e-5)
    halved = solve(free.with_powers_scaled, depth, 0.5 * now.depth, 1.0, rubidium)
    assert halved.value == pytest.approx(0.5, rel=1e-5)


def test_a_measured_frequency_calibrates_a_waist(single: Trap, rubidium: State) -> None:
    free = replace(single, gravity=None)
    true = free.with_beam("A", power=2.2, waists=(90e-6, 40e-6))
    measured = float(survey(true, rubidium).frequencies[2])
    found = solve(
        lambda waist: true.with_beam("A", waists=(90e-6, waist)),
        lambda seen: float(seen.frequencies[2]),
        measured,
        50e-6,
        rubidium,
    )
    assert found.value == pytest.approx(40e-6, rel=1e-5)


def test_the_levitation_gradient_carries_the_atom() -> None:
    for key, name in (("87Rb", "F=1 mF=-1"), ("133Cs", "F=3 mF=+3")):
        state = load_species(key).state(name)
        weak = levitation_gradient(state)
        assert state.zeeman_slope is not None
        assert weak * abs(state.zeeman_slope.value) == pytest.approx(state.mass * standard_gravity, rel=1e-12)
    with pytest.raises(ValueError, match=r"^88Sr in ground state has no known magnetic moment"):
        levitation_gradient(load_species("88Sr").state())


def test_gradients_are_solved_for_as_well(rubidium: State) -> None:
    trap = Trap(coils=Coils(gradient=1.0, knife=2e6))
    # The knife takes atoms at the bottom: h f (1 - m g/(mu B')) is three quarters of h f.
    slope = rubidium.zeeman_slope
    assert slope is not None
    found = solve(
        lambda gradient: trap.with_coils(gradient=gradient),
        depth,
        0.75 * 6.62607015e-34 * 2e6,
        1.0,
        rubidium,
        control="gradient in T/m",
    )
    assert found.value == pytest.approx(4.0 * rubidium.mass * standard_gravity / slope.value, rel=1e-5)


def test_a_narrow_peak_is_climbed_and_its_other_side_told(monkeypatch: pytest.MonkeyPatch, rubidium: State) -> None:
    # A depth as of levitated atoms: nothing but within 5 % of a gradient of 1 T/m, where it has its peak.
    def surveyed(trap: Trap, _state: State) -> Any:
        assert trap.coils is not None
        assert trap.coils.levitation is not None
        return SimpleNamespace(depth=max(0.0, 1.0 - 20.0 * abs(trap.coils.levitation - 1.0)))

    def lifted(gradient: float) -> Trap:
        return Trap(coils=Coils(levitation=gradient))

    monkeypatch.setattr(solving, "survey", surveyed)
    far = solve(lifted, depth, 0.6, 0.3, rubidium, likely=(1.0,))
    assert (far.value, far.also) == (pytest.approx(0.98), None)
    both = solve(lifted, depth, 0.6, 1.001, rubidium)
    assert (both.value, both.also) == (pytest.approx(1.02), pytest.approx(0.98))
    between_the_steps = solve(lifted, depth, 0.99, 1.004, rubidium)
    assert abs(between_the_steps.value - 1.0) == pytest.approx(5e-4, rel=1e-3)
    with pytest.raises(NoSolution, match=r"^no gradient from \S+ to \S+ gives the wanted value$") as none:
        solve(lifted, depth, 1.2, 1.004, rubidium, control="gradient")
    assert none.value.closest == (pytest.approx(1.0, abs=2e-4), pytest.approx(1.0, abs=4e-3))
    with pytest.raises(NoSolution) as none:
        solve(lifted, lambda _found: None, 1.2, 1.004, rubidium)
    assert none.value.closest is None


def test_what_cannot_be_is_said_in_one_sentence(crossed: Trap, single: Trap, rubidium: State) -> None:
    with pytest.raises(NoSolution, match=r"^no power of A in W from \S+ to \S+ gives the wanted value$"):
        power_for(depth, 1e-6 * boltzmann, crossed, "A", rubidium)
    with pytest.raises(NoSolution, match=r"^no power of A in W gives the wanted value: where the trap lets go"):
        power_for(mean_frequency, 5.0, single, "A", rubidium)
    with pytest.raises(ValueError, match=r"^wanted value must be positive, got 0$"):
        power_for(depth, 0.0, crossed, "A", rubidium)
    with pytest.raises(ValueError, match=r"^value must start from a positive value, got 0$"):
        solve(crossed.with_powers_scaled, depth, 1.0, 0.0, rubidium)
