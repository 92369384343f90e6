"""Live following, by counts: what is not needed is not done, and the last value is the one shown."""

from collections.abc import Callable

import pytest
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
STEPS = 100


def drag_the_cloud(window: MainWindow, steps: int = STEPS) -> tuple[float, float]:
    """Drag the point on the map by mouse events, painting as the event loop does; returns where it was let go."""
    canvas = window.desk.map.plot.canvas
    cloud = window.document.plan.cloud
    start = canvas.place_of(cloud.atoms.value, cloud.temperature.value)
    assert start is not None
    at = QPointF(*start)
    QTest.mousePress(canvas, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, at.toPoint())
    for step in range(1, steps + 1):
        at = QPointF(start[0] - step, start[1] + 0.8 * step)
        QTest.mouseMove(canvas, at.toPoint())
        QApplication.processEvents()
    QTest.mouseRelease(canvas, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, at.toPoint())
    QApplication.processEvents()
    return at.x(), at.y()


def test_a_drag_draws_nothing_twice_and_shows_the_last_value(window: MainWindow, settle: Settle) -> None:
    desk, document = window.desk, window.document
    before = document.plan
    canvases = {page.title: [plot.canvas for plot in page.plots] for page in desk.pages}
    map_canvas = desk.map.plot.canvas
    full, live = map_canvas.full_draws, map_canvas.live_frames
    hidden = [canvas for title in ("Slices", "Profile") for canvas in canvases[title]]
    hidden_before = [(canvas.full_draws, canvas.live_frames) for canvas in hidden]
    end = drag_the_cloud(window)
    settle(window)
    # the plan followed, as one step
    assert document.plan.cloud != before.cloud
    assert document.stack.count() == 1
    # no full redraw, at most one frame a step, nothing hidden was rendered
    assert map_canvas.full_draws == full
    assert 10 < map_canvas.live_frames - live <= STEPS + 10
    assert [(canvas.full_draws, canvas.live_frames) for canvas in hidden] == hidden_before
    assert all(canvas.renders_hidden == 0 for group in canvases.values() for canvas in group)
    # at most one job waited while one ran
    assert window.answers.newest.most_waiting <= 1
    # the last value is the one shown, everywhere
    cloud = document.plan.cloud
    assert window.answers.cloud is not None
    assert window.answers.cloud.plan == document.plan
    assert map_canvas.picture is not None
    mark = map_canvas.picture.marks[0]
    assert (mark.x, mark.y) == (cloud.atoms.value, cloud.temperature.value)
    place = map_canvas.place_of(mark.x, mark.y)
    assert place == pytest.approx(end, abs=2.0)
    assert desk.bench.cloud.temperature.text() == cloud.temperature.text
    # undo is one step
    document.stack.undo()
    assert document.plan == before


def test_edits_between_two_turns_of_the_event_loop_cost_one_answer(window: MainWindow, settle: Settle) -> None:
    from dataclasses import replace

    from app.kinds import TEMPERATURE
    from app.units import read_quantity

    settle(window)
    count = window.answers.cloud_count
    for value in range(100, 150):
        plan = window.document.plan
        cloud = replace(plan.cloud, temperature=read_quantity(f"{value} nK", TEMPERATURE))
        window.document.edit(replace(plan, cloud=cloud), "temperature", "same")
    settle(window)
    assert window.answers.cloud_count == count + 1
    assert window.desk.bench.cloud.temperature.text() == "149 nK"


def test_the_map_is_computed_once_while_the_cloud_moves_on_it(window: MainWindow, settle: Settle) -> None:
    ground = window.desk.map._ground
    drag_the_cloud(window, 30)
    settle(window)
    assert window.desk.map._ground is ground


def test_a_hidden_page_asks_for_nothing_and_catches_up_when_shown(window: MainWindow, settle: Settle) -> None:
    desk = window.desk
    desk.show_page(2)
    settle(window)
    profile = [plot.canvas for plot in desk.profile.plots]
    shown = [canvas.picture for canvas in profile]
    assert None not in shown
    desk.show_page(0)
    drag_the_cloud(window, 40)
    settle(window)
    assert [canvas.picture for canvas in profile] == shown
    desk.show_page(2)
    settle(window)
    assert all(canvas.picture is not old for canvas, old in zip(profile, shown, strict=True))


def test_double_click_sets_the_cloud_there(window: MainWindow) -> None:
    canvas = window.desk.map.plot.canvas
    place = canvas.place_of(1e6, 1e-6)
    assert place is not None
    QTest.mouseDClick(canvas, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, QPointF(*place).toPoint())
    cloud = window.document.plan.cloud
    assert cloud.atoms.value == pytest.approx(1e6, rel=0.03)
    assert cloud.temperature.value == pytest.approx(1e-6, rel=0.03)
    assert cloud.atoms.sigma is not None
    assert cloud.atoms.sigma / cloud.atoms.value == pytest.approx(0.1, rel=0.1)


def test_the_pointer_reads_the_cloud_that_would_be_there(window: MainWindow) -> None:
    page = window.desk.map
    page.plot.canvas.pointer_moved.emit((1e5, 2e-7))
    assert page.bar.status.text.startswith("N = 1.00e5   T = 200 nK   D = ")
    assert "T/Tc = 1.4" in page.bar.status.text


def test_a_long_way_by_many_moves_keeps_the_relative_uncertainty(window: MainWindow, settle: Settle) -> None:
    before = window.document.plan.cloud
    assert before.atoms.sigma is not None
    for _ in range(40):
        QTest.keyClick(window.desk.map.plot.canvas, Qt.Key.Key_Right)
        settle(window)
    after = window.document.plan.cloud
    assert after.atoms.value > 2.0 * before.atoms.value
    assert after.atoms.sigma is not None
    relative = after.atoms.sigma / after.atoms.value
    assert relative == pytest.approx(before.atoms.sigma / before.atoms.value, rel=0.2)  # one digit is written
