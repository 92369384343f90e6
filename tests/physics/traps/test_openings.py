"""In how many directions a trap is open."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from physics.constants import boltzmann, standard_gravity
from physics.species import State
from physics.traps import Coils, HarmonicTrap, Trap
from physics.traps.survey import survey, survey_of_harmonic


def test_a_beam_without_gravity_is_open_all_around(single: Trap, rubidium: State) -> None:
    found = survey(replace(single, gravity=None), rubidium)
    assert found.depth is not None
    share = found.open_share(0.05 * found.depth / boltzmann)
    assert share is not None
    # but for the few rays along the beam, where the light fades slowly
    assert share > 0.9


def test_arms_of_crossed_beams_are_no_way_out(crossed: Trap, rubidium: State) -> None:
    free = survey(replace(crossed, gravity=None), rubidium)
    barriers = free.barriers
    assert barriers is not None
    assert np.any(np.isinf(barriers))
    assert np.count_nonzero(np.isinf(barriers)) < 0.5 * len(barriers)


def test_gravity_leaves_a_narrow_way_which_heat_widens(crossed: Trap, rubidium: State) -> None:
    found = survey(crossed.with_powers_scaled(0.4), rubidium)
    assert found.depth is not None
    kelvin = found.depth / boltzmann
    cold, warm = found.open_share(0.02 * kelvin), found.open_share(0.3 * kelvin)
    assert cold is not None
    assert warm is not None
    assert 0.0 < cold < warm < 0.5


def test_a_knife_cuts_a_tilted_quadrupole_on_one_side(rubidium: State) -> None:
    # U = mu B on the knife's surface is the same all around, but for gravity: m g z. With b = m g/(mu B') and r the
    # surface's reach on the axis, the barrier at the height z is h f m + m g z, least at the foot: open are heights
    # up to z_low + kT/(m g).
    gradient, frequency = 1.6, 18e6
    trap = Trap(coils=Coils(gradient=gradient, knife=frequency))
    found = survey(trap, rubidium)
    assert found.potential is not None
    assert found.barriers is not None
    assert found.depth == pytest.approx(float(np.min(found.barriers)), rel=2e-2)
    level = survey(replace(trap, gravity=None), rubidium)
    assert level.barriers is not None
    np.testing.assert_allclose(level.barriers, level.depth, rtol=0.08)  # rays look at places, not at the surface
    assert level.open_share(0.1 * level.depth / boltzmann) == 1.0  # type: ignore[operator]
    weight = rubidium.mass * standard_gravity
    assert float(np.max(found.barriers) - np.min(found.barriers)) == pytest.approx(2.0 * weight * 1.6e-3, rel=0.15)


def test_a_harmonic_trap_has_no_openings(rubidium: State) -> None:
    found = survey_of_harmonic(HarmonicTrap(frequencies=[100.0, 100.0, 100.0], depth=1e-29), rubidium.mass)
    assert found.barriers is None
    assert found.open_share(1e-7) is None


def test_nothing_that_is_held_nowhere_is_open(single: Trap, rubidium: State) -> None:
    assert survey(single.with_beam("A", power=1e-3), rubidium).open_share(1e-7) is None
