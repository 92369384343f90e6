"""Bose and Fermi functions at their edges: limits, NaN, infinities, shapes, types, blocks, threads, refusals."""

from __future__ import annotations

import math
import subprocess
import sys
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from threading import Barrier
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from physics import statistics
from physics.statistics import bose, bose_inverse, bose_inverse_from_deficit, fermi, fermi_inverse, zeta

ORDERS = [0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5, 4.0]
SATURATING = ORDERS[2:]
FUNCTIONS = [bose, fermi, bose_inverse, fermi_inverse]
RTOL = 2e-15

Function = Callable[[Any, Any], Any]


@settings(max_examples=200)
@given(s=st.sampled_from(ORDERS), x=st.floats(allow_nan=True, allow_infinity=True))
@pytest.mark.parametrize("function", FUNCTIONS)
def test_scalars_and_arrays_agree(function: Function, s: float, x: float) -> None:
    scalar, array = function(s, x), function(s, np.array([x]))
    # (Where both paths take an exponential, that of the math library and that of NumPy differ in the last digit.)
    np.testing.assert_allclose(scalar, array[0], rtol=6e-16, atol=5e-324)


inf, nan = math.inf, math.nan


def check_edges(function: Function, s: float, *edges: tuple[float, float]) -> None:
    arguments, expected = zip(*edges, strict=True)
    np.testing.assert_array_equal(function(s, np.array(arguments)), expected)
    for argument, value in edges:
        # Among ordinary neighbours too: they must neither hide an edge nor suffer from it.
        ordinary = function(s, 0.25)
        crowd = function(s, np.array([0.25, argument, 0.25]))
        np.testing.assert_allclose(crowd, [ordinary, value, ordinary], rtol=4e-16)
        np.testing.assert_equal(function(s, argument), value)


@pytest.mark.parametrize("s", ORDERS)
def test_bose_at_edges(s: float) -> None:
    top = zeta(s) if s > 1 else inf
    check_edges(bose, s, (nan, nan), (inf, 0.0), (-inf, nan), (0.0, top), (-0.0, top), (-1e-300, nan), (-3.0, nan))
    check_edges(bose, s, (800.0, 0.0), (1e300, 0.0))


@pytest.mark.parametrize("s", ORDERS)
def test_fermi_at_edges(s: float) -> None:
    check_edges(fermi, s, (nan, nan), (inf, inf), (-inf, 0.0), (-800.0, 0.0), (-1e300, 0.0))


@pytest.mark.parametrize("s", ORDERS)
def test_bose_inverse_at_edges(s: float) -> None:
    check_edges(
        bose_inverse, s, (nan, nan), (inf, 0.0), (-inf, nan), (0.0, inf), (-0.0, inf), (-1e-300, nan), (-1, nan)
    )


@pytest.mark.parametrize("s", SATURATING)
def test_at_and_above_saturation_alpha_is_zero(s: float) -> None:
    check_edges(bose_inverse, s, (zeta(s), 0.0), (math.nextafter(zeta(s), 9), 0.0), (5.0, 0.0), (1e300, 0.0))
    assert bose_inverse(s, math.nextafter(zeta(s), 0)) > 0
    assert bose_inverse(s, [math.nextafter(zeta(s), 0)])[0] > 0


@pytest.mark.parametrize("s", SATURATING)
def test_deficit_inverse_at_edges(s: float) -> None:
    above = math.nextafter(zeta(s), 9)
    check_edges(bose_inverse_from_deficit, s, (nan, nan), (inf, nan), (zeta(s), inf), (above, nan), (9.0, nan))
    check_edges(bose_inverse_from_deficit, s, (-inf, 0.0), (0.0, 0.0), (-0.0, 0.0), (-1.0, 0.0), (-5e-324, 0.0))


@pytest.mark.parametrize("s", ORDERS)
def test_fermi_inverse_at_edges(s: float) -> None:
    check_edges(fermi_inverse, s, (nan, nan), (inf, inf), (-inf, nan), (0.0, -inf), (-0.0, -inf), (-1e-300, nan))


@pytest.mark.parametrize("s", ORDERS)
def test_tails_give_subnormal_results_and_take_subnormal_arguments(s: float) -> None:
    assert bose(s, 740.0) == pytest.approx(math.exp(-740.0), abs=5e-324)
    assert bose(s, 740.0) > 0
    assert fermi(s, -740.0) == pytest.approx(math.exp(-740.0), abs=5e-324)
    assert fermi(s, [-740.0, 1.0])[0] > 0
    for tiny in (5e-324, 1e-310):
        assert fermi_inverse(s, tiny) == pytest.approx(math.log(tiny), rel=RTOL)
        assert bose_inverse(s, tiny) == pytest.approx(-math.log(tiny), rel=RTOL)
        assert fermi(s, tiny) == fermi(s, 0.0)
        expected = {0.5: math.sqrt(math.pi / tiny), 1.0: -math.log(tiny)}.get(s) or zeta(s)
        assert bose(s, tiny) == pytest.approx(expected, rel=RTOL)


@pytest.mark.parametrize("s", ORDERS)
def test_huge_arguments_follow_the_power_law(s: float) -> None:
    # f_s -> x^s/Gamma(s+1) [1].
    for x in (1e7, 1e20, 1e70):
        assert fermi(s, x) == pytest.approx(x**s / math.gamma(s + 1), rel=1e-12)
        assert fermi_inverse(s, x**s / math.gamma(s + 1)) == pytest.approx(x, rel=1e-12)
        assert fermi_inverse(s, fermi(s, x)) == pytest.approx(x, rel=4e-15)
    assert fermi(4, 1e300) == inf
    assert fermi_inverse(0.5, 1e300) == inf


@pytest.mark.parametrize("function", FUNCTIONS)
@pytest.mark.parametrize("s", ORDERS)
def test_a_nan_leaves_the_rest_of_the_array_alone(function: Function, s: float) -> None:
    # The tails are looked for once for the whole array, which a NaN must not prevent.
    x = np.array([nan, 0.3, 900.0, nan, 1e-35, -900.0])
    together = function(s, x)
    alone = [function(s, v) for v in x.tolist()]
    np.testing.assert_allclose(together, alone, rtol=6e-16)


@pytest.mark.parametrize("function", [*FUNCTIONS, bose_inverse_from_deficit])
def test_shape_layout_and_type_do_not_matter(function: Function) -> None:
    base = np.linspace(0.01, 1.1, 24).reshape(2, 3, 4)
    expected = function(2.5, base)
    assert expected.shape == (2, 3, 4)
    assert expected.dtype == np.float64
    np.testing.assert_array_equal(function(2.5, np.asfortranarray(base)), expected)
    np.testing.assert_array_equal(function(2.5, base[::-1, :, ::2]), expected[::-1, :, ::2])
    np.testing.assert_array_equal(function(2.5, base.tolist()), expected)
    np.testing.assert_array_equal(function(2.5, base.astype(">f8")), expected)
    assert function(2.5, np.array(base[0, 0, 1])) == expected[0, 0, 1]
    for empty in ([], np.empty((0,)), np.empty((3, 0, 2))):
        assert function(2.5, empty).shape == np.shape(empty)


@pytest.mark.parametrize("function", [*FUNCTIONS, bose_inverse_from_deficit])
def test_scalars_of_any_kind_give_python_floats(function: Function) -> None:
    for one in (1, 1.0, np.float64(1), np.float32(1), np.int32(1), np.array(1), np.array(1.0), True):
        assert type(function(2.5, one)) is float
        assert function(2.5, one) == function(2.5, 1.0)
    np.testing.assert_array_equal(
        function(2.5, np.array([[1], [0]])),
        function(2.5, np.array([[1.0], [0.0]])),
    )


@pytest.mark.parametrize("function", [*FUNCTIONS, bose_inverse_from_deficit])
def test_arguments_are_left_alone(function: Function) -> None:
    x = np.array([nan, 0.0, -1.0, 0.3, 1e-40, 50.0])
    kept = x.copy()
    x.flags.writeable = False
    function(3, x)
    np.testing.assert_array_equal(x, kept)


@pytest.mark.parametrize("function", FUNCTIONS)
@pytest.mark.parametrize("size", [16383, 16384, 16385, 40000])
def test_blocks_join_without_a_seam(function: Function, size: int) -> None:
    x = np.linspace(0.01, 2.0, size)
    x[[0, -1]] = -1.0
    whole = function(1.5, x)
    parts = np.concatenate([function(1.5, part) for part in np.array_split(x, 7)])
    np.testing.assert_allclose(whole, parts, rtol=4e-16)


@pytest.mark.parametrize("function", FUNCTIONS)
@pytest.mark.parametrize("s", [0, 0.25, -0.5, 4.5, nan, "2", None, (1, 2), [2.5], np.array([2.5, 3.0])])
def test_other_orders_are_refused_in_one_sentence(function: Function, s: object) -> None:
    with pytest.raises(ValueError, match=r"^order s must be one of 1/2, 1, 3/2, 2, 5/2, 3, 7/2 and 4, got .*$"):
        function(s, 1.0)


@pytest.mark.parametrize("s", [0.5, 1, 5, None])
def test_only_saturating_orders_have_a_deficit(s: object) -> None:
    with pytest.raises(ValueError, match=r"^order s must be one of 3/2, 2, 5/2, 3, 7/2 and 4, got .*$"):
        bose_inverse_from_deficit(s, 0.1)  # type: ignore[call-overload]
    with pytest.raises(ValueError, match=r"^order s must be one of 3/2, 2, 5/2, 3, 7/2 and 4, got .*$"):
        zeta(s)  # type: ignore[arg-type]


def test_order_may_be_any_number_type() -> None:
    assert bose(3, 0.5) == bose(3.0, 0.5) == bose(np.float64(3), 0.5)


def test_threads_may_share_the_functions_from_the_first_call_on() -> None:
    rng = np.random.default_rng(3)
    arguments = [rng.uniform(0.01, 1.0, 40000) for _ in range(8)]
    expected = [[f(3.5, x) for f in FUNCTIONS] for x in arguments]
    for name in ("_bose", "_fermi", "_bose_inverse", "_fermi_inverse", "_saturation"):
        getattr(statistics, name).cache_clear()  # so that the threads race for the tables too
    start = Barrier(len(arguments))

    def work(x: np.ndarray) -> list[np.ndarray]:
        start.wait(timeout=60)
        return [f(3.5, x) for f in FUNCTIONS]

    with ThreadPoolExecutor(len(arguments)) as pool:
        results = list(pool.map(work, arguments))
    np.testing.assert_array_equal(results, expected)


def test_import_loads_neither_coefficients_nor_scipy() -> None:
    code = "import sys, physics.statistics; print(*sorted(sys.modules))"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, timeout=60)
    loaded = set(run.stdout.split())
    assert "physics.statistics" in loaded
    assert not {"physics.statistics_coefficients", "physics.statistics_tables", "scipy"} & loaded


@pytest.mark.parametrize("function", FUNCTIONS)
def test_strict_floating_point_settings_of_the_caller_do_not_matter(function: Function) -> None:
    with np.errstate(all="raise"):
        function(2.5, np.array([nan, inf, -inf, 0.0, -1.0, 1e-310, 1e308, 800.0, 0.5]))
        for x in (nan, inf, 0.0, -1.0, 1e-310, 1e308, 800.0, 0.5):
            function(2.5, x)
