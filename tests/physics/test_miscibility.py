"""Whether two condensates mix, and mean-field shifts: published mixtures, and closed forms."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from physics.constants import atomic_mass, bohr_radius, reduced_planck
from physics.miscibility import (
    Mixing,
    bose_fermi_parameter,
    coupling,
    mean_field_shift,
    miscibility_parameter,
    mixing,
)

SODIUM, RUBIDIUM = 22.99 * atomic_mass, 86.909 * atomic_mass


def spinor(mass: float, a0: float, a2: float) -> dict[str, Mixing]:
    """Pairs of the three states of a gas of spin 1 with the lengths of total spin 0 and 2."""
    ends, middle, between = a2, (2.0 * a2 + a0) / 3.0, (2.0 * a0 + a2) / 3.0
    return {
        "+1 and 0": mixing((mass, mass), (ends, middle, a2)),
        "+1 and -1": mixing((mass, mass), (ends, ends, between)),
    }


def test_sodium_of_spin_one() -> None:
    # Seen to separate for mF = 0 and +-1, and to mix for +1 and -1: J. Stenger, S. Inouye, D. M. Stamper-Kurn,
    # H.-J. Miesner, A. P. Chikkatur, W. Ketterle, Nature 396, 345 (1998), lengths 50.0 and 55.0 a0; recalled.
    assert spinor(SODIUM, 50.0, 55.0) == {"+1 and 0": Mixing.APART, "+1 and -1": Mixing.MISCIBLE}


def test_rubidium_of_spin_one() -> None:
    # The other way round, a ferromagnet: 101.8 and 100.4 a0, E. G. M. van Kempen, S. J. J. M. F. Kokkelmans,
    # D. J. Heinzen, B. J. Verhaar, Phys. Rev. Lett. 88, 093201 (2002), recalled.
    assert spinor(RUBIDIUM, 101.8, 100.4) == {"+1 and 0": Mixing.MISCIBLE, "+1 and -1": Mixing.APART}


def test_two_isotopes_of_rubidium() -> None:
    # A tunable mixture of 85Rb and 87Rb with a12 = 213 a0 and a87 = 99 a0: apart at a85 = 51 a0, mixed at 900 a0.
    # S. B. Papp, J. M. Pino, C. E. Wieman, Phys. Rev. Lett. 101, 040402 (2008), recalled.
    masses = (84.912 * atomic_mass, RUBIDIUM)
    assert mixing(masses, (51.0, 99.0, 213.0)) is Mixing.APART
    assert mixing(masses, (900.0, 99.0, 213.0)) is Mixing.MISCIBLE


positive = st.floats(1.0, 1e4)
mass = st.floats(1.0, 200.0)


@given(mass, mass, positive, positive, st.floats(-1e4, 1e4))
def test_the_condition_is_that_of_the_couplings(m1: float, m2: float, a11: float, a22: float, a12: float) -> None:
    found = float(miscibility_parameter((m1, m2), (a11, a22, a12)))
    g11, g22, g12 = (float(coupling(m, a)) for m, a in (((m1, m1), a11), ((m2, m2), a22), ((m1, m2), a12)))
    assert found == pytest.approx(g12 * g12 / (g11 * g22), rel=1e-9)
    assert found == pytest.approx(float(miscibility_parameter((m2, m1), (a22, a11, a12))), rel=1e-12)


def test_what_does_not_mix() -> None:
    masses = (SODIUM, RUBIDIUM)
    assert mixing(masses, (50.0, 100.0, -500.0)) is Mixing.COLLAPSE
    assert mixing(masses, (-5.0, 100.0, 1.0)) is Mixing.UNSTABLE_ALONE


def test_shift_of_an_atom_in_the_middle_of_a_condensate() -> None:
    # For equal masses and lengths it is the chemical potential 4 pi hbar^2 a n/m.
    n, a = 1e20, 100.0 * bohr_radius
    expected = 4.0 * math.pi * reduced_planck**2 * a * n / RUBIDIUM
    assert float(mean_field_shift((RUBIDIUM, RUBIDIUM), a, n)) == pytest.approx(expected, rel=1e-12)


def test_condensate_and_fermi_gas() -> None:
    # At 1 the energy of the uniform mixture stops being convex: its second derivatives by differences.
    masses, lengths = (RUBIDIUM, 39.964 * atomic_mass), (100.0 * bohr_radius, -215.0 * bohr_radius)
    density = 1.0 / float(bose_fermi_parameter(masses, lengths, 1.0)) ** 3
    own, between = float(coupling((RUBIDIUM, RUBIDIUM), lengths[0])), float(coupling(masses, lengths[1]))
    kinetic = reduced_planck**2 * (6.0 * math.pi**2) ** (2.0 / 3.0) / (2.0 * masses[1])

    def energy(boson: float, fermion: float) -> float:
        return 0.5 * own * boson**2 + between * boson * fermion + 0.6 * kinetic * fermion ** (5.0 / 3.0)

    h, unit = 1e-3, own * density**2
    at = {
        (i, j): energy(density * (1.0 + i * h), density * (1.0 + j * h)) / unit for i in (-1, 0, 1) for j in (-1, 0, 1)
    }
    matrix = np.array(
        [
            [at[1, 0] - 2.0 * at[0, 0] + at[-1, 0], 0.25 * (at[1, 1] - at[1, -1] - at[-1, 1] + at[-1, -1])],
            [0.25 * (at[1, 1] - at[1, -1] - at[-1, 1] + at[-1, -1]), at[0, 1] - 2.0 * at[0, 0] + at[0, -1]],
        ]
    ) / (h * h)
    assert np.linalg.det(matrix) == pytest.approx(0.0, abs=1e-4 * matrix[0, 0] * matrix[1, 1])
