"""A trap as the sum of its parts."""

from __future__ import annotations

import numpy as np
import pytest

from physics.traps import Coils, GaussianBeam, Gravity, Trap


def test_beams_that_are_off_or_without_power_do_not_shine(crossed: Trap) -> None:
    assert [beam.name for beam in crossed.shining] == ["A", "B"]
    assert [beam.name for beam in crossed.with_beam("A", on=False).shining] == ["B"]
    assert [beam.name for beam in crossed.with_beam("B", power=0.0).shining] == ["A"]


def test_a_changed_beam_keeps_its_place(crossed: Trap) -> None:
    changed = crossed.with_beam("A", power=1.0)
    assert [(beam.name, beam.power) for beam in changed.beams] == [("A", 1.0), ("B", 1.7)]
    assert [beam.power for beam in crossed.with_powers_scaled(2.0).beams] == [5.0, 3.4]
    with pytest.raises(ValueError, match=r"^no beam C in the trap; its beams are A, B$"):
        crossed.with_beam("C", power=1.0)


def test_coils_can_be_changed() -> None:
    changed = Trap(coils=Coils(gradient=1.0)).with_coils(knife=1e6).coils
    assert changed is not None
    assert (changed.gradient, changed.knife) == (1.0, 1e6)
    with pytest.raises(ValueError, match=r"^the trap has no coils to change$"):
        Trap().with_coils(knife=1e6)


def test_names_must_differ() -> None:
    beam = GaussianBeam(name="A", wavelength=1e-6, power=1.0, waists=1e-5, direction=(1, 0, 0))
    with pytest.raises(ValueError, match=r"^beams must have different names, got 2 of name A$"):
        Trap(beams=(beam, beam))


def test_levitation_needs_gravity() -> None:
    with pytest.raises(
        ValueError, match=r"^levitation is a gradient along gravity, which must be on, got gravity off$"
    ):
        Trap(coils=Coils(levitation=0.3), gravity=None)
    assert Trap(coils=Coils(bias=1e-4, levitation=0.0), gravity=None).gravity is None


def test_gravity_has_a_direction_without_a_length() -> None:
    assert np.asarray(Gravity(direction=(0, 0, -9.81)).direction) == pytest.approx([0.0, 0.0, -1.0])
    with pytest.raises(ValueError, match="direction of gravity must not be zero"):
        Gravity(direction=(0, 0, 0))
