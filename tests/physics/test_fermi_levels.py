"""Sums over oscillator levels for fermions: the reference table, direct triple sums, shells, and limits."""

from __future__ import annotations

import csv
import math
from pathlib import Path

import mpmath
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import brentq

from physics.fermi_levels import (
    FermiLevels,
    atoms_with_curvature,
    finite_size_chemical_potential,
    finite_size_number,
)
from physics.fermi_series import FineLevels, centre_series, fermi_series, partition_series
from physics.statistics import fermi, fermi_inverse

TABLE = Path(__file__).parent.parent / "reference" / "fermion_levels.csv"
with TABLE.open(encoding="utf-8", newline="") as file:
    ROWS = list(csv.DictReader(line for line in file if not line.startswith("#")))

RATIOS = ("0.02", "0.1", "0.5", "1")


def printed(text: str) -> tuple[float, float]:
    """A printed number and half a unit of its last digit, with a little room for numbers that were rounded there."""
    mantissa, _, exponent = text.partition("e")
    decimals = len(mantissa.partition(".")[2])
    return float(text), 0.5001 * 10.0 ** (int(exponent) - decimals)


def solved(spacings: np.ndarray, atoms: float) -> tuple[FermiLevels, float, float]:
    """Levels, mu/kT, and mu/kT of local density."""
    local = fermi_inverse(3.0, atoms * float(np.prod(spacings)))
    high = local + 0.5 * float(spacings.sum())
    levels = FermiLevels(spacings, high)
    return levels, levels.log_fugacity(atoms, local, high), local


def spacings_of(row: dict[str, str], ratio: float) -> tuple[np.ndarray, float]:
    frequencies, atoms = np.array([float(f) for f in row["trap"].split(":")]), float(row["N"])
    fermi_energy = np.prod(frequencies) ** (1.0 / 3.0) * (6.0 * atoms) ** (1.0 / 3.0)
    return frequencies / (ratio * fermi_energy), atoms


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row['trap']} {row['N']}")
def test_the_reference_table_to_its_digits(row: dict[str, str]) -> None:
    for ratio in RATIOS:
        t = float(ratio)
        spacings, atoms = spacings_of(row, t)
        levels, log_z, local = solved(spacings, atoms)
        assert levels.atoms(log_z) == pytest.approx(atoms, rel=1e-10)
        expected, tolerance = printed(row[f"local_{ratio}"])
        assert (local - log_z) * t == pytest.approx(expected, abs=tolerance)
        # The first correction, whose smallest values are rounding in the table as here.
        width = 2.0 + float(spacings.sum())
        curved = brentq(lambda x: float(atoms_with_curvature(x, spacings)) - atoms, local - width, log_z + width)  # noqa: B023
        expected, tolerance = printed(row[f"curved_{ratio}"])
        assert (curved - log_z) * t == pytest.approx(expected, abs=max(tolerance, 2e-12 * abs(log_z)))
        if ratio == "0.1":
            expected, tolerance = printed(row["excess_0.1"])
            excess = fermi(3.0, log_z) / float(np.prod(spacings)) / atoms - 1.0
            assert excess == pytest.approx(expected, abs=tolerance)


def test_the_table_is_whole() -> None:
    assert len(ROWS) == 25


@pytest.mark.parametrize("row", [row for row in ROWS if row["trap"] in ("1:1:1", "10:10:1") and float(row["N"]) >= 1e4])
def test_closed_forms_of_the_degenerate_limit(row: dict[str, str]) -> None:
    # "matches the table to a few percent for EF > 4 hbar w_max, T/TF <= 0.1": against the printed numbers.
    spacings, _ = spacings_of(row, 0.1)
    energy, levels = 10.0, spacings  # in kT at T/TF = 0.1
    number = float(finite_size_number(energy, levels))
    assert number == pytest.approx(printed(row["excess_0.1"])[0], rel=0.06)
    assert finite_size_chemical_potential(energy, levels) == pytest.approx(printed(row["local_0.1"])[0], rel=0.06)


# Three spacings, each with coarse and fine axes in another mixture, and frequencies that are equal or not.
MIXTURES = [
    (0.3, 0.45, 0.2), (0.6, 0.2, 0.35), (0.9, 0.7, 0.4), (0.9, 0.9, 0.3), (0.8, 1.1, 1.7), (1.2, 1.2, 1.2),
    (0.49, 0.49, 0.49), (3.0, 3.0, 1.0), (0.5000001, 0.5, 0.499),
]  # fmt: skip


def direct(spacings: np.ndarray, log_z: float) -> tuple[float, np.ndarray, float]:
    """N, energies of the axes and central n lambda^3, by a sum over all triples of quantum numbers."""
    counts = [int((max(log_z, 0.0) + 42.0) / b) + 1 for b in spacings]
    ladders = [(np.arange(count) + 0.5) * b for count, b in zip(counts, spacings, strict=True)]
    total = ladders[0][:, np.newaxis, np.newaxis] + ladders[1][:, np.newaxis] + ladders[2]
    filled = 1.0 / (np.exp(total - log_z) + 1.0)
    energies = np.array(
        [np.sum(filled * e) for e in (ladders[0][:, np.newaxis, np.newaxis], ladders[1][:, np.newaxis], ladders[2])]
    )

    def at_centre(count: int) -> np.ndarray:
        # psi_n(0)^2 = n!/(2^n (n/2)!^2 sqrt(pi)) for even n.
        values = np.zeros(count)
        values[::2] = [math.comb(2 * m, m) / 4.0**m / math.sqrt(math.pi) for m in range((count + 1) // 2)]
        return values

    weights = [at_centre(count) for count in counts]
    density = np.einsum("abc,a,b,c", filled, *weights) * math.sqrt(float(np.prod(2.0 * math.pi * spacings)))
    return float(filled.sum()), energies, float(density)


@pytest.mark.parametrize("log_z", [-3.0, 2.0, 9.0])
@pytest.mark.parametrize("spacings", MIXTURES)
def test_sums_are_those_over_all_levels(spacings: tuple[float, float, float], log_z: float) -> None:
    b = np.array(spacings)
    levels = FermiLevels(b, log_z)
    atoms, energies, density = direct(b, log_z)
    assert levels.atoms(log_z) == pytest.approx(atoms, rel=1e-12)
    np.testing.assert_allclose(levels.energies(log_z), energies, rtol=1e-12)
    assert levels.central_density(log_z) == pytest.approx(density, rel=1e-5)
    assert levels.log_fugacity(atoms, log_z - 1.0, log_z + 1.0) == pytest.approx(log_z, abs=1e-12)


@pytest.mark.parametrize("spacings", [(1.2, 1.2, 1.2), (0.9, 0.9, 0.3)])
def test_the_profile_starts_at_the_central_density(spacings: tuple[float, float, float]) -> None:
    levels = FermiLevels(np.array(spacings), 6.0)
    for axis in range(3):
        assert levels.density(6.0, axis, np.zeros(1))[0] == pytest.approx(levels.central_density(6.0), rel=1e-6)


def test_profiles_hold_all_atoms() -> None:
    # In an isotropic trap the density is spherical: N lambda^3 = 4 pi int x^2 n lambda^3 dx, lambda = sqrt(2 pi b) a.
    b = 0.8
    levels = FermiLevels(np.full(3, b), 12.0)
    x = np.linspace(0.0, 14.0, 3001)
    atoms = levels.atoms(12.0)
    profile = levels.density(12.0, 0, x * x)
    assert 4.0 * math.pi * np.trapezoid(x * x * profile, x) == pytest.approx(
        atoms * (2.0 * math.pi * b) ** 1.5, rel=1e-9
    )
    column = levels.density(12.0, 0, x * x, along=2)
    assert 2.0 * math.pi * np.trapezoid(x * column, x) == pytest.approx(atoms * 2.0 * math.pi * b, rel=1e-5)


# --- shells ---


@pytest.mark.parametrize(("full", "atoms"), [(1, 1), (2, 4), (3, 10), (8, 120)])
def test_full_shells_have_mu_halfway_to_the_next(full: int, atoms: int) -> None:
    # k(k+1)(k+2)/6 atoms fill k shells of an isotropic trap; the next is as far above mu as the last is below, but for
    # kT ln of the ratio of their degeneracies.
    b = 40.0
    _, log_z, _ = solved(np.full(3, b), float(atoms))
    degeneracy = (full + 1) * full / 2, (full + 2) * (full + 1) / 2
    middle = (full + 1.0) * b - 0.5 * math.log(degeneracy[1] / degeneracy[0])
    assert log_z == pytest.approx(middle, abs=1e-6)


def test_a_half_filled_shell_holds_mu() -> None:
    _, log_z, _ = solved(np.full(3, 40.0), 1.0 + 1.5)
    assert log_z == pytest.approx(2.5 * 40.0, abs=1e-9)


def test_filled_shells_at_zero_temperature_have_their_energy() -> None:
    # 10 atoms: 1 at 3/2, 3 at 5/2, 6 at 7/2 hbar w: 30 in all, 10 along each axis.
    levels, log_z, _ = solved(np.full(3, 50.0), 10.0)
    np.testing.assert_allclose(levels.energies(log_z), 10.0 * 50.0, rtol=1e-9)


def test_one_atom_in_a_cold_trap_sits_in_the_ground_level() -> None:
    spacings = np.array([30.0, 20.0, 25.0])
    levels, log_z, _ = solved(spacings, 1.0)
    np.testing.assert_allclose(levels.energies(log_z), 0.5 * spacings, rtol=1e-4)
    ground = math.sqrt(float(np.prod(2.0 * math.pi * spacings))) / math.pi**1.5
    assert levels.central_density(log_z) == pytest.approx(ground, rel=1e-4)


# --- limits and bounds ---


def test_a_hot_cloud_obeys_boltzmann() -> None:
    spacings = np.array([0.02, 0.3, 0.7])
    atoms = 1e-3 / float(np.prod(spacings))
    levels, log_z, _ = solved(spacings, atoms)
    partition = float(np.prod(1.0 / (2.0 * np.sinh(0.5 * spacings))))
    assert math.exp(log_z) * partition == pytest.approx(atoms, rel=1e-3)
    np.testing.assert_allclose(levels.energies(log_z) / atoms, 0.5 * spacings / np.tanh(0.5 * spacings), rtol=1e-3)


def test_more_levels_than_can_be_summed_are_taken_as_fine() -> None:
    # 1e9 atoms at T/TF = 1e-3, all frequencies different: the shells' steps are far below what local density is off by.
    frequencies = np.array([1.0, 1.37, 2.11])
    fermi_energy = float(np.prod(frequencies)) ** (1.0 / 3.0) * (6e9) ** (1.0 / 3.0)
    spacings = frequencies / (1e-3 * fermi_energy)
    _, log_z, local = solved(spacings, 1e9)
    expected = float(finite_size_chemical_potential(fermi_energy, frequencies))
    assert (local - log_z) * 1e-3 == pytest.approx(expected, rel=1e-3)


def test_only_axes_with_few_levels_have_a_profile() -> None:
    levels = FermiLevels(np.array([1.0, 1.0, 1e-3]), 10.0)
    assert [levels.resolves(axis) for axis in range(3)] == [True, True, False]


@pytest.mark.parametrize("log_z", [-3.0, 2.0, 9.0])
def test_many_fine_clouds_at_once_are_the_sums_over_all_levels(log_z: float) -> None:
    spacings = np.array([[0.3, 0.45, 0.2], [0.25, 0.5, 0.4], [0.49, 0.49, 0.49]])
    levels = FineLevels(spacings)
    each = np.full(3, log_z)
    expected = [direct(b, log_z) for b in spacings]
    np.testing.assert_allclose(levels.atoms(each), [atoms for atoms, _, _ in expected], rtol=1e-12)
    np.testing.assert_allclose(levels.energies(each), [energies for _, energies, _ in expected], rtol=1e-12)
    np.testing.assert_allclose(levels.central_density(each), [density for _, _, density in expected], rtol=1e-5)
    for start in (-5.0, 0.0, 12.0):
        found = levels.log_fugacity(levels.atoms(each), each + start)
        np.testing.assert_allclose(found, each, atol=1e-12)


def test_series_of_the_partition_function() -> None:
    # Z b = sum of a_k j^(2k-1): at j = 1, b/(2 sinh(b/2)); the density at the centre, sqrt(b/sinh b).
    b = np.array([0.1, 0.3, 0.5])
    np.testing.assert_allclose(partition_series(b).sum(axis=-1), 0.5 * b / np.sinh(0.5 * b), rtol=1e-14)
    np.testing.assert_allclose(centre_series(b).sum(axis=-1), np.sqrt(b / np.sinh(b)), rtol=1e-12)


@pytest.mark.parametrize("order", [2.0, 0.0, -1.0, -2.0, -5.0, -0.5, -1.5, -3.5])
def test_fermi_functions_below_order_one_half(order: float) -> None:
    # -Li_s(-z), continued; for z < 1 the power series.
    alone = np.concatenate([[1.0], np.zeros(8)])
    for log_z in (-4.0, -1.0, -0.3):
        expected = float(mpmath.re(-mpmath.polylog(order, -mpmath.exp(log_z))))
        found = float(fermi_series(alone, order, np.asarray(log_z)))
        assert found == pytest.approx(expected, rel=1e-7 if order % 1 else 1e-12)


@given(st.tuples(*[st.floats(-3.0, 2.5)] * 3), st.floats(0.0, 5.0))
def test_any_number_of_atoms_finds_its_chemical_potential(logs: tuple[float, float, float], log_atoms: float) -> None:
    spacings, atoms = 10.0 ** np.array(logs), 10.0**log_atoms
    levels, log_z, _ = solved(spacings, atoms)
    assert levels.atoms(log_z) == pytest.approx(atoms, rel=1e-9)
