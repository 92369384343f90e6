"""Bose and Fermi functions and inverses: CPU time as a multiple of numpy.exp on the same array, in interleaved rounds.

The goals were set where numpy.exp takes 5 ns an element. With AVX-512 NumPy brings a vector exp of 0.8 ns, while the
gathers and additions the functions are made of gain nothing; so where AVX-512 is found, the figures are taken twice: as
they are, and in a second process in which NumPy leaves AVX-512 alone.
"""

from __future__ import annotations

import json
import os
import statistics as stats
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import numpy as np

from physics.statistics import bose, bose_inverse, bose_inverse_from_deficit, fermi, fermi_inverse, zeta

Row = tuple[str, float, float | None]

SIZES = (10_000, 100_000, 1_000_000)
ROUNDS = 15
ELEMENTS_A_ROUND = 500_000
FERMI_GOAL, BOSE_GOAL, INVERSE_GOAL = 6.0, 8.0, 8.0
ROOT = Path(__file__).resolve().parents[2]


def cases() -> Iterator[tuple[str, Callable[[Any], Any], np.ndarray, float]]:
    """Name, function of one array, arguments (the largest size; exp of none overflows), goal."""
    rng = np.random.default_rng(1)
    n = max(SIZES)
    yield "fermi(3/2)", lambda x: fermi(1.5, x), rng.uniform(-40, 40, n), FERMI_GOAL
    yield "fermi(2), a third in the tails", lambda x: fermi(2, x), rng.uniform(-60, 60, n), FERMI_GOAL
    yield "bose(3/2)", lambda x: bose(1.5, x), rng.uniform(0, 20, n), BOSE_GOAL
    yield "bose(2), small alpha", lambda x: bose(2, x), 10 ** rng.uniform(-12, 0, n), BOSE_GOAL
    yield "fermi_inverse(3)", lambda x: fermi_inverse(3, x), 10 ** rng.uniform(-6, 2, n), INVERSE_GOAL
    yield "bose_inverse(3)", lambda x: bose_inverse(3, x), rng.uniform(0.001, zeta(3), n), INVERSE_GOAL
    yield "bose_inverse(3), half condensed", lambda x: bose_inverse(3, x), rng.uniform(0.001, 2.4, n), INVERSE_GOAL
    yield "bose_inverse(1/2)", lambda x: bose_inverse(0.5, x), rng.uniform(0.001, 50, n), INVERSE_GOAL
    deficits = 10 ** rng.uniform(-12, 0, n)
    yield "bose_inverse_from_deficit(3)", lambda x: bose_inverse_from_deficit(3, x), deficits, INVERSE_GOAL


def ratio(function: Callable[[Any], Any], x: np.ndarray) -> tuple[float, float]:
    """Median CPU time as a multiple of that of exp, and in nanoseconds an element."""
    repeat = max(1, ELEMENTS_A_ROUND // x.size)
    own, reference = [], []
    for _ in range(ROUNDS):
        for what, times in ((np.exp, reference), (function, own)):
            start = time.process_time()
            for _ in range(repeat):
                what(x)
            times.append((time.process_time() - start) / repeat / x.size)
    return stats.median(own) / stats.median(reference), stats.median(own) * 1e9


def measured(against: str) -> Iterator[Row]:
    for name, function, x, goal in cases():
        function(x[:2])  # builds the tables
        for size in SIZES:
            multiple, nanoseconds = ratio(function, x[:size])
            yield f"{name} {size:.0e} ({nanoseconds:.0f} ns) / {against}", multiple, goal


def avx512() -> list[str]:
    """NumPy's names of the AVX-512 features it is using."""
    try:
        from numpy._core import _multiarray_umath as core
    except ImportError:  # NumPy 1
        from numpy.core import _multiarray_umath as core
    names = [n for n in core.__cpu_dispatch__ if n.startswith("AVX512") or n == "X86_V4"]
    return [n for n in names if core.__cpu_features__.get(n)]


def without_avx512(features: list[str]) -> list[Row]:
    code = (
        f"import importlib.util, json; s = importlib.util.spec_from_file_location('kernels', {__file__!r});"
        "m = importlib.util.module_from_spec(s); s.loader.exec_module(m);"
        "print(json.dumps(list(m.measured('exp without AVX-512'))))"
    )
    environment = {**os.environ, "NPY_DISABLE_CPU_FEATURES": " ".join(features), "PYTHONPATH": str(ROOT)}
    done = subprocess.run([sys.executable, "-c", code], env=environment, capture_output=True, text=True, check=True)
    return [(name, value, goal) for name, value, goal in json.loads(done.stdout)]


def import_cost() -> float:
    """Milliseconds that `import physics.statistics` adds to `import numpy`, bytecode cached."""
    code = (
        "import time, numpy; t = time.perf_counter(); import physics.statistics;print(1e3 * (time.perf_counter() - t))"
    )
    runs = [
        subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True).stdout
        for _ in range(7)
    ]
    return stats.median(float(run) for run in runs)


def scalar_cost(function: Callable[[float, float], float]) -> float:
    """Microseconds a call with a float."""
    function(2.5, 0.3)
    start = time.process_time()
    for _ in range(20_000):
        function(2.5, 0.3)
    return (time.process_time() - start) / 20_000 * 1e6


def rows() -> Iterator[Row]:
    features = avx512()
    yield from measured("exp with AVX-512" if features else "exp")
    if features:
        yield from without_avx512(features)
    for function in (bose, fermi, bose_inverse, fermi_inverse):
        yield f"{function.__name__}(5/2) of a float, µs", scalar_cost(function), 3.0
    yield "import of physics.statistics after numpy, ms", import_cost(), 5.0
