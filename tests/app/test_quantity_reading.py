"""Quantities that are typed: what is read, what is refused and how it is said."""

from __future__ import annotations

import os

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

import app.kinds
from app.units import (
    ATOM_NUMBER,
    BEAM_POWER,
    BEAM_WAIST,
    BIAS_FIELD,
    DEPTH,
    EFFICIENCY,
    FIELD_CURVATURE,
    FIELD_GRADIENT,
    FREQUENCY,
    MAGNETIC_FIELD,
    POSITION,
    RADIO_FREQUENCY,
    SCATTERING_LENGTH,
    TEMPERATURE,
    WAVELENGTH,
    Kind,
    QuantityError,
    localised,
    read_quantity,
    unit_of,
)
from physics import constants

KINDS = tuple(kind for kind in vars(app.kinds).values() if isinstance(kind, Kind))
CAMPAIGN = 10_000 if os.environ.get("COLDWARD_LONG") == "1" else 100
h, k = constants.planck, constants.boltzmann


@pytest.mark.parametrize(
    ("text", "kind", "value", "sigma"),
    [
        ("200 nK", TEMPERATURE, 2e-7, None),
        ("200nK", TEMPERATURE, 2e-7, None),
        ("  200   nK ", TEMPERATURE, 2e-7, None),
        ("200\u00a0nK", TEMPERATURE, 2e-7, None),
        (".5 uK", TEMPERATURE, 5e-7, None),
        ("5. uK", TEMPERATURE, 5e-6, None),
        ("1.20(5) µK", TEMPERATURE, 1.2e-6, 5e-8),  # micro sign, U+00B5
        ("1.20(5) \u03bcK", TEMPERATURE, 1.2e-6, 5e-8),  # Greek mu, U+03BC
        ("1.20(5) uK", TEMPERATURE, 1.2e-6, 5e-8),
        ("12.3(1.2) uK", TEMPERATURE, 1.23e-5, 1.2e-6),
        ("1.20 ± 0.05 µK", TEMPERATURE, 1.2e-6, 5e-8),
        ("1.20 +/- 0.05 µK", TEMPERATURE, 1.2e-6, 5e-8),
        ("1.20+-0.05 µK", TEMPERATURE, 1.2e-6, 5e-8),
        ("(1.20 ± 0.05) µK", TEMPERATURE, 1.2e-6, 5e-8),
        ("(1.0 ± 0.1)e-7 K", TEMPERATURE, 1e-7, 1e-8),
        ("1.0e-7 ± 2e-8 K", TEMPERATURE, 1e-7, 2e-8),
        ("200(10) nK", TEMPERATURE, 2e-7, 1e-8),
        ("2.5e-6 K", TEMPERATURE, 2.5e-6, None),
        ("2.5×10^-6 K", TEMPERATURE, 2.5e-6, None),
        ("2.5 x 10^-6 K", TEMPERATURE, 2.5e-6, None),
        ("2.5·10⁻⁶ K", TEMPERATURE, 2.5e-6, None),
        ("2.5*10**-6 K", TEMPERATURE, 2.5e-6, None),
        ("4.2 kHz", TEMPERATURE, h * 4200 / k, None),
        ("0.5 neV", TEMPERATURE, 0.5e-9 * constants.elementary_charge / k, None),
        ("6.6e-30 J", TEMPERATURE, 6.6e-30 / k, None),
        ("5 µK", DEPTH, k * 5e-6, None),
        ("100 kHz", DEPTH, h * 1e5, None),
        ("7e-29 J", DEPTH, 7e-29, None),
        ("120 Hz", FREQUENCY, 120.0, None),
        ("2pi x 120 Hz", FREQUENCY, 120.0, None),
        ("2π×120 Hz", FREQUENCY, 120.0, None),
        ("2pi*120 Hz", FREQUENCY, 120.0, None),
        ("2 π · 120(2) Hz", FREQUENCY, 120.0, 2.0),
        ("2π × (120 ± 2) Hz", FREQUENCY, 120.0, 2.0),
        ("0.12 kHz", FREQUENCY, 120.0, None),
        ("1.0(1)e5", ATOM_NUMBER, 1e5, 1e4),
        ("1.0(1)×10^5", ATOM_NUMBER, 1e5, 1e4),
        ("10^5", ATOM_NUMBER, 1e5, None),
        ("10⁵", ATOM_NUMBER, 1e5, None),
        ("1E5", ATOM_NUMBER, 1e5, None),
        ("100.4 a0", SCATTERING_LENGTH, 100.4 * constants.bohr_radius, None),
        ("-20a0", SCATTERING_LENGTH, -20 * constants.bohr_radius, None),
        ("\u221220 a0", SCATTERING_LENGTH, -20 * constants.bohr_radius, None),
        ("5.3 nm", SCATTERING_LENGTH, 5.3e-9, None),
        ("0 a0", SCATTERING_LENGTH, 0.0, None),
        ("155.2 G", MAGNETIC_FIELD, 155.2e-4, None),
        ("15.52 mT", MAGNETIC_FIELD, 155.2e-4, None),
        ("2.5", EFFICIENCY, 2.5, None),
        ("1064 nm", WAVELENGTH, 1.064e-6, None),
        ("250 mW", BEAM_POWER, 0.25, None),
        ("70(2) um", BEAM_WAIST, 7e-5, 2e-6),
        ("-0.1 mm", POSITION, -1e-4, None),
        ("1.5 G", BIAS_FIELD, 1.5e-4, None),
        ("30.5 G/cm", FIELD_GRADIENT, 0.305, None),
        ("150 G/cm^2", FIELD_CURVATURE, 150.0, None),
        ("150 G/cm²", FIELD_CURVATURE, 150.0, None),
        ("2.1 MHz", RADIO_FREQUENCY, 2.1e6, None),
    ],
)
def test_a_quantity_is_read_in_si(text: str, kind: Kind, value: float, sigma: float | None) -> None:
    read = read_quantity(text, kind)
    assert read.value == pytest.approx(value, rel=1e-15, abs=0.0)
    assert read.sigma == (None if sigma is None else pytest.approx(sigma, rel=1e-15))
    assert read.text == text.strip()


def test_decimal_texts_become_the_nearest_double() -> None:
    """No factor is multiplied in floating point: 0.3 µK and 300 nK are one number, and the literal's."""
    assert read_quantity("0.3 µK", TEMPERATURE).value == read_quantity("300 nK", TEMPERATURE).value == 3e-7


@pytest.mark.parametrize(
    ("text", "kind", "sentence"),
    [
        ("", TEMPERATURE, r'^temperature is missing: type for instance "200 nK"$'),
        ("200", TEMPERATURE, r'^temperature needs a unit: type for instance "200 nK", not "200"$'),
        ("nK", TEMPERATURE, r'^temperature: "nK" does not begin with a number$'),
        ("200 nk", TEMPERATURE, r'^"nk" is not a unit of temperature: nK, .* are read; did you mean nK\?$'),
        ("200 degC", TEMPERATURE, r'^"degC" is not a unit of temperature'),
        ("1 kB*µK", TEMPERATURE, r'^"kB\*µK" is not a unit of temperature'),
        ("1 G", TEMPERATURE, r'^"G" is not a unit of temperature'),
        ("200 K", TEMPERATURE, r'^temperature must be from 1 pK to 10 K, got "200 K"$'),
        ("-3 nK", TEMPERATURE, r'must be from 1 pK to 10 K, got "-3 nK"$'),
        ("0 nK", TEMPERATURE, r'must be from 1 pK to 10 K, got "0 nK"$'),
        ("nan nK", TEMPERATURE, r"does not begin with a number$"),
        ("inf nK", TEMPERATURE, r"does not begin with a number$"),
        ("1,5 uK", TEMPERATURE, r'^temperature: the comma in "1,5" is not read: type "1.5" or "15"$'),
        ("1,500 uK", TEMPERATURE, r'the comma in "1,500" is not read: type "1.500" or "1500"$'),
        ("1 000 nK", TEMPERATURE, r'"1 000" is grouped: type the digits without spaces or marks between them$'),
        ("1\u202f000 nK", TEMPERATURE, r"is grouped"),
        ("1'000 nK", TEMPERATURE, r"is grouped"),
        ("1_000 nK", TEMPERATURE, r"is grouped"),
        ("1.000,5 nK", TEMPERATURE, r"more than one decimal mark"),
        ("1.2.3 nK", TEMPERATURE, r"more than one decimal mark"),
        ("1.20(5)(6) nK", TEMPERATURE, r'^"\(6\) nK" is not a unit of temperature'),
        ("12.3(1.25) uK", TEMPERATURE, r"must end at the same decimal place$"),
        ("1.20 ± -0.05 uK", TEMPERATURE, r"an uncertainty is a plain number above zero"),
        ("1.20(5) ± 0.05 uK", TEMPERATURE, r"an uncertainty is written once"),
        ("1.0 ± 0.1e5", ATOM_NUMBER, r'it is open whether the exponent holds .* type "\(1.0 ± 0.1\)e5"$'),
        ("1.0e5 ± 0.1", ATOM_NUMBER, r"it is open whether the exponent holds"),
        ("(1.0e5 ± 1e4)e2", ATOM_NUMBER, r"has two exponents$"),
        ("(1.0e5)", ATOM_NUMBER, r"brackets hold a number and its uncertainty"),
        ("(1.0 ± 0.1", ATOM_NUMBER, r"opens a bracket and does not close it$"),
        ("1e5 atoms", ATOM_NUMBER, r'^atom number is a pure number: type for instance "1.0e5", without "atoms"$'),
        ("0.5", ATOM_NUMBER, r'^atom number must be from 1 to 1e\+15, got "0.5"$'),
        ("1e999", ATOM_NUMBER, r"is beyond every number"),
        ("1e-999 nK", TEMPERATURE, r"is beyond every number"),
        ("2+3 nK", TEMPERATURE, r'^"\+3 nK" is not a unit of temperature'),
        ("2*3 nK", TEMPERATURE, r"is not a unit of temperature"),
        ("__import__('os') nK", TEMPERATURE, r"does not begin with a number$"),
        ("120 rad/s", FREQUENCY, r'^angular frequencies are not read: divide by 2π and type for instance "120 Hz"$'),
        ("120 1/s", FREQUENCY, r'^"1/s" is not a unit of trap frequency: Hz, kHz, MHz are read$'),
        ("7200 rpm", FREQUENCY, r'^"rpm" is not a unit'),
        ("2pi x 3 nK", TEMPERATURE, r'^"2π×" belongs to trap frequencies'),
        ("5 muB", DEPTH, r'^"muB" is not a unit of trap depth'),
        ("1\n0 nK", TEMPERATURE, r"is not readable"),
        ("1" * 200 + " nK", TEMPERATURE, r"is not readable"),
        ("٣ nK", TEMPERATURE, r"does not begin with a number$"),
    ],
)
def test_a_refusal_says_what_was_read_and_what_to_type(text: str, kind: Kind, sentence: str) -> None:
    with pytest.raises(QuantityError, match=sentence):
        read_quantity(text, kind)


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("3,5 uK", 3.5e-6),
        ("3.5 uK", 3.5e-6),
        ("1,500 uK", 1.5e-6),
        ("0.500 uK", 5e-7),
        ("1,20(5) uK", 1.2e-6),
        ("1234.567 nK", 1.234567e-6),
        ("2,5e-7 K", 2.5e-7),
        ("1.500 uK", r'"1.500" could be two numbers: type "1,500" or "1500"$'),
        ("12.345 uK", r"could be two numbers"),
        ("1.000,5 nK", r"more than one decimal mark"),
        ("1,000.5 nK", r"more than one decimal mark"),
        ("1,5,0 nK", r"more than one decimal mark"),
        ("1 000,5 nK", r"is grouped"),
    ],
)
def test_the_decimal_comma_where_it_is_the_custom(text: str, value: float | str) -> None:
    if isinstance(value, str):
        with pytest.raises(QuantityError, match=value):
            read_quantity(text, TEMPERATURE, decimal_comma=True)
        return
    read = read_quantity(text, TEMPERATURE, decimal_comma=True)
    assert read.value == pytest.approx(value, rel=1e-15)
    assert read_quantity(read.text, TEMPERATURE) == read, "the text kept for files has a decimal point"


def test_a_text_is_shown_with_the_decimal_mark_of_the_place() -> None:
    assert localised("1.20(5) µK", decimal_comma=True) == "1,20(5) µK"
    assert localised("1.20(5) µK", decimal_comma=False) == "1.20(5) µK"
    assert unit_of("1,2 uK", TEMPERATURE, decimal_comma=True) == "µK"


# --- random texts ---

pieces = st.sampled_from(
    [*"0123456789.,()eE+-−±×x*·^/ '_µuπnKHzGaJ\u00a0\u202f⁻⁵", "10^", "2pi x ", "+/-", " nK", " Hz", " a0", "e5", "1/s"]
)
texts = st.one_of(st.text(max_size=40), st.lists(pieces, max_size=14).map("".join))


@pytest.mark.long
@settings(max_examples=CAMPAIGN)
@given(text=texts, kind=st.sampled_from(KINDS), comma=st.booleans())
@example(text="1e", kind=ATOM_NUMBER, comma=False)
@example(text="(" * 60, kind=ATOM_NUMBER, comma=False)
@example(text="1 \ud800", kind=TEMPERATURE, comma=False)
@example(text="1 K^9", kind=TEMPERATURE, comma=False)
def test_random_texts_are_read_or_refused_in_one_sentence(text: str, kind: Kind, comma: bool) -> None:
    try:
        read = read_quantity(text, kind, decimal_comma=comma)
    except QuantityError as error:
        sentence = str(error)
        assert sentence
        assert "Traceback" not in sentence
        return
    assert kind.low <= read.value <= kind.high
    assert read.sigma is None or read.sigma >= 0
    assert read_quantity(read.text, kind) == read, "what files keep means the same everywhere"
