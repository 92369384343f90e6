"""Constants against SciPy's own CODATA tables; SciPy 1.15 and later ship CODATA 2022, the year used here."""

from __future__ import annotations

import pytest
from scipy import constants as reference

from physics import constants


@pytest.mark.parametrize(
    ("name", "listed"),
    [
        ("planck", "Planck constant"),
        ("boltzmann", "Boltzmann constant"),
        ("speed_of_light", "speed of light in vacuum"),
        ("elementary_charge", "elementary charge"),
        ("atomic_mass", "atomic mass constant"),
        ("electron_mass", "electron mass"),
        ("bohr_radius", "Bohr radius"),
        ("bohr_magneton", "Bohr magneton"),
        ("vacuum_permittivity", "vacuum electric permittivity"),
        ("vacuum_permeability", "vacuum mag. permeability"),
        ("polarizability_atomic_unit", "atomic unit of electric polarizability"),
    ],
)
def test_constants_are_those_of_codata_2022(name: str, listed: str) -> None:
    # The tables print the same decimal digits, so equality is exact.
    assert getattr(constants, name) == reference.physical_constants[listed][0]


def test_reduced_planck_constant() -> None:
    # The table prints only some digits of this one; the library's variable is h/2pi.
    assert constants.reduced_planck == pytest.approx(reference.hbar, rel=1e-15)


def test_standard_gravity_is_the_conventional_value() -> None:
    assert constants.standard_gravity == reference.g


@pytest.mark.parametrize(
    ("unit", "expected"),
    [
        ("u", reference.physical_constants["atomic mass constant"][0]),
        ("a0", reference.physical_constants["Bohr radius"][0]),
        ("muB", reference.physical_constants["Bohr magneton"][0]),
        ("nm", reference.nano),
        ("MHz", reference.mega),
        ("G", 1e-4),
        ("cm^3/s", reference.centi**3),
        ("cm^6/s", reference.centi**6),
        ("au", reference.physical_constants["atomic unit of electric polarizability"][0]),
        ("1", 1.0),
        ("Hz", 1.0),
        ("K", 1.0),
    ],
)
def test_factors_of_the_data_files(unit: str, expected: float) -> None:
    assert constants.DATA_FACTORS[unit] == pytest.approx(expected, rel=1e-15)


def test_every_factor_is_checked() -> None:
    assert set(constants.DATA_FACTORS) == {
        "u", "a0", "muB", "nm", "MHz", "G", "cm^3/s", "cm^6/s", "au", "1", "Hz", "K",
    }  # fmt: skip
