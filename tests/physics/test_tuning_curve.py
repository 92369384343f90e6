"""The curve a(B) over a range: where it diverges, where it vanishes, where nothing is known."""

from __future__ import annotations

import numpy as np
import pytest

from physics.constants import bohr_radius
from physics.scattering import scattering_length_at_field, tuning
from physics.species import load_species
from physics.tuning_curve import TuningCurve, tuning_curve

G = 1e-4


def curve(key: str, name: str | None, low: float, high: float) -> TuningCurve:
    """Between two fields in gauss."""
    return tuning_curve(tuning(load_species(key).state(name)), low * G, high * G)


def gauss(fields: tuple[float, ...]) -> list[float]:
    return [field / G for field in fields]


@pytest.mark.parametrize(
    ("key", "name", "low", "high", "zero", "within"),
    [
        # Published zeros, from memory.
        ("85Rb", "F=2 mF=-2", 100, 250, 165.75, 0.01),  # Claussen et al., Phys. Rev. A 67, 060701 (2003): 165.750(13)
        ("39K", "F=1 mF=+1", 300, 400, 350.4, 1.0),  # D'Errico et al., New J. Phys. 9, 223 (2007): 350.4(1)
        ("39K", "F=1 mF=-1", 450, 550, 504.0, 1.0),  # the same
        ("133Cs", "F=3 mF=+3", 0, 40, 17.1, 0.2),  # Chin et al., Rev. Mod. Phys. 82, 1225 (2010): 17.1
        # Regal's and Ludewig's values span 209 to 210.
        ("40K", "F=9/2 mF=-9/2 and F=9/2 mF=-7/2", 203, 300, 209.5, 0.6),
    ],
)
def test_zeros_are_where_experiments_found_them(
    key: str, name: str, low: float, high: float, zero: float, within: float
) -> None:
    found = gauss(curve(key, name, low, high).zeros)
    assert len(found) == 1
    assert found[0] == pytest.approx(zero, abs=within)


def test_a_pole_parts_two_pieces_and_is_no_zero() -> None:
    found = curve("85Rb", "F=2 mF=-2", 100, 160)
    assert gauss(found.poles) == pytest.approx([155.041])
    assert found.zeros == ()
    broken = np.isnan(found.length)
    assert found.field[broken] / G == pytest.approx([155.041, 160.0])
    # One sign on either side, and steep on both: beyond ten times the background.
    left, right = found.length[found.field < 155.041 * G], found.length[(found.field > 155.041 * G) & ~broken]
    assert np.all(left < 0.0)
    assert np.all(right > 0.0)
    assert np.nanmin(left) < -4430 * bohr_radius
    assert np.nanmax(right) > 4430 * bohr_radius


def test_points_lie_on_the_curve_and_rise() -> None:
    found = curve("39K", "F=1 mF=-1", 0, 700)
    assert np.all(np.diff(found.field) >= 0.0)
    known = ~np.isnan(found.length)
    forms = tuning(load_species("39K").state("F=1 mF=-1"))
    at_edge = np.isin(found.field, [edge for form in forms for edge in (form.low, form.high)])
    inside = known & ~at_edge
    np.testing.assert_allclose(found.length[inside], scattering_length_at_field(forms, found.field[inside]), rtol=1e-12)


def test_what_no_form_describes_is_a_gap() -> None:
    found = curve("133Cs", "F=3 mF=+3", 0, 1000)
    assert np.array(found.ranges) / G == pytest.approx(np.array([[0, 150], [500, 900]]))
    assert np.array(found.gaps) / G == pytest.approx(np.array([[150, 500], [900, 1000]]))
    inside = (found.field > 150.0001 * G) & (found.field < 499.9999 * G)
    assert not np.any(inside)


def test_where_two_forms_overlap_the_narrower_decides() -> None:
    whole = curve("40K", "F=9/2 mF=-9/2 and F=9/2 mF=-7/2", 150, 300)
    assert np.array(whole.ranges) / G == pytest.approx(np.array([[150, 300]]))
    narrow = curve("6Li", None, 500, 700)
    assert np.array(narrow.ranges) / G == pytest.approx(np.array([[541, 545.5]]))


def test_a_state_without_resonances_has_an_empty_curve() -> None:
    found = tuning_curve((), 0.0, 0.1)
    assert found.field.size == 0
    assert found.gaps == ((0.0, 0.1),)


@pytest.mark.parametrize(("low", "high"), [(0.1, 0.1), (0.2, 0.1), (float("nan"), 1.0), (0.0, float("inf"))])
def test_a_range_that_is_none_is_refused(low: float, high: float) -> None:
    with pytest.raises(ValueError, match="must run from low to high"):
        tuning_curve((), low, high)
