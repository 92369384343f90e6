"""Frames of live canvases against full draws of the same pictures with axes and artists, alternating in one run.

Drawing only: the pictures are those of the pages, computed beforehand for a trap that is squeezed step by step, so that
all curves and the whole map move in every frame. A frame lasts from `show_picture` to the end of the paint.
"""

from __future__ import annotations

import os
import statistics
import time
from collections.abc import Callable, Iterator, Sequence
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
os.environ.setdefault("QT_API", "pyside6")

from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from PySide6.QtWidgets import QApplication

from app.engine import Against, cloud_answer, map_answer, profile_answer, slices_answer, usual_limits
from app.figures.draw import draw_picture
from app.figures.map import map_picture
from app.figures.picture import Picture
from app.figures.profile import Depth, profile_picture
from app.figures.slices import slice_picture
from app.plan import plan_with
from app.plan_file import read_plan
from app.window.live_canvas import DPI, LiveCanvas

PLAN = Path(__file__).resolve().parents[2] / "presets" / "plans" / "crossed_trap_rubidium.toml"
STEPS = 12
ROUNDS = 60
SLICED = ("peak_density", "elastic_collision_rate", "condensate_fraction")
# a window of 1400 x 900: the map, three slices, a profile
SIZES = ((786, 603), (604, 285), (604, 285), (604, 285), (786, 259))


def _pictures() -> list[tuple[Picture, ...]]:
    """For each step, the five pictures of the window; every kind keeps the limits of its first step."""
    base = read_plan(PLAN)
    steps = []
    limits = usual_limits(base)
    for step in range(STEPS):
        stronger = ", ".join(f"{f * 1.01**step:.6g} Hz" for f in (120.0, 120.0, 20.0))
        plan = plan_with(base, {"trap.frequencies": stronger})
        cloud = cloud_answer(plan)
        slices = slices_answer(plan, SLICED)
        steps.append(
            (
                map_picture(map_answer(plan, limits), cloud),
                *(slice_picture(slices, name, Against.TEMPERATURE) for name in SLICED),
                profile_picture(profile_answer(plan), Depth.DENSITY),
            )
        )
    return steps


def _paint(canvases: Sequence[LiveCanvas], prepare: Callable[[], None]) -> float:
    begin = time.perf_counter()
    prepare()
    QApplication.processEvents()
    return 1e3 * (time.perf_counter() - begin)


def _measure(canvases: Sequence[LiveCanvas], steps: Sequence[Sequence[Picture]]) -> tuple[list[float], list[float]]:
    """Milliseconds of live frames and of full draws; a frame whose axes had to change counts as neither."""
    live, full = [], []
    figures = [Figure(figsize=(canvas.width() / DPI, canvas.height() / DPI), dpi=DPI) for canvas in canvases]
    for figure in figures:
        FigureCanvasAgg(figure)
    for turn in range(ROUNDS):
        pictures = steps[turn % len(steps)]
        before = sum(canvas.full_draws for canvas in canvases)

        def show(pictures: Sequence[Picture] = pictures) -> None:
            for canvas, picture in zip(canvases, pictures, strict=True):
                canvas.show_picture(lambda picture=picture: picture)

        def redraw(pictures: Sequence[Picture] = pictures) -> None:
            for figure, picture in zip(figures, pictures, strict=True):
                figure.clear()
                draw_picture(picture, figure.add_axes((0.0, 0.0, 1.0, 1.0)))
                figure.canvas.draw()

        spent = _paint(canvases, show)
        if sum(canvas.full_draws for canvas in canvases) == before:
            live.append(spent)
        if turn % 4 == 0:
            full.append(_paint(canvases, redraw))
    return live[3:], full[1:]


def rows() -> Iterator[tuple[str, float, float | None]]:
    """(what, measured, goal) as the printer of the table wants it."""
    application = QApplication.instance() or QApplication([])
    steps = _pictures()
    canvases = [LiveCanvas() for _ in SIZES]
    for canvas, size, picture in zip(canvases, SIZES, steps[0], strict=True):
        canvas.resize(*size)
        canvas.show_picture(lambda picture=picture: picture)
        canvas.show()
    application.processEvents()
    for name, place in (("map", 0), ("slice", 1), ("profile", 4)):
        live, full = _measure(canvases[place : place + 1], [step[place : place + 1] for step in steps])
        yield f"{name}: live frame / full draw", statistics.median(live) / statistics.median(full), 0.08
        yield f"{name}: live frame [ms]", statistics.median(live), None
    live, full = _measure(canvases, steps)
    yield "window of five plots: live frame / full draw", statistics.median(live) / statistics.median(full), 0.08
    yield "window of five plots: live frame, median [ms]", statistics.median(live), 33.0
    yield "window of five plots: live frame, 95 % [ms]", statistics.quantiles(live, n=20)[-1], 60.0
    for canvas in canvases:
        canvas.close()
