"""Ticks: round places, plain texts."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.figures.picture import Axis
from app.figures.ticks import axis_title, power_text, prefixed, ticks_of, to_data, to_drawing


def axis(low: float, high: float, **more: object) -> Axis:
    return Axis(label="x", unit=more.pop("unit", "m"), low=low, high=high, **more)


@pytest.mark.parametrize(
    ("shown", "texts"),
    [
        (axis(1e3, 1e8, log=True), ("10³", "10⁴", "10⁵", "10⁶", "10⁷", "10⁸")),
        (axis(1e-9, 1e-3, log=True, prefixed=True, unit="K"),
         ("1 nK", "10 nK", "100 nK", "1 µK", "10 µK", "100 µK", "1 mK")),
        (axis(0.01, 100.0, log=True), ("0.01", "0.1", "1", "10", "100")),
        (axis(1e-18, 1e3, log=True, prefixed=True, unit="K"),
         ("0.001 fK", "1 fK", "1 pK", "1 nK", "1 µK", "1 mK", "1 K", "1 kK")),
        (axis(0.5, 30.0, log=True), ("0.5", "1", "2", "5", "10", "20")),
        (axis(-100.0, 100.0), ("−100", "−50", "0", "50", "100")),
        (axis(0.0, 1.05), ("0.0", "0.2", "0.4", "0.6", "0.8", "1.0")),
        (axis(0.0, 6e19), ("0", "10¹⁹", "2×10¹⁹", "3×10¹⁹", "4×10¹⁹", "5×10¹⁹", "6×10¹⁹")),
        (axis(0.0, 3e19), ("0", "0.5×10¹⁹", "1.0×10¹⁹", "1.5×10¹⁹", "2.0×10¹⁹", "2.5×10¹⁹", "3.0×10¹⁹")),
        (axis(0.0, 5e-6, prefixed=True), ("0 m", "1 µm", "2 µm", "3 µm", "4 µm", "5 µm")),
        (axis(2.0e-7, 3.0e-7, log=True, prefixed=True, unit="K"),
         ("200 nK", "220 nK", "240 nK", "260 nK", "280 nK", "300 nK")),
    ],
)  # fmt: skip
def test_ticks_read_as_a_person_would_write_them(shown, texts):
    assert ticks_of(shown).texts == texts


def test_many_decades_are_thinned_and_the_rest_are_short_ticks():
    ticks = ticks_of(axis(1e-20, 1e20, log=True), 8)
    assert len(ticks.places) <= 8
    assert set(ticks.minor) | set(ticks.places) >= set(range(-19, 20))


@given(
    low=st.floats(-200, 200), width=st.floats(0.05, 60), log=st.booleans(), most=st.integers(2, 10), unit=st.booleans()
)
def test_ticks_stay_on_the_axis_in_order_and_tell_places_apart(low, width, log, most, unit):
    shown = axis(10.0**low, 10.0 ** (low + width), log=True, prefixed=unit) if log else axis(low, low + width)
    ticks = ticks_of(shown, most)
    places = np.array(ticks.places)
    start, end = to_drawing(shown, shown.low), to_drawing(shown, shown.high)
    assert np.all(np.diff(places) > 0)
    assert np.all((places > start - 1e-6) & (places < end + 1e-6))
    assert len(places) <= max(2 * most, 12)
    assert len(set(ticks.texts)) == len(ticks.texts)


@given(st.floats(1e-30, 1e30))
def test_drawing_units_lead_back_to_data(value):
    shown = axis(1e-30, 1e30, log=True)
    assert to_data(shown, to_drawing(shown, value)) == pytest.approx(value, rel=1e-12)


def test_values_without_place_on_a_logarithmic_axis_become_nan():
    drawn = to_drawing(axis(1.0, 10.0, log=True), np.array([-1.0, 0.0, np.nan, np.inf, 100.0]))
    np.testing.assert_array_equal(drawn, [np.nan, np.nan, np.nan, np.nan, 2.0])
    assert np.isnan(to_drawing(axis(1.0, 10.0, log=True), 0.0))


def test_small_texts():
    assert power_text(1e-7) == "10⁻⁷"
    assert power_text(-2e5) == "−2×10⁵"
    assert prefixed(1.5e-7, "K") == "150 nK"
    assert prefixed(0.0, "K") == "0 K"
    assert axis_title(axis(0.0, 1.0)) == "x [m]"
    assert axis_title(axis(0.0, 1.0, unit="cm^-3 s^-1")) == "x [cm⁻³ s⁻¹]"
    assert axis_title(axis(0.0, 1.0, prefixed=True)) == "x"
    assert axis_title(axis(0.0, 1.0, unit="")) == "x"
