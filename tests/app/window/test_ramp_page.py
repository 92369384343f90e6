"""The page Ramp: stages typed and dragged become other curves and another verdict, and can be taken back."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import QEvent, QPointF, Qt
from PySide6.QtGui import QKeyEvent, QMouseEvent
from PySide6.QtWidgets import QApplication, QScrollArea
from pytestqt.qtbot import QtBot

from app.figures.picture import Role
from app.figures.ramp_columns import ATOMS, TEMPERATURE
from app.pages.ramp import RampPage
from app.plan import DEFAULT_PLAN, Plan, plan_with, read_plan
from app.ramp_choices import MeasuredChoice
from app.ramp_edits import usual_ramp, with_move, with_new_stage
from app.units import ATOM_NUMBER, DEPTH, DURATION, read_quantity
from app.units import TEMPERATURE as TEMPERATURE_KIND
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
EXAMPLE = Path(__file__).resolve().parents[3] / "presets" / "plans" / "evaporation_rubidium.toml"


def plan_with_ramp() -> Plan:
    """Rubidium that condenses in seconds."""
    plan = replace(
        DEFAULT_PLAN,
        cloud=replace(
            DEFAULT_PLAN.cloud,
            atoms=read_quantity("5e6", ATOM_NUMBER),
            temperature=read_quantity("3 uK", TEMPERATURE_KIND),
        ),
    )
    plan = replace(plan, ramp=usual_ramp(plan))
    return with_new_stage(plan, 1)


@pytest.fixture
def window(lasting_window: MainWindow, settle: Settle) -> MainWindow:
    page = load(lasting_window, settle, plan_with_ramp())
    page.drop_references()
    page.read_time(None)
    return lasting_window


def load(window: MainWindow, settle: Settle, plan: Plan) -> RampPage:
    window.document.load(plan, None, None)
    page = show_ramp(window, settle)
    page.panel.choose_view("Course")
    settle(window)
    return page


def show_ramp(window: MainWindow, settle: Settle) -> RampPage:
    window.desk.tabs.setCurrentWidget(window.desk.ramp)
    settle(window)
    return window.desk.ramp


def type_over(qtbot: QtBot, field, text: str) -> None:
    field.setFocus()
    field.selectAll()
    qtbot.keyClicks(field, text)


def curve_of(page: RampPage, column, role: Role = Role.FIRST) -> np.ndarray:
    picture = page.panel.columns.plots[column].picture()
    return next(curve.y for curve in picture.curves if curve.role is role)


def test_the_page_says_what_the_ramp_reaches_and_what_to_change(window):
    page = window.desk.ramp
    assert "condensed" in page.panel.sentence.text()
    assert page.panel.detail.text().startswith("Condenses after ")
    rows = page.panel.table.row_texts()
    assert [row[0] for row in rows] == ["start", "1  lower the depth", "2", "in all"]
    assert "evaporated" in rows[1][-1]
    final = page.answer.run.final["atoms"]
    assert curve_of(page, ATOMS)[-1] == pytest.approx(final)


def test_caveats_of_the_ramp_have_a_view_and_a_count(window):
    page = window.desk.ramp
    lines = page.panel.caveats.lines
    assert len(lines) == len(page.answer.caveats) > 0
    assert any("No background lifetime is given" in line.sentence for line in lines)
    buttons = {button.text() for button in page.panel.choice.buttons()}
    assert f"Caveats {lines[0].sign} {len(lines)}" in buttons
    page.panel.choose_view("Caveats")
    assert page.panel.caveats.isVisible()
    assert not page.panel.columns.isVisible()


def test_a_typed_duration_changes_curves_and_verdict_and_undo_takes_it_back(qtbot, window, settle):
    page = window.desk.ramp
    page.panel.choose_view("Stages")
    before, sentence = curve_of(page, ATOMS), page.panel.sentence.text()
    steps = window.document.stack.count()
    type_over(qtbot, page.panel.stages.durations[0], "0.5 s")
    settle(window)
    assert window.document.plan.ramp[0].duration.text == "0.5 s"
    assert curve_of(page, ATOMS)[-1] < 0.9 * before[-1]
    assert page.panel.sentence.text() != sentence
    assert window.document.stack.count() == steps + 1  # however many keys it took
    window.document.stack.undo()
    settle(window)
    assert page.panel.sentence.text() == sentence
    assert page.panel.stages.durations[0].text() == "5 s"


def test_bad_input_keeps_the_last_good_answer_and_says_what_is_wrong(qtbot, window, settle):
    page = window.desk.ramp
    page.panel.choose_view("Stages")
    before = curve_of(page, ATOMS)
    type_over(qtbot, page.panel.stages.durations[0], "5 K")
    page.panel.stages.durations[0].commit()
    settle(window)
    assert "duration" in page.panel.stages.problem
    assert page.panel.columns.plots[ATOMS].canvas.stale_text == "last good answer"
    assert np.array_equal(curve_of(page, ATOMS), before)
    type_over(qtbot, page.panel.stages.durations[0], "5 s")
    settle(window)
    assert page.panel.stages.problem == ""
    assert page.panel.columns.plots[ATOMS].canvas.stale_text is None


def test_a_value_that_no_ramp_can_have_is_refused_beside_its_field(qtbot, window, settle):
    page = window.desk.ramp
    page.panel.choose_view("Stages")
    line = page.panel.stages.moves[0][0]
    type_over(qtbot, line.start, "")
    qtbot.keyClick(line.start, Qt.Key.Key_Delete)
    line.start.commit()
    assert "needs a start of depth, which is not known" in page.panel.stages.problem
    assert window.document.plan.ramp[0].moves[0].start is not None


def test_stages_are_added_copied_moved_and_removed(window, settle):
    page = window.desk.ramp
    page.panel.choose_view("Stages")
    editor = page.panel.stages
    editor.hold_button.click()
    settle(window)
    assert [bool(stage.moves) for stage in window.document.plan.ramp] == [True, True, False]
    assert len(editor.durations) == 3
    assert editor.durations[2].hasFocus()
    menu = editor.menus[2]
    menu.aboutToShow.emit()
    action(menu, "Move up").trigger()
    settle(window)
    assert [bool(stage.moves) for stage in window.document.plan.ramp] == [True, False, True]
    menu = editor.menus[0]
    menu.aboutToShow.emit()
    action(menu, "Duplicate").trigger()
    settle(window)
    assert len(window.document.plan.ramp) == 4
    assert window.document.plan.ramp[1].moves[0].start is None
    menu = editor.menus[3]
    menu.aboutToShow.emit()
    action(menu, "Remove").trigger()
    settle(window)
    assert len(window.document.plan.ramp) == 3
    for _ in range(4):
        window.document.stack.undo()
    settle(window)
    assert window.document.plan.ramp == plan_with_ramp().ramp


def action(menu, text: str):
    return next(one for one in menu.actions() if one.text().replace("&", "") == text)


def test_the_keyboard_walks_through_the_table_row_by_row(qtbot, window, settle):
    page = window.desk.ramp
    page.panel.choose_view("Stages")
    settle(window)
    editor = page.panel.stages
    editor.durations[0].setFocus()
    first, second = editor.moves[0][0], editor.moves[1][0]
    walk = [*first.widgets, editor.labels[0], editor.menus[0].parentWidget(), editor.durations[1], *second.widgets]
    for widget in walk:
        qtbot.keyClick(QApplication.focusWidget(), Qt.Key.Key_Tab)
        assert QApplication.focusWidget() is widget, widget.accessibleName()
        assert widget.accessibleName()


def test_another_control_and_another_shape_are_chosen(window, settle):
    page = window.desk.ramp
    page.panel.choose_view("Stages")
    editor = page.panel.stages
    menu = editor.menus[0]
    menu.aboutToShow.emit()
    more = next(one for one in menu.actions() if one.menu() is not None).menu()
    assert [one.text() for one in more.actions()] == ["scale"]
    more.actions()[0].trigger()
    settle(window)
    assert [move.control.label for move in window.document.plan.ramp[0].moves] == ["depth", "scale"]
    assert len(page.panel.controls.plots) == 2
    shape = editor.moves[0][0].shape
    shape.setCurrentIndex(2)
    shape.activated.emit(2)
    settle(window)
    move = window.document.plan.ramp[0].moves[0]
    assert move.shape.value == "power law"
    assert move.exponent.value == 2.0
    assert editor.moves[0][0].exponent is not None


def test_the_end_of_a_stage_is_dragged(qtbot, window, settle):
    page = window.desk.ramp
    plot = page.panel.controls.plots[0]
    index = next(k for k, handle in enumerate(page.panel.controls.curves[0].handles) if not handle.start)
    mark = plot.picture().marks[index]
    steps = window.document.stack.count()
    place = QPointF(*plot.canvas.place_of(mark.x, mark.y))
    goal = QPointF(*plot.canvas.place_of(mark.x - 2.0, mark.y * 2.0))
    mouse(plot.canvas, QEvent.Type.MouseButtonPress, place)
    mouse(plot.canvas, QEvent.Type.MouseMove, 0.5 * (place + goal))
    settle(window)
    mouse(plot.canvas, QEvent.Type.MouseMove, goal)
    mouse(plot.canvas, QEvent.Type.MouseButtonRelease, goal)
    settle(window)
    first = window.document.plan.ramp[0]
    assert first.duration.value == pytest.approx(3.0, abs=0.1)
    assert first.moves[0].end.value / plan_with_ramp().ramp[0].moves[0].end.value == pytest.approx(2.0, rel=0.1)
    assert window.document.stack.count() == steps + 1
    window.document.stack.undo()
    assert window.document.plan.ramp == plan_with_ramp().ramp


def mouse(widget, kind: QEvent.Type, at: QPointF) -> None:
    button = Qt.MouseButton.NoButton if kind is QEvent.Type.MouseMove else Qt.MouseButton.LeftButton
    event = QMouseEvent(
        kind, at, widget.mapToGlobal(at), button, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
    )
    QApplication.sendEvent(widget, event)


def key(widget, code: Qt.Key) -> None:
    for kind in (QEvent.Type.KeyPress, QEvent.Type.KeyRelease):
        QApplication.sendEvent(widget, QKeyEvent(kind, code, Qt.KeyboardModifier.NoModifier))


def test_arrow_keys_move_the_end_of_a_stage_and_leave_its_duration(window, settle):
    page = window.desk.ramp
    plot = page.panel.controls.plots[0]
    plot.canvas.setFocus()
    before = window.document.plan.ramp[0]
    mark = plot.picture().marks[1]  # the first one is the start
    place = QPointF(*plot.canvas.place_of(mark.x, mark.y))
    mouse(plot.canvas, QEvent.Type.MouseButtonPress, place)
    mouse(plot.canvas, QEvent.Type.MouseButtonRelease, place)
    key(plot.canvas, Qt.Key.Key_Up)
    settle(window)
    after = window.document.plan.ramp[0]
    assert after.moves[0].end.value > before.moves[0].end.value
    assert after.duration == before.duration


def test_all_plots_read_one_time_by_keyboard_and_by_pointer(window, settle):
    page = window.desk.ramp
    canvas = page.panel.columns.plots[TEMPERATURE].canvas
    canvas.setFocus()
    for _ in range(3):
        key(canvas, Qt.Key.Key_Right)
    assert page.reading == pytest.approx(0.03 * page.answer.run.time[-1])
    for column, plot in page.panel.columns.plots.items():
        picture = plot.picture()
        mark = next(mark for mark in picture.marks if mark.role is Role.CLOUD)
        assert mark.x == page.reading, column.name
    assert "stage 1" in page.bar.status.text
    key(canvas, Qt.Key.Key_Escape)
    assert page.reading is None


def test_a_reference_is_kept_drawn_and_compared(qtbot, window, settle):
    page = window.desk.ramp
    page.keep_reference()
    kept = curve_of(page, ATOMS, Role.REFERENCE)
    page.panel.choose_view("Stages")
    type_over(qtbot, page.panel.stages.durations[0], "3 s")
    settle(window)
    assert np.array_equal(curve_of(page, ATOMS, Role.REFERENCE), kept)
    assert not np.array_equal(curve_of(page, ATOMS)[:10], kept[:10])
    assert "2.00 s shorter" in page.panel.detail.text()
    page.drop_references()
    assert not any(c.role is Role.REFERENCE for c in page.panel.columns.plots[ATOMS].picture().curves)


def test_a_reference_stays_beside_another_plan(window, settle):
    page = window.desk.ramp
    page.keep_reference()
    kept = curve_of(page, ATOMS, Role.REFERENCE)
    other = replace(plan_with_ramp(), title="another", ramp=plan_with_ramp().ramp[:1])
    window.document.load(other, None, None)
    settle(window)
    assert np.array_equal(curve_of(page, ATOMS, Role.REFERENCE), kept)
    page.keep_reference()
    assert [ref.name for ref in page.references] == ["Rubidium in a cigar-shaped trap", "another"]
    assert "Beside “another”: N × 1, T × 1, D × 1, as long." in page.panel.detail.text()


def test_measured_clouds_are_points_with_errors(window, settle):
    cloud = MeasuredChoice(
        label="after one",
        stage=1,
        atoms=read_quantity("1.5(2)e6", ATOM_NUMBER),
        temperature=read_quantity("400(30) nK", TEMPERATURE_KIND),
    )
    page = load(window, settle, replace(plan_with_ramp(), measured=(cloud,)))
    picture = page.panel.columns.plots[ATOMS].picture()
    (mark,) = [mark for mark in picture.marks if mark.role is Role.MEASURED]
    assert (mark.x, mark.y) == (5.0, 1.5e6)
    (bar,) = [curve for curve in picture.curves if curve.role is Role.MEASURED]
    assert bar.y.tolist() == [1.3e6, 1.7e6]


def test_a_plan_without_a_ramp_offers_a_usual_one(window, settle):
    page = load(window, settle, DEFAULT_PLAN)
    assert page.panel.empty.isVisible()
    page.panel.empty.buttons()[0].click()
    settle(window)
    (stage,) = window.document.plan.ramp
    assert stage.duration.text == "5 s"
    assert stage.moves[0].start.value / stage.moves[0].end.value == pytest.approx(10.0)
    assert not page.panel.empty.isVisible()
    assert len(page.panel.table.row_texts()) == 2


def test_stages_survive_saving_and_reading(qtbot, window, settle, tmp_path):
    page = window.desk.ramp
    page.panel.choose_view("Stages")
    type_over(qtbot, page.panel.stages.durations[1], "750 ms")
    settle(window)
    path = tmp_path / "ramp.toml"
    assert window.files._write(path)
    assert read_plan(path).ramp == window.document.plan.ramp
    assert read_quantity("750 ms", DURATION) == window.document.plan.ramp[1].duration


def test_the_map_shows_the_ramp_with_the_ends_of_its_stages(qtbot, window, settle):
    window.desk.tabs.setCurrentWidget(window.desk.map)
    settle(window)
    picture = window.desk.map.plot.picture()
    (way,) = [curve for curve in picture.curves if curve.role is Role.TRACK]
    ends = [mark for mark in picture.marks if mark.role is Role.TRACK]
    assert len(ends) == 2
    assert (ends[-1].x, ends[-1].y) == (way.x[-1], way.y[-1])
    assert way.x[0] == pytest.approx(5e6)
    cloud = window.document.plan.cloud
    window.document.edit(
        replace(window.document.plan, cloud=replace(cloud, atoms=read_quantity("2e6", ATOM_NUMBER))), "atoms", ""
    )
    settle(window)
    (way,) = [c for c in window.desk.map.plot.picture().curves if c.role is Role.TRACK]
    assert way.x[0] == pytest.approx(2e6)
    window.document.edit(replace(window.document.plan, ramp=()), "ramp", "")
    settle(window)
    assert not any(curve.role is Role.TRACK for curve in window.desk.map.plot.picture().curves)


def test_in_a_low_window_nothing_stands_upon_another(make_window: Callable[..., MainWindow], settle: Settle) -> None:
    low = make_window(plan_with_ramp(), size=(1024, 700))
    page = show_ramp(low, settle)
    for temperature in ("3.1 uK", "3.2 uK"):
        low.document.edit(plan_with(low.document.plan, {"cloud.temperature": temperature}), "temperature")
        settle(low)
        parts = [page.panel.columns, page.panel.controls, page.panel._under]
        shown = sorted((part.geometry() for part in parts if part.isVisible()), key=lambda place: place.top())
        assert page.panel.controls.isHidden()
        assert all(upper.bottom() < lower.top() for upper, lower in pairwise(shown))
    page.panel.choose_view("Stages")
    settle(low)
    assert page.panel.controls.isVisible()
    low.document.load(read_plan(EXAMPLE), None, None)
    page.panel.choose_view("Measured")
    settle(low)
    assert len(page.panel.measured.labels) == 2
    bars = [area.horizontalScrollBar() for area in page.panel.measured.findChildren(QScrollArea)]
    assert bars
    assert not any(bar.isVisible() for bar in bars)


def test_controls_are_drawn_anew_where_they_change_and_only_there(window: MainWindow, settle: Settle) -> None:
    page = window.desk.ramp
    canvas = page.panel.controls.plots[0].canvas
    drawn, cloud = canvas.live_frames, page.panel.columns.plots[ATOMS].canvas.live_frames
    window.document.edit(plan_with(window.document.plan, {"cloud.atoms": "4e6"}), "atoms")
    settle(window)
    assert canvas.live_frames == drawn
    assert page.panel.columns.plots[ATOMS].canvas.live_frames > cloud
    lower = replace(window.document.plan.ramp[0].moves[0], end=read_quantity("2 uK", DEPTH))
    window.document.edit(with_move(window.document.plan, 0, 0, lower), "end")
    settle(window)
    assert canvas.live_frames > drawn
