"""Scattering lengths between two species or states: as the data have them, and why there is none."""

from __future__ import annotations

import pytest

from physics.constants import bohr_radius
from physics.pair_scattering import WhyNoLength, length_between
from physics.particles import Certainty
from physics.species import State, load_species
from physics.species_tables import load_pairs


def state(key: str, name: str | None = None) -> State:
    return load_species(key).state(name)


def test_a_pair_of_the_data_by_its_states() -> None:
    # Ferlaino et al., Phys. Rev. A 73, 040702 (2006), erratum 74, 039903: -215(10) a0.
    found = length_between(state("40K", "F=9/2 mF=+9/2"), state("87Rb", "F=2 mF=+2"))
    assert found.value == pytest.approx(-215.0 * bohr_radius)
    assert found.certainty is Certainty.SEEN
    assert found.uncertainty == "10"
    assert "Ferlaino" in found.source


def test_the_order_does_not_matter() -> None:
    for pair in load_pairs():
        first, second = (load_species(key).states for key, _ in (pair.first, pair.second))
        for a in first:
            for b in second:
                for field in (None, 0.0035):
                    there, back = length_between(a, b, field), length_between(b, a, field)
                    assert there.value == back.value
                    assert there.reason == back.reason


def test_other_states_than_those_of_the_data_are_unknown() -> None:
    found = length_between(state("40K", "F=9/2 mF=-9/2"), state("87Rb", "F=1 mF=-1"))
    assert found.value is None
    assert found.reason is WhyNoLength.OTHER_STATES
    assert [pair.scattering_length.text for pair in found.others] == ["-215 a0"]


def test_whichever_state_of_a_closed_shell() -> None:
    found = length_between(state("87Rb", "F=1 mF=-1"), state("174Yb"))
    assert found.value == pytest.approx(880.0 * bohr_radius)
    assert length_between(state("173Yb"), state("174Yb")).value == pytest.approx(138.7 * bohr_radius)


def test_only_the_magnitude_is_known() -> None:
    found = length_between(state("6Li"), state("174Yb"))
    assert found.sign_unknown
    assert found.value == pytest.approx(18.9 * bohr_radius)


def test_a_field_goes_through_the_resonances() -> None:
    # abg (1 - Delta/(B - B0)) with -189 a0, -3.1 G, 546.9 G: Klempt et al., Phys. Rev. A 78, 061602 (2008), recalled.
    pair = state("40K", "F=9/2 mF=-9/2"), state("87Rb", "F=1 mF=+1")
    found = length_between(*pair, 550e-4)
    assert found.from_resonances
    assert found.certainty is Certainty.MEMORY
    expected = -189.0 * (1.0 + 3.1 / (550.0 - 546.9)) * bohr_radius
    assert found.value == pytest.approx(expected, rel=0.02)
    assert length_between(*pair).reason is WhyNoLength.NEEDS_FIELD
    assert length_between(*pair, 3.0).reason is WhyNoLength.OUTSIDE_RANGE
    assert length_between(*pair, 546.9e-4).reason is WhyNoLength.AT_POLE


def test_two_states_of_one_species() -> None:
    lower, upper = state("6Li", "F=1/2 mF=+1/2"), state("6Li", "F=1/2 mF=-1/2")
    found = length_between(lower, upper, 0.08)
    mixture = state("6Li", "F=1/2 mF=+1/2 and F=1/2 mF=-1/2")
    from physics.scattering import length_at_field

    assert found.value == length_at_field(mixture, 0.08).value
    assert length_between(lower, lower).reason is WhyNoLength.SAME
    assert length_between(state("87Rb", "F=1 mF=-1"), state("87Rb", "F=2 mF=+2")).reason is WhyNoLength.NOT_IN_DATA


def test_unknown_pairs() -> None:
    assert length_between(state("1H"), state("87Rb")).reason is WhyNoLength.NOT_IN_DATA
    with pytest.raises(ValueError, match="field must be a finite number of tesla, got nan"):
        length_between(state("1H"), state("87Rb"), float("nan"))
