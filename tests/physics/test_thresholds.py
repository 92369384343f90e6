"""Thresholds by formula and by exact level sums, in many traps, and the caveats that follow from them.

TABLE was made by direct level sums with other code, two digits after the point of a percent; FRACTION_ERRORS likewise,
four digits.

References
----------
[1] S. Grossmann and M. Holthaus, Phys. Lett. A 208, 188 (1995).
[2] W. Ketterle and N. J. van Druten, Phys. Rev. A 54, 656 (1996).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from scipy.optimize import brentq

from physics.caveats import Severity, caveats_of
from physics.cloud import Equilibrium, Model
from physics.constants import boltzmann, planck
from physics.oscillator_levels import OscillatorLevels
from physics.thresholds import Thresholds

Maker = Callable[..., Equilibrium]
Shape = tuple[float, float, float]

SPHERE, CIGAR, LONG_CIGAR = (1.0, 1.0, 1.0), (10.0, 10.0, 1.0), (100.0, 100.0, 1.0)
PANCAKE, FLAT_PANCAKE = (1.0, 1.0, 10.0), (1.0, 1.0, 100.0)

# Trap, atoms: hbar w_max/kTc0; percent of Tc0 by which the excited levels saturate early, by which the first-order
# formula says so, and their difference.
TABLE = {
    (SPHERE, 1e2): (0.229, 14.92, 15.67, -0.75),
    (SPHERE, 1e3): (0.106, 7.35, 7.28, 0.07),
    (SPHERE, 1e4): (0.049, 3.45, 3.38, 0.07),
    (SPHERE, 1e5): (0.023, 1.59, 1.57, 0.03),
    (SPHERE, 1e6): (0.011, 0.74, 0.73, 0.01),
    (CIGAR, 1e2): (0.494, 28.96, 23.64, 5.32),
    (CIGAR, 1e3): (0.229, 12.99, 10.97, 2.02),
    (CIGAR, 1e4): (0.106, 5.68, 5.09, 0.59),
    (CIGAR, 1e5): (0.049, 2.52, 2.36, 0.16),
    (CIGAR, 1e6): (0.023, 1.14, 1.10, 0.04),
    (LONG_CIGAR, 1e2): (1.063, 72.60, 48.74, 23.85),
    (LONG_CIGAR, 1e3): (0.494, 38.77, 22.62, 16.14),
    (LONG_CIGAR, 1e4): (0.229, 15.48, 10.50, 4.98),
    (LONG_CIGAR, 1e5): (0.106, 6.14, 4.87, 1.26),
    (LONG_CIGAR, 1e6): (0.049, 2.56, 2.26, 0.30),
    (PANCAKE, 1e2): (1.063, 29.82, 29.10, 0.72),
    (PANCAKE, 1e3): (0.494, 14.61, 13.51, 1.10),
    (PANCAKE, 1e4): (0.229, 6.70, 6.27, 0.43),
    (PANCAKE, 1e5): (0.106, 3.04, 2.91, 0.13),
    (PANCAKE, 1e6): (0.049, 1.39, 1.35, 0.04),
    (FLAT_PANCAKE, 1e2): (4.935, 64.53, 114.81, -50.28),
    (FLAT_PANCAKE, 1e3): (2.291, 45.98, 53.29, -7.31),
    (FLAT_PANCAKE, 1e4): (1.063, 25.62, 24.73, 0.89),
    (FLAT_PANCAKE, 1e5): (0.494, 12.28, 11.48, 0.80),
    (FLAT_PANCAKE, 1e6): (0.229, 5.62, 5.33, 0.29),
}

# Largest error of the condensed fraction over all temperatures: of 1 - t^3, and of 1 - t^3 - 3 x t^2, x the formula. In
# spheres the latter peaks in a cusp that the table's grid of temperatures missed: left out.
FRACTION_ERRORS = {
    (SPHERE, 1e2): (0.2807, None),
    (SPHERE, 1e4): (0.0938, None),
    (SPHERE, 1e6): (0.0216, None),
    (CIGAR, 1e2): (0.4783, 0.1671),
    (CIGAR, 1e3): (0.2963, 0.0708),
    (CIGAR, 1e4): (0.1514, 0.0219),
    (CIGAR, 1e5): (0.0718, 0.0059),
    (LONG_CIGAR, 1e2): (0.8411, 0.6415),
    (LONG_CIGAR, 1e4): (0.3602, 0.1482),
    (LONG_CIGAR, 1e6): (0.0738, 0.0102),
    (PANCAKE, 1e3): (0.3368, 0.0643),
    (PANCAKE, 1e6): (0.0406, 0.0016),
    (FLAT_PANCAKE, 1e3): (0.7960, 0.3259),
    (FLAT_PANCAKE, 1e5): (0.3202, 0.0580),
}

HALF = 0.0056  # half of the last digit of a percent, and what rounding 0.72750 to 0.7275 makes


def ideal(bosons: Maker, shape: Shape, atoms: float, t: float = 1.0) -> Equilibrium:
    """A cloud at T = t Tc0, 10 Hz for a frequency of 1."""
    given: dict[str, Any] = {"atoms": atoms, "frequencies": 10.0 * np.array(shape), "scattering_length": 1e-12}
    threshold = float(bosons(Model.IDEAL, **given).critical_temperature)
    return bosons(Model.IDEAL, temperature=t * threshold, **given)


@pytest.mark.parametrize(("shape", "atoms"), TABLE)
def test_saturation_and_the_formula_for_it(bosons: Maker, shape: Shape, atoms: float) -> None:
    level, saturation, formula, left = TABLE[shape, atoms]
    solved = ideal(bosons, shape, atoms)
    thresholds = Thresholds(equilibrium=solved)
    found = 100.0 * (1.0 - float(thresholds.exact_saturation / thresholds.ideal))
    shift = 100.0 * float(solved.finite_size_shift)
    assert planck * 10.0 * max(shape) / (boltzmann * float(thresholds.ideal)) == pytest.approx(level, abs=5.1e-4)
    assert found == pytest.approx(saturation, abs=HALF)
    assert shift == pytest.approx(formula, abs=HALF)
    assert found - shift == pytest.approx(left, abs=HALF)
    if shift < 100.0:
        assert float(thresholds.finite_size / thresholds.ideal) == pytest.approx(1.0 - shift / 100.0, rel=1e-12)
    else:
        assert math.isnan(thresholds.finite_size)


@pytest.mark.parametrize(("shape", "atoms"), FRACTION_ERRORS)
def test_errors_of_the_condensed_fraction(bosons: Maker, shape: Shape, atoms: float) -> None:
    uncorrected, corrected = FRACTION_ERRORS[shape, atoms]
    x = float(ideal(bosons, shape, atoms).finite_size_shift)
    threshold = float(ideal(bosons, shape, atoms).critical_temperature)
    t = np.linspace(0.02, 1.1, 1001)
    exact = bosons(
        Model.EXACT_LEVELS,
        atoms=atoms,
        frequencies=10.0 * np.array(shape),
        temperature=t * threshold,
        scattering_length=None,
    )
    fraction = np.asarray(exact.condensate_fraction)
    plain = np.maximum(1.0 - t**3, 0.0)
    shifted = np.maximum(1.0 - t**3 - 3.0 * x * t**2, 0.0)
    # Half of the last digit, and as much for the grids of both.
    assert np.max(np.abs(plain - fraction)) == pytest.approx(uncorrected, abs=1.1e-4)
    if corrected is not None:
        assert np.max(np.abs(shifted - fraction)) == pytest.approx(corrected, abs=1.1e-4)


@pytest.mark.parametrize(
    ("shape", "exact", "corrected"), [(SPHERE, 0.8475, 0.8497), (CIGAR, 0.8250, 0.8368), (LONG_CIGAR, 0.7011, 0.7962)]
)
def test_fraction_at_half_the_critical_temperature(bosons: Maker, shape: Shape, exact: float, corrected: float) -> None:
    solved = ideal(bosons, shape, 1e4, 0.5)
    found = bosons(
        Model.EXACT_LEVELS, atoms=1e4, frequencies=10.0 * np.array(shape), temperature=float(solved.cloud.temperature)
    )
    assert found.condensate_fraction == pytest.approx(exact, abs=5.1e-5)
    assert solved.condensate_fraction == pytest.approx(0.8750, abs=1e-12)
    assert float(solved.condensate_fraction - 3.0 * solved.finite_size_shift * 0.25) == pytest.approx(
        corrected, abs=5.1e-5
    )


def expected_caveats(level_over_tc: float, shift: float, t: float) -> set[str]:
    """What the comparison of the table asks for, at T = t Tc0."""
    found = {"finite_size"} if shift > 0.02 else set()
    if level_over_tc / t > 1.0:
        return found | {"low_dimension"}
    if level_over_tc / t > 0.25 or shift > 0.12:
        return found | {"exact_levels_advised"}
    if level_over_tc > 0.1 or shift > 0.05:
        return found | {"local_density"}
    return found


@pytest.mark.parametrize("t", [0.5, 0.9, 1.5])
@pytest.mark.parametrize(("shape", "atoms"), TABLE)
def test_caveats_at_the_rows_of_the_table(bosons: Maker, shape: Shape, atoms: float, t: float) -> None:
    level, _, formula, _ = TABLE[shape, atoms]
    of_levels = {"finite_size", "local_density", "exact_levels_advised", "low_dimension"}
    caveats = {caveat.id: caveat for caveat in caveats_of(ideal(bosons, shape, atoms, t))}
    assert set(caveats) & of_levels == expected_caveats(level, formula / 100.0, t)
    if "finite_size" in caveats:
        assert 100.0 * (caveats["finite_size"].value or 0.0) == pytest.approx(formula, abs=HALF)
    if "low_dimension" in caveats:
        assert caveats["low_dimension"].severity is Severity.REFUSAL


@pytest.mark.parametrize(("shape", "atoms"), TABLE)
def test_what_the_formula_leaves_is_small_where_no_warning_is_raised(shape: Shape, atoms: float) -> None:
    # Local density with the first-order shift: good to 0.3 % of Tc0 without a warning, to 5 % where the one of local
    # density is raised. What is worse asks for exact levels.
    level, _, formula, left = TABLE[shape, atoms]
    caveats = expected_caveats(level, formula / 100.0, 1.0)
    if not caveats - {"finite_size"}:
        assert abs(left) <= 0.3
    elif "local_density" in caveats:
        assert abs(left) < 5.0


@pytest.mark.parametrize("frequencies", [(60.0, 60.0, 60.0), (120.0, 90.0, 20.0), (1000.0, 1000.0, 1.0)])
@pytest.mark.parametrize("atoms", [5.0, 1e3, 1e7])
def test_saturation_by_an_independent_root(bosons: Maker, frequencies: Shape, atoms: float) -> None:
    solved = bosons(Model.IDEAL, atoms=atoms, frequencies=frequencies)
    found = float(Thresholds(equilibrium=solved).exact_saturation)

    def excess(log_t: float) -> float:
        spacings = planck * np.array(frequencies) / (boltzmann * found * math.exp(log_t))
        return math.log(OscillatorLevels(spacings).excited_atoms(0.0) / atoms)

    assert brentq(excess, -0.5, 0.5, xtol=1e-14) == pytest.approx(0.0, abs=1e-11)


def test_thresholds_depend_on_the_number_not_on_the_temperature(bosons: Maker, fermions: Maker) -> None:
    atoms = np.array([[1e4], [1e5], [1e6]])
    grid = Thresholds(equilibrium=bosons(atoms=atoms, temperature=np.geomspace(1e-8, 1e-6, 4)))
    for name in (
        "ideal",
        "finite_size",
        "interaction",
        "finite_size_and_interaction",
        "exact_saturation",
        "hartree_fock",
    ):
        value = np.asarray(getattr(grid, name))
        assert value.shape == (3, 1), name
        for i in range(3):
            one = Thresholds(equilibrium=bosons(atoms=atoms[i, 0], temperature=3e-7))
            assert value[i, 0] == pytest.approx(float(getattr(one, name)), rel=1e-12), name
        assert np.all(np.isnan(getattr(Thresholds(equilibrium=fermions()), name))), name


def test_both_shifts_add_up(bosons: Maker) -> None:
    thresholds = Thresholds(equilibrium=bosons())
    shifts = [1.0 - float(value / thresholds.ideal) for value in (thresholds.finite_size, thresholds.interaction)]
    both = 1.0 - float(thresholds.finite_size_and_interaction / thresholds.ideal)
    assert both == pytest.approx(sum(shifts), rel=1e-12)
    unknown = Thresholds(equilibrium=bosons(scattering_length=None))
    assert math.isnan(unknown.interaction)
    assert math.isnan(unknown.hartree_fock)
    assert unknown.finite_size_and_interaction == pytest.approx(float(thresholds.finite_size), rel=1e-14)
    assert math.isnan(Thresholds(equilibrium=bosons(scattering_length=-1e-9)).hartree_fock)


def test_the_threshold_of_each_model(bosons: Maker) -> None:
    for model, name in (
        (Model.IDEAL, "ideal"),
        (Model.SEMI_IDEAL, "ideal"),
        (Model.EXACT_LEVELS, "exact_saturation"),
        (Model.HARTREE_FOCK, "hartree_fock"),
    ):
        thresholds = Thresholds(equilibrium=bosons(model))
        assert thresholds.of_model == getattr(thresholds, name)
    onset = float(Thresholds(equilibrium=bosons(Model.HARTREE_FOCK)).of_model)
    below, above = (bosons(Model.HARTREE_FOCK, temperature=onset * f) for f in (1 - 1e-9, 1 + 1e-9))
    assert below.condensate_fraction > 0.0 == above.condensate_fraction
