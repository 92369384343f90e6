"""Whole-process figures: the command line and the window's start, against bare processes in the same run."""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import tempfile
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


_FIRST_PAINT = """
import sys
from app.__main__ import main
import app.window.start as start
start.furnish_window = lambda window, wishes: start.QApplication.instance().quit()
main(["window", sys.argv[1], "--settings-dir", sys.argv[2]])
"""
_PLOTS = """
import sys
from app.__main__ import main
import app.window.start as start
furnish = start.furnish_window
def furnish_and_wait(window, wishes):
    furnish(window, wishes)
    canvas = window.desk.map.plot.canvas
    while canvas.full_draws == 0:
        start.QApplication.processEvents()
    start.QApplication.instance().quit()
start.furnish_window = furnish_and_wait
main(["window", sys.argv[1], "--settings-dir", sys.argv[2]])
"""


def _seconds(command: list[str]) -> float:
    environment = {**os.environ, "PYTHONPATH": str(ROOT), "QT_QPA_PLATFORM": "offscreen"}
    # Start-up is measured as a user meets it: with compiled modules on the disk.
    environment.pop("PYTHONDONTWRITEBYTECODE", None)
    begin = time.perf_counter()
    subprocess.run(command, check=True, cwd=ROOT, env=environment, stdout=subprocess.DEVNULL)
    return time.perf_counter() - begin


def _ratio(ours: list[str], reference: list[str]) -> float:
    """Median of the ratios of runs in turn, so that a drift of the machine cancels."""
    for command in (ours, reference):
        _seconds(command)
    return statistics.median(_seconds(ours) / _seconds(reference) for _ in range(ROUNDS))


def rows() -> Iterator[tuple[str, float, float | None]]:
    """(what, measured, goal)."""
    python = sys.executable
    with tempfile.TemporaryDirectory() as settings:
        yield (
            "coldward state, over python importing numpy and scipy.special",
            _ratio([python, "-m", "app", "state", PLAN], [python, "-c", "import numpy, scipy.special"]),
            2.0,
        )
        yield (
            "empty window painted, over a bare Qt window",
            _ratio([python, "-c", _FIRST_PAINT, PLAN, settings], [python, "-c", _BARE_WINDOW]),
            1.5,
        )
        yield (
            "plots on screen, over a bare window with one Matplotlib canvas",
            _ratio([python, "-c", _PLOTS, PLAN, settings], [python, "-c", _BARE_CANVAS]),
            1.5,
        )
