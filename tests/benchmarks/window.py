"""From a changed value to the painted window, 1400 x 900, on each page: milliseconds, and as a share of a full draw.

A frame lasts from the edit of the plan until forms, verdict, readouts, caveats and the page's plots are painted with
the new answer. The ordinary draw is that of the page's plots alone, with axes and artists, in the same run.
"""

from __future__ import annotations

import os
import statistics
import tempfile
import time
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
os.environ.setdefault("QT_API", "pyside6")

from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from PySide6.QtCore import QSize
from PySide6.QtWidgets import QApplication

from app.figures.draw import draw_picture
from app.figures.picture import Picture
from app.figures.theme import Theme
from app.passenger_edits import with_usual_passenger
from app.plan import Plan, plan_with, read_plan
from app.ramp_edits import usual_ramp
from app.widgets.page import Page
from app.window.live_canvas import DPI, LiveCanvas
from app.window.main_window import MainWindow
from app.window.settings import Settings
from app.window.start import application

PLAN = Path(__file__).resolve().parents[2] / "presets" / "plans" / "crossed_trap_rubidium.toml"
FRAMES = 60


def _settle(window: MainWindow) -> None:
    while not window.answers.settled:
        QApplication.processEvents()
        time.sleep(5e-5)  # as an event loop at rest, so that the worker has the interpreter to itself
    QApplication.processEvents()


def _frame(window: MainWindow, plan: Plan) -> float:
    begin = time.perf_counter()
    window.document.edit(plan, "temperature", "benchmark")
    _settle(window)
    return 1e3 * (time.perf_counter() - begin)


def _full_draw(pictures: list[tuple[Figure, Picture, Theme]]) -> float:
    """Milliseconds of drawing these pictures as files are drawn, with axes and artists."""
    begin = time.perf_counter()
    for figure, picture, theme in pictures:
        figure.clear()
        draw_picture(picture, figure.add_axes((0.0, 0.0, 1.0, 1.0)), theme)
        figure.canvas.draw()
    return 1e3 * (time.perf_counter() - begin)


def _figures(page: Page) -> list[tuple[Figure, Picture, Theme]]:
    """What the page shows in its plots, with figures of their size."""
    found = []
    for canvas in page.findChildren(LiveCanvas):
        if canvas.isVisible() and canvas.picture is not None:
            figure = Figure(figsize=(canvas.width() / DPI, canvas.height() / DPI), dpi=DPI)
            FigureCanvasAgg(figure)
            found.append((figure, canvas.picture, canvas.theme))
    return found


def rows() -> Iterator[tuple[str, float, float | None]]:
    """(what, measured, goal)."""
    application()
    base = plan_with(read_plan(PLAN), {"species.state": "F=1 mF=+1", "species.field": "1000 G"})
    # Slow enough that axes hold still, as in a drag; trap and field move with the temperature, so that maps and curves
    # change too.
    steps = [
        plan_with(
            base,
            {
                "cloud.temperature": f"{170 + 0.5 * step:.6g}(10) nK",
                "trap.frequencies": f"{120 + 0.02 * step:.6g} Hz, 120 Hz, 20 Hz",
                "species.field": f"{1000 + 0.02 * step:.7g} G",
            },
        )
        for step in range(FRAMES)
    ]
    ramp = usual_ramp(base)
    with_ramp = [replace(plan, ramp=ramp) for plan in steps]
    with_passenger = [with_usual_passenger(plan) for plan in steps]
    with tempfile.TemporaryDirectory() as folder:
        window = MainWindow(Settings(Path(folder)), size=QSize(1400, 900))
        window.show()
        window.furnish(base)
        for place, page in enumerate(window.desk.pages):
            window.desk.show_page(place)
            _settle(window)
            shown = steps
            if page is window.desk.ramp:
                shown = with_ramp
            elif page is window.desk.mixture:
                shown = with_passenger
            for plan in shown[:8]:
                _frame(window, plan)
            live = [_frame(window, plan) for plan in shown]
            figures = _figures(page)
            median = statistics.median(live)
            yield f"{page.title}: value changed to painted, ms, median", median, 33.0
            yield f"{page.title}: value changed to painted, ms, 95th percentile", sorted(live)[int(0.95 * FRAMES)], 60.0
            if figures:
                full = statistics.median(_full_draw(figures) for _ in range(7))
                yield f"{page.title}: the same over an ordinary draw of its plots", median / full, None
        window.document.stack.setClean()
        window.close()
