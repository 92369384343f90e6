"""Whole-process figures: the command line and the window's start, against bare processes in the same run."""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
ROUNDS = 7
PLAN = str(ROOT / "presets" / "plans" / "crossed_trap_rubidium.toml")

_BARE_WINDOW = """
from PySide6.QtWidgets import QApplication, QMainWindow
app = QApplication([]); window = QMainWindow(); window.resize(1400, 900); window.show()
app.processEvents()
"""
_BARE_CANVAS = """
from PySide6.QtWidgets import QApplication, QMainWindow
app = QApplication([]); window = QMainWindow(); window.resize(1400, 900)
from matplotlib.backends.backend_qtagg import FigureCanvasQTAgg
from matplotlib.figure import Figure
canvas = FigureCanvasQTAgg(Figure())
axes = canvas.figure.add_subplot(); axes.plot([1, 10], [1, 10]); axes.set(xscale="log", yscale="log")
window.setCentralWidget(canvas); window.show()
app.processEvents(); app.processEvents()
"""


def _seconds(command: list[str]) -> float:
    environment = {**os.environ, "PYTHONPATH": str(ROOT), "QT_QPA_PLATFORM": "offscreen"}
    begin = time.perf_counter()
    subprocess.run(command, check=True, cwd=ROOT, env=environment, stdout=subprocess.DEVNULL)
    return time.perf_counter() - begin


def _ratio(ours: list[str], reference: list[str]) -> float:
    """Median of the ratios of runs in turn, so that a drift of the machine cancels."""
    _seconds(ours), _seconds(reference)
    return statistics.median(_seconds(ours) / _seconds(reference) for _ in range(ROUNDS))


def rows() -> Iterator[tuple[str, float, float | None]]:
    """(what, measured, goal)."""
    python = sys.executable
    yield (
        "coldward state, over python importing numpy and scipy.special",
        _ratio([python, "-m", "app", "state", PLAN], [python, "-c", "import numpy, scipy.special"]),
        2.0,
    )
    yield (
        "empty window painted, over a bare Qt window",
        _ratio([python, "-m", "app", "window", PLAN, "--quit-after", "first paint"], [python, "-c", _BARE_WINDOW]),
        1.5,
    )
    yield (
        "plots on screen, over a bare window with one Matplotlib canvas",
        _ratio([python, "-m", "app", "window", PLAN, "--quit-after", "plots"], [python, "-c", _BARE_CANVAS]),
        1.5,
    )
