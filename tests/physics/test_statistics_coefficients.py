"""The generated coefficients are what their generator writes, and hold the constants of their expansions."""

from __future__ import annotations

import importlib.util
import math
import sys
from pathlib import Path
from types import ModuleType

import mpmath
import pytest

from physics import statistics_coefficients as stored

GENERATOR = Path(__file__).parents[1] / "generators" / "statistics_coefficients.py"


@pytest.fixture(scope="module")
def generator() -> ModuleType:
    spec = importlib.util.spec_from_file_location("statistics_coefficients_generator", GENERATOR)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


def same(made: list[float], kept: tuple[float, ...]) -> bool:
    """Equal but for a last digit, where another release of mpmath might round a tie otherwise."""
    return len(made) == len(kept) and all(math.isclose(a, b, rel_tol=3e-16) for a, b in zip(made, kept, strict=True))


def test_header_names_the_generator() -> None:
    assert stored.__doc__ is not None
    assert "GENERATED: do not edit" in stored.__doc__
    assert "tests/generators/statistics_coefficients.py" in stored.__doc__


@pytest.mark.parametrize("twice", [-1, 3])
def test_rationals_are_regenerated(generator: ModuleType, twice: int) -> None:
    numerator, denominator = generator.bose_rational(twice)
    assert same(numerator, stored.BOSE_RATIONAL[twice][0])
    assert same(denominator, stored.BOSE_RATIONAL[twice][1])


@pytest.mark.parametrize("twice", [1, 2, 3, 4, 5, 6, 7, 8])
def test_expansions_are_regenerated(generator: ModuleType, twice: int) -> None:
    with mpmath.workdps(generator.DIGITS):
        singular, powers = generator.bose_expansion(twice)
        large = generator.sommerfeld(twice)
    assert same([singular], (stored.BOSE_SINGULAR[twice],))
    assert same(powers, stored.BOSE_EXPANSION[twice])
    assert same(large, stored.SOMMERFELD[twice])


@pytest.mark.parametrize("twice", [4, 8])
def test_series_are_regenerated(generator: ModuleType, twice: int) -> None:
    with mpmath.workdps(generator.DIGITS):
        assert same(generator.bose_series(twice), stored.BOSE_SERIES[twice])
        assert same(generator.fermi_series(twice), stored.FERMI_SERIES[twice])


def test_pieces_are_regenerated(generator: ModuleType) -> None:
    with mpmath.workdps(generator.DIGITS):
        for made, kept in zip(generator.fermi_pieces(6), stored.FERMI_PIECES[6], strict=True):
            assert same(made, kept)


def test_tables_cover_the_same_orders_and_edges(generator: ModuleType) -> None:
    assert (
        tuple(stored.FERMI_PIECES) == tuple(stored.FERMI_SERIES) == tuple(stored.SOMMERFELD) == generator.TWICE_ORDERS
    )
    assert tuple(float(e) for e in generator.FERMI_EDGES) == stored.FERMI_EDGES
    assert float(generator.BOSE_SPLIT) == stored.BOSE_SPLIT


def test_constants_known_in_closed_form() -> None:
    assert stored.BOSE_EXPANSION[4][0] == math.pi**2 / 6
    assert stored.BOSE_EXPANSION[8][0] == pytest.approx(math.pi**4 / 90, rel=3e-16)
    assert stored.BOSE_SINGULAR[1] == pytest.approx(math.sqrt(math.pi), rel=3e-16)
    assert stored.BOSE_SINGULAR[3] == pytest.approx(-2 * math.sqrt(math.pi), rel=3e-16)
    # f_3 = x^3/6 + pi^2 x/6 above e^-x; f_4 = x^4/24 + pi^2 x^2/12 + 7 pi^4/360.
    assert stored.SOMMERFELD[6] == pytest.approx((1 / 6, math.pi**2 / 6), rel=3e-16)
    assert stored.SOMMERFELD[8] == pytest.approx((1 / 24, math.pi**2 / 12, 7 * math.pi**4 / 360), rel=3e-16)
