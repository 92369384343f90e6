"""The Field page: the field dragged along its curve, set by a double click, typed; and states that no field tunes."""

from collections.abc import Callable

import pytest
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLabel

from app.kinds import MAGNETIC_FIELD, SCATTERING_LENGTH
from app.pages.field import HINT, HINT_WITHOUT, FieldPage
from app.plan import DEFAULT_PLAN, plan_with
from app.units import read_quantity
from app.widgets.form import plan_with_entry
from app.window.main_window import MainWindow
from physics.constants import bohr_radius

Settle = Callable[[MainWindow], None]
MakeWindow = Callable[..., MainWindow]
RUBIDIUM = {"species.key": "85Rb", "species.field": "163.0(1) G"}


@pytest.fixture
def page(load_plan: MakeWindow, settle: Settle) -> FieldPage:
    return open_page(load_plan, settle, RUBIDIUM)


def open_page(load_plan: MakeWindow, settle: Settle, entries: dict[str, str]) -> FieldPage:
    window = load_plan(plan_with(DEFAULT_PLAN, entries))
    window.actions_by_id["view.field"].trigger()
    settle(window)
    return window.desk.field


def window_of(page: FieldPage) -> MainWindow:
    window = page.window()
    assert isinstance(window, MainWindow)
    return window


def drag(page: FieldPage, pixels: int, steps: int = 40) -> None:
    """Drag the field to the right by mouse events, painting as the event loop does."""
    canvas = page.plot.canvas
    assert canvas.picture is not None
    mark = next(mark for mark in canvas.picture.marks if mark.draggable)
    start = canvas.place_of(mark.x, mark.y)
    assert start is not None
    at = QPointF(*start)
    QTest.mousePress(canvas, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, at.toPoint())
    for step in range(1, steps + 1):
        at = QPointF(start[0] + pixels * step / steps, start[1])
        QTest.mouseMove(canvas, at.toPoint())
        QApplication.processEvents()
    QTest.mouseRelease(canvas, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, at.toPoint())
    QApplication.processEvents()


def test_a_drag_of_the_field_moves_it_along_the_curve_in_one_step(page: FieldPage, settle: Settle) -> None:
    window = window_of(page)
    before = window.document.plan
    length_before = window.answers.cloud.scattering.value if window.answers.cloud else None
    full, live = page.plot.canvas.full_draws, page.plot.canvas.live_frames
    drag(page, 60)
    settle(window)
    plan = window.document.plan
    assert plan.species.field is not None
    assert plan.species.field.value > 170e-4
    assert plan.species.field.sigma == pytest.approx(1e-5)
    assert window.document.stack.count() == 1
    # the mark is on the curve, nothing around it was drawn anew, and every frame was
    picture = page.plot.canvas.picture
    assert picture is not None
    mark = next(mark for mark in picture.marks if mark.draggable)
    assert mark.x == pytest.approx(plan.species.field.value * 1e4)
    cloud = window.answers.cloud
    assert cloud is not None
    assert cloud.scattering.value is not None
    assert mark.y == pytest.approx(cloud.scattering.value / bohr_radius)
    assert cloud.scattering.value != length_before
    assert page.plot.canvas.full_draws == full
    assert 10 < page.plot.canvas.live_frames - live <= 50
    assert f"at {plan.species.field.value * 1e4:.5g} G" in page.sentence.text()
    note = [label.text() for label in window.desk.bench.species.findChildren(QLabel) if "at this field" in label.text()]
    assert note
    assert "(recalled)" in note[0]
    window.document.stack.undo()
    assert window.document.plan == before


def test_keys_move_the_field_by_small_steps_as_one_change(page: FieldPage, settle: Settle) -> None:
    window = window_of(page)
    before = window.document.plan.species.field
    assert before is not None
    page.plot.canvas.setFocus()
    QTest.keyClick(page.plot.canvas, Qt.Key.Key_Right)
    settle(window)
    after = window.document.plan.species.field
    assert after is not None
    assert before.value < after.value < before.value + 1e-4
    QTest.keyClick(page.plot.canvas, Qt.Key.Key_Up)
    settle(window)
    assert window.document.plan.species.field == after


def test_a_double_click_sets_the_field_and_takes_a_typed_length_away(load_plan: MakeWindow, settle: Settle) -> None:
    page = open_page(load_plan, settle, {"species.key": "85Rb", "species.scattering_length": "300 a0"})
    window = window_of(page)
    assert "as typed. It overrides the data" in page.sentence.text()
    place = page.plot.canvas.place_of(180.0, 100.0)
    assert place is not None
    QTest.mouseDClick(
        page.plot.canvas, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, QPointF(*place).toPoint()
    )
    settle(window)
    species = window.document.plan.species
    assert species.scattering_length is None
    assert species.field is not None
    assert species.field.value == pytest.approx(180e-4, abs=1e-4)
    assert window.document.stack.count() == 1


def test_a_length_typed_in_the_form_is_a_line_across(page: FieldPage, settle: Settle) -> None:
    window = window_of(page)
    typed = read_quantity("250 a0", SCATTERING_LENGTH)
    window.document.edit(plan_with_entry(window.document.plan, "species.scattering_length", typed), "length")
    settle(window)
    picture = page.plot.picture()
    assert not any(mark.draggable for mark in picture.marks)
    assert any(curve.name == "typed length" for curve in picture.curves)


def test_a_field_outside_the_plot_takes_the_plot_along(page: FieldPage, settle: Settle) -> None:
    window = window_of(page)
    far = read_quantity("300 G", MAGNETIC_FIELD)
    window.document.edit(plan_with_entry(window.document.plan, "species.field", far), "field")
    settle(window)
    assert page.plot.picture().x.high > 300.0
    assert "not known at 300 G" in page.sentence.text()


def test_a_zoomed_range_is_computed_and_another_state_begins_with_its_whole_range(
    page: FieldPage, settle: Settle
) -> None:
    window = window_of(page)
    page.plot.set_view((154.0, 156.0, -5000.0, 5000.0))
    settle(window)
    curve = next(c for c in page.plot.picture().curves if c.name == "scattering length")
    assert curve.x.min() == pytest.approx(154.0)
    assert curve.x.max() == pytest.approx(156.0)
    window.document.edit(plan_with(window.document.plan, {"species.key": "39K"}), "species")
    settle(window)
    picture = page.plot.picture()
    assert (picture.x.low, picture.x.high) == (0.0, 800.0)


def test_a_state_without_resonances_says_so_and_offers_one_that_has(load_plan: MakeWindow, settle: Settle) -> None:
    page = open_page(load_plan, settle, {"species.key": "87Rb", "species.state": "F=1 mF=-1"})
    window = window_of(page)
    assert page.is_empty
    assert "no magnetic resonance" in page.empty.text
    (button,) = page.empty.buttons()
    assert button.text() == "Use F=1 mF=+1"
    assert page.pictures() == ()
    for action in ("plot.copy", "plot.save", "plot.data", "plot.home", "plot.zoom_in", "plot.limits"):
        window.actions_by_id[action].trigger()
    assert "Nothing is plotted on the page Field" in window.banner.text
    QTest.mouseClick(button, Qt.MouseButton.LeftButton)
    settle(window)
    assert window.document.plan.species.state == "F=1 mF=+1"
    assert not page.is_empty
    assert page.bar.status.text == HINT_WITHOUT


def test_the_keyboard_reaches_a_page_without_a_plot(load_plan: MakeWindow, settle: Settle) -> None:
    page = open_page(load_plan, settle, {"species.key": "87Rb", "species.state": "F=1 mF=-1"})
    page.window().activateWindow()
    page.take_focus()
    assert page.isAncestorOf(QApplication.focusWidget() or page.window())


def test_the_pointer_reads_the_length_under_it(page: FieldPage) -> None:
    page.plot.canvas.pointer_moved.emit((163.0, 0.0))
    assert page.bar.status.text == "B = 163 G   a = 153.1 a0"
    page.plot.canvas.pointer_moved.emit(None)
    assert page.bar.status.text == HINT


def test_a_hidden_page_computes_nothing(window: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[object] = []
    monkeypatch.setattr("app.pages.field.tuning_answer", lambda *given: asked.append(given))
    monkeypatch.setattr("app.pages.field.length_sentence", lambda *given: asked.append(given))
    window.document.edit(plan_with(window.document.plan, RUBIDIUM), "species")
    settle(window)
    assert asked == []
