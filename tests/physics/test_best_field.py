"""Fields for a wish, against closed forms of a single resonance a(B) = abg (1 - Delta/(B - B0)), eq. (1) of C. Chin,
R. Grimm, P. Julienne, E. Tiesinga, Rev. Mod. Phys. 82, 1225 (2010)."""

from __future__ import annotations

import numpy as np
import pytest

from physics.best_field import NEARLY, best_field, fields_of_length
from physics.checks import Floats
from physics.constants import bohr_radius
from physics.scattering import scattering_length_at_field, tuning
from physics.species import load_species
from physics.species_tables import ResonanceForm

GAUSS = 1e-4


@pytest.fixture(scope="module")
def rubidium() -> tuple[ResonanceForm, ...]:
    """85Rb, one pole: B0 = 155.041 G, Delta = 10.71 G, abg = -443 a0 (recalled), described from 100 to 250 G."""
    return tuning(load_species("85Rb").state("F=2 mF=-2"))


def of_one_pole(length: float) -> float:
    """B = B0 + Delta/(1 - a/abg), solved for the field."""
    return GAUSS * (155.041 + 10.71 / (1.0 - length / -443.0))


@pytest.mark.parametrize("wanted", [-2000.0, -500.0, -300.0, 0.0, 50.0, 200.0, 5000.0])
def test_a_wanted_length_is_found_where_the_closed_form_has_it(
    rubidium: tuple[ResonanceForm, ...], wanted: float
) -> None:
    expected = of_one_pole(wanted)
    found = fields_of_length(rubidium, 100 * GAUSS, 250 * GAUSS, wanted * bohr_radius)
    if not 100 * GAUSS < expected < 250 * GAUSS:
        assert found == ()
        return
    (place,) = found
    assert place.field == pytest.approx(expected, abs=1e-10)
    assert place.length == pytest.approx(wanted * bohr_radius, rel=1e-7, abs=1e-7 * bohr_radius)
    # da/dB = abg Delta/(B - B0)^2.
    slope = -443.0 * bohr_radius * 10.71 * GAUSS / (place.field - 155.041 * GAUSS) ** 2
    assert place.slope == pytest.approx(slope, rel=1e-3)


def test_the_gentlest_of_several_fields_comes_first() -> None:
    potassium = tuning(load_species("39K").state("F=1 mF=+1"))
    found = fields_of_length(potassium, 0.0, 800 * GAUSS, 100 * bohr_radius)
    assert len(found) > 1
    slopes = [abs(place.slope) for place in found]
    assert slopes == sorted(slopes)
    for place in found:
        assert scattering_length_at_field(potassium, place.field) == pytest.approx(100 * bohr_radius, rel=1e-9)
    # The broad resonance at 402.7 G tunes more gently than the narrow ones at 25.85 and 752.3 G.
    assert 350 * GAUSS < found[0].field < 402.7 * GAUSS


def test_the_best_field_is_where_the_gain_is_largest(rubidium: tuple[ResonanceForm, ...]) -> None:
    # a^2/(1 + (a/s)^4) is largest at a = s, and at 0.9 of that where (a/s)^2 = (1 -+ sqrt(0.19))/0.9.
    scale = 150.0

    def gain(length: Floats) -> Floats:
        x = length / (scale * bohr_radius)
        return np.where(x > 0.0, x**2 / (1.0 + x**4), np.nan)

    found = best_field(rubidium, 100 * GAUSS, 250 * GAUSS, gain)
    assert found is not None
    assert found.field == pytest.approx(of_one_pole(scale), abs=1e-4 * GAUSS)
    assert found.length == pytest.approx(scale * bohr_radius, rel=1e-4)
    assert not found.at_end
    near, far = (scale * np.sqrt((1.0 + sign * np.sqrt(1.0 - NEARLY**2)) / NEARLY) for sign in (1.0, -1.0))
    assert found.low == pytest.approx(of_one_pole(near), abs=2e-2 * GAUSS)
    assert found.high == pytest.approx(of_one_pole(far), abs=2e-2 * GAUSS)


def test_the_end_of_the_range_is_told(rubidium: tuple[ResonanceForm, ...]) -> None:
    found = best_field(rubidium, 157 * GAUSS, 160 * GAUSS, lambda length: length)
    assert found is not None
    assert found.at_end
    assert found.field == pytest.approx(157 * GAUSS)


@pytest.mark.parametrize(("low", "high"), [(300.0, 400.0), (170.0, 200.0)])
def test_without_a_gain_there_is_no_best_field(rubidium: tuple[ResonanceForm, ...], low: float, high: float) -> None:
    """Beyond what the data describe, and where the length is negative."""
    positive = best_field(rubidium, low * GAUSS, high * GAUSS, lambda length: np.where(length > 0.0, length, np.nan))
    assert positive is None


def test_a_range_runs_from_low_to_high(rubidium: tuple[ResonanceForm, ...]) -> None:
    with pytest.raises(ValueError, match=r"must run from low to high, got 0\.02 T to 0\.01 T"):
        best_field(rubidium, 0.02, 0.01, lambda length: length)
    with pytest.raises(ValueError, match="must run from low to high"):
        fields_of_length(rubidium, 0.01, 0.01, 0.0)
