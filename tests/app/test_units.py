"""Quantities as text: what is read, what is refused and how it is said, and that writing and reading agree."""

from __future__ import annotations

import math
import os
import subprocess
import sys

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from app.kinds import EVERYDAY, STAND_INS
from app.unit_text import _registry, _resolve
from app.units import (
    ATOM_NUMBER,
    BEAM_POWER,
    BEAM_QUALITY,
    BEAM_WAIST,
    BIAS_FIELD,
    DEPTH,
    DIMENSIONLESS,
    EFFICIENCY,
    FIELD_CURVATURE,
    FIELD_GRADIENT,
    FREQUENCY,
    MAGNETIC_FIELD,
    PHASE_SPACE_DENSITY,
    POSITION,
    RADIO_FREQUENCY,
    REDUCED_TEMPERATURE,
    SCATTERING_LENGTH,
    TEMPERATURE,
    WAVELENGTH,
    Kind,
    QuantityError,
    best_unit,
    exact_text,
    factor,
    format_quantity,
    localised,
    quantity,
    read_quantity,
    step,
    unit_of,
)
from physics import constants

KINDS = (
    ATOM_NUMBER,
    BEAM_POWER,
    BEAM_QUALITY,
    BEAM_WAIST,
    BIAS_FIELD,
    DEPTH,
    DIMENSIONLESS,
    EFFICIENCY,
    FIELD_CURVATURE,
    FIELD_GRADIENT,
    FREQUENCY,
    MAGNETIC_FIELD,
    PHASE_SPACE_DENSITY,
    POSITION,
    RADIO_FREQUENCY,
    REDUCED_TEMPERATURE,
    SCATTERING_LENGTH,
    TEMPERATURE,
    WAVELENGTH,
)
CAMPAIGN = 10_000 if os.environ.get("COLDWARD_LONG") == "1" else 100
h, k = constants.planck, constants.boltzmann


# --- what is read ----------------------------------------------------------------------------------------------------


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


# --- units -----------------------------------------------------------------------------------------------------------


def test_everyday_units_agree_with_the_registry() -> None:
    for unit, (size, si_unit) in EVERYDAY.items():
        if unit == "%":  # not a unit of the registry
            assert float(size) == 0.01
            continue
        exact, dimension = _resolve(unit)
        assert float(size) == float(exact), unit
        assert dimension == _resolve(si_unit)[1], unit
        assert _resolve(si_unit)[0] == 1, si_unit


@pytest.mark.parametrize(
    ("unit", "value"),
    [
        ("a0", constants.bohr_radius),
        ("u", constants.atomic_mass),
        ("amu", constants.atomic_mass),
        ("muB", constants.bohr_magneton),
        ("µB", constants.bohr_magneton),
        ("eV", constants.elementary_charge),
        ("au", constants.polarizability_atomic_unit),
        ("kg", 1.0),
        ("G/cm", 1e-2),
        ("cm^6/s", 1e-12),
        ("cm⁻³", 1e6),
        ("1/Hz", 1.0),
        ("um", 1e-6),
        ("min", 60.0),
    ],
)
def test_units_of_the_trade(unit: str, value: float) -> None:
    assert factor(unit) == value


def test_the_registry_knows_the_trade_and_nothing_else() -> None:
    for unit in ("byte", "B", "parsec", "rpm", "rad", "degC", "bit", "foot"):
        assert not _registry().parse_unit_name(unit), unit
        with pytest.raises(QuantityError, match="is not a unit that is known here"):
            factor(unit)
    assert dict(_registry().parse_units("Hz").dimensionality) != dict(_registry().parse_units("1/s").dimensionality)


def test_stand_ins_are_the_constants() -> None:
    assert factor("J", "K") == pytest.approx(1 / k, rel=1e-15)
    assert factor("Hz", "K") == pytest.approx(h / k, rel=1e-15)
    assert factor("kHz", "J") == pytest.approx(1e3 * h, rel=1e-15)
    assert factor("µK/s", "J/s") / k == pytest.approx(1e-6, rel=1e-15, abs=0.0)
    assert factor("kHz/s", "J/s") / h == pytest.approx(1e3, rel=1e-15)
    assert set(STAND_INS) == {"K", "J", "J/s"}
    with pytest.raises(QuantityError, match='"nK" is not a unit of a quantity in "Hz"'):
        factor("nK", "Hz")


def test_neither_import_nor_usual_input_loads_pint_or_numpy() -> None:
    program = (
        "import sys, app.units as u\n"
        "u.read_quantity('1.20(5) uK', u.TEMPERATURE); u.read_quantity('2pi x 120 Hz', u.FREQUENCY)\n"
        "u.format_quantity(1e-7, 'nK'); u.best_unit(1e-7, ('nK', 'µK'))\n"
        "print([m for m in ('pint', 'numpy', 'scipy', 'PySide6') if m in sys.modules])\n"
    )
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_a_kind_must_make_sense() -> None:
    with pytest.raises(ValueError, match="must run from a low to a high bound, got 2 to 1"):
        Kind(name="x", si_unit="K", units=("K",), low=2, high=1, example="1 K")
    with pytest.raises(ValueError, match="must offer a unit"):
        Kind(name="x", si_unit="K", units=(), low=1, high=2, example="1 K")


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.name)
def test_every_kind_reads_its_example_and_every_unit_it_offers(kind: Kind) -> None:
    read_quantity(kind.example, kind)
    for unit in kind.units:
        assert factor(unit, kind.si_unit) > 0


# --- writing ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "unit", "sigma", "text"),
    [
        (1.46e-7, "nK", None, "146 nK"),
        (1.2e-6, "µK", 5e-8, "1.20(5) µK"),
        (1e5, "", 1e4, "1.0(1)e5"),
        (2e-7, "nK", 1e-8, "200(10) nK"),
        (2e-7, "nK", 1.23e-8, "200(12) nK"),
        (2e-7, "nK", 0.0, "200(0) nK"),
        (9.996e-9, "nK", None, "10.0 nK"),
        (0.0, "nK", None, "0 nK"),
        (1e20, "1/m^3", None, "1.00e20 1/m^3"),
        (0.312, "%", None, "31.2 %"),
        (2.612, "1", None, "2.61"),
        (1.2e-4, "", None, "1.20e-4"),
        (-1.058e-9, "a0", None, "-20.0 a0"),
        (math.nan, "nK", None, "–"),
        (math.inf, "s", None, "∞ s"),
    ],
)
def test_quantities_are_written_with_sensible_digits(value: float, unit: str, sigma: float | None, text: str) -> None:
    assert format_quantity(value, unit, sigma) == text


def test_energies_are_written_as_temperatures_and_frequencies() -> None:
    assert format_quantity(k * 5e-6, "µK", si_unit="J") == "5.00 µK"
    assert format_quantity(h * 1e4, "kHz", si_unit="J") == "10.0 kHz"


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (9.96e4, 2, "1.0e5"),
        (9.94e4, 2, "9.9e4"),
        (9.996e-6, 3, "1.00e-5"),
        (99996.0, 4, "1.000e5"),
        (-9.96e4, 2, "-1.0e5"),
    ],
)
def test_numbers_that_round_up_to_a_power_of_ten(value: float, digits: int, text: str) -> None:
    assert format_quantity(value, digits=digits) == text


def test_the_best_unit_has_few_zeros() -> None:
    assert best_unit(1.46e-7, TEMPERATURE.units) == "nK"
    assert best_unit(1e-6, TEMPERATURE.units) == "µK"
    assert best_unit(1e-15, TEMPERATURE.units) == "nK"
    assert best_unit(k * 5e-6, DEPTH.units, "J") == "µK"
    assert best_unit(math.nan, TEMPERATURE.units) == "nK"


ordinary = st.floats(min_value=1e-12, max_value=10.0, allow_nan=False)


@given(
    value=st.floats(2e-12, 5.0),
    share=st.one_of(st.none(), st.floats(1e-4, 0.5)),
    unit=st.sampled_from(TEMPERATURE.units),
)
def test_written_quantities_are_read_back_to_the_printed_digits(value: float, share: float | None, unit: str) -> None:
    sigma = None if share is None else value * share
    text = format_quantity(value, unit, sigma, si_unit="K")
    read = read_quantity(text, TEMPERATURE)
    if sigma is None:
        assert read.value == pytest.approx(value, rel=5.1e-3)
        assert read.sigma is None
        assert format_quantity(read.value, unit, si_unit="K") == text
    else:
        assert read.sigma == pytest.approx(sigma, rel=0.17)  # one digit from 3 on: at most 0.5 in 3
        assert abs(read.value - value) <= 0.51 * sigma


@given(value=ordinary, unit=st.sampled_from(("nK", "µK", "mK", "K")), digits=st.integers(17, 20))
def test_enough_digits_give_the_same_double_back(value: float, unit: str, digits: int) -> None:
    assert read_quantity(format_quantity(value, unit, digits=digits), TEMPERATURE).value == value


@given(value=st.floats(1.0, 1e15), digits=st.integers(17, 20))
def test_enough_digits_give_the_same_number_of_atoms_back(value: float, digits: int) -> None:
    assert read_quantity(format_quantity(value, digits=digits), ATOM_NUMBER).value == value


@given(
    count=st.integers(1, 99_999),
    place=st.integers(-2, 3),
    spread=st.one_of(st.none(), st.integers(1, 99)),
    unit=st.sampled_from(("nK", "µK", "mK")),
    other=st.sampled_from(("nK", "µK", "mK", "K")),
)
def test_a_typed_quantity_is_exact_in_every_unit_of_its_dimension(
    count: int, place: int, spread: int | None, unit: str, other: str
) -> None:
    body = f"{count}e{place}" if spread is None else f"{count}({spread})e{place}"
    try:
        first = read_quantity(f"{body} {unit}", TEMPERATURE)
    except QuantityError:
        return
    text = exact_text(first.value, other, first.sigma, kind=TEMPERATURE)
    again = read_quantity(text, TEMPERATURE)
    assert (again.value, again.sigma) == (first.value, first.sigma)


def test_a_temperature_as_a_frequency_is_rounded_to_ten_digits() -> None:
    text = exact_text(2e-7, "kHz", 1e-8, kind=TEMPERATURE)
    assert text == "4.167323825 ± 0.2084 kHz"
    assert read_quantity(text, TEMPERATURE).value == pytest.approx(2e-7, rel=2e-10)


@given(value=st.floats(1e-9, 1.0), share=st.floats(0.001, 1.0))
def test_a_made_quantity_is_what_its_text_says(value: float, share: float) -> None:
    made = quantity(value, "µK", value * share, kind=TEMPERATURE)
    assert made == read_quantity(made.text, TEMPERATURE)


# --- random texts ----------------------------------------------------------------------------------------------------

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


# --- steps -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "steps", "kind", "coarse", "result"),
    [
        ("200 nK", 1, TEMPERATURE, False, "202 nK"),
        ("200 nK", -1, TEMPERATURE, False, "199 nK"),
        ("200 nK", 1, TEMPERATURE, True, "220 nK"),
        ("203.7 nK", 1, TEMPERATURE, False, "204 nK"),
        ("203.7 nK", -1, TEMPERATURE, False, "202 nK"),
        ("99.5 nK", 1, TEMPERATURE, False, "100 nK"),
        ("100 nK", -1, TEMPERATURE, False, "99.5 nK"),
        ("200(10) nK", 5, TEMPERATURE, False, "210(10) nK"),
        ("1.20(5) uK", 1, TEMPERATURE, False, "1.21(5) uK"),
        ("1.0(1)e5", 1, ATOM_NUMBER, False, "1.01(10)e5"),
        ("1.0(1)e5", 1, ATOM_NUMBER, True, "1.1(1)e5"),
        ("9.5e4", 1, ATOM_NUMBER, True, "1e5"),
        ("2×10^5", 1, ATOM_NUMBER, True, "2.2×10^5"),
        ("-20 a0", 1, SCATTERING_LENGTH, False, "-19.9 a0"),
        ("-20 a0", -1, SCATTERING_LENGTH, False, "-20.2 a0"),
        ("0 a0", 1, SCATTERING_LENGTH, False, "0 a0"),
        ("1", -1, ATOM_NUMBER, False, "1"),  # at its bound
        ("200 nK", 0, TEMPERATURE, False, "200 nK"),
        ("2pi x 120 Hz", 1, FREQUENCY, True, "130 Hz"),
    ],
)
def test_steps_land_on_round_numbers(text: str, steps: int, kind: Kind, coarse: bool, result: str) -> None:
    assert step(text, steps, kind, coarse=coarse) == result


def test_steps_keep_the_decimal_comma() -> None:
    assert step("1,2 µK", 1, TEMPERATURE, decimal_comma=True) == "1,21 µK"


@given(value=st.floats(1e-8, 1e-3), steps=st.integers(1, 200), coarse=st.booleans())
def test_steps_up_and_down_come_back_to_the_ladder(value: float, steps: int, coarse: bool) -> None:
    first = step(format_quantity(value, "µK"), 1, TEMPERATURE, coarse=coarse)
    there = step(first, steps, TEMPERATURE, coarse=coarse)
    back = step(there, -steps, TEMPERATURE, coarse=coarse)
    if there != first:  # a bound ends the ladder
        assert read_quantity(back, TEMPERATURE).value == read_quantity(first, TEMPERATURE).value
        assert read_quantity(there, TEMPERATURE).value > read_quantity(first, TEMPERATURE).value


@given(value=st.floats(1e-8, 1.0))
def test_a_fine_step_is_one_per_cent_or_less_and_a_coarse_one_ten(value: float) -> None:
    text = format_quantity(value, "nK", digits=6)
    start = read_quantity(text, TEMPERATURE).value
    for coarse, most in ((False, 0.0101), (True, 0.101)):
        share = read_quantity(step(text, 1, TEMPERATURE, coarse=coarse), TEMPERATURE).value / start - 1
        assert 0 < share < most
