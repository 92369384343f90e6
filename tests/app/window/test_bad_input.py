"""Input that cannot be read never blanks anything: the last good answer stays, marked as not current."""

from collections.abc import Callable

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QComboBox, QLineEdit, QMessageBox, QWidget
from pytestqt.qtbot import QtBot

from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]


def type_into(field: QLineEdit, text: str) -> None:
    field.setFocus()
    field.selectAll()
    QTest.keyClicks(field, text)
    QTest.keyClick(field, Qt.Key.Key_Return)


@pytest.mark.parametrize("text", ["200", "1 000 nK", "1,5 uK", "-3 nK", "20 s", "abc"])
def test_bad_input_keeps_the_last_good_answer_marked_stale(
    window: MainWindow, settle: Settle, text: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(QMessageBox, "exec", lambda *_args: pytest.fail("a box was opened"))
    desk, form = window.desk, window.desk.bench.cloud
    figures, reading, plan = desk.verdict.figures, desk.readouts.reading("critical_temperature"), window.document.plan
    type_into(form.temperature, text)
    settle(window)
    assert window.document.plan == plan
    assert desk.verdict.stale
    assert desk.verdict.figures == figures
    assert desk.verdict.sentence.startswith("Not current: ")
    assert desk.readouts.stale
    assert desk.readouts.reading("critical_temperature") == reading
    assert desk.map.plot.canvas.stale_text is not None
    assert form.problems
    assert form.temperature.text() == text
    # a good text makes all of it current again
    type_into(form.temperature, "210 nK")
    settle(window)
    assert not desk.verdict.stale
    assert not desk.readouts.stale
    assert desk.map.plot.canvas.stale_text is None
    assert form.problems == ()


def test_an_edit_elsewhere_does_not_hide_that_a_field_is_wrong(window: MainWindow, settle: Settle) -> None:
    desk = window.desk
    type_into(desk.bench.cloud.temperature, "hot")
    type_into(desk.bench.cloud.atoms, "3e5")
    settle(window)
    assert window.document.plan.cloud.atoms.value == 3e5
    assert desk.verdict.stale
    assert desk.bench.cloud.temperature.text() == "hot"


def test_opening_another_plan_drops_texts_that_could_not_be_read(window: MainWindow, settle: Settle) -> None:
    type_into(window.desk.bench.cloud.temperature, "hot")
    window.files.new()
    settle(window)
    assert window.desk.bench.problems == ()
    assert window.desk.bench.cloud.temperature.text() == window.document.plan.cloud.temperature.text
    assert not window.desk.verdict.stale


def inputs(root: QWidget) -> list[QWidget]:
    return [widget for kind in (QLineEdit, QComboBox) for widget in root.findChildren(kind) if widget.isVisible()]


def content(widget: QWidget) -> str:
    return widget.text() if isinstance(widget, QLineEdit) else widget.currentText()  # type: ignore[attr-defined]


def test_the_wheel_over_an_unfocused_field_changes_nothing(window: MainWindow, qtbot: QtBot) -> None:
    plan = window.document.plan
    window.desk.map.plot.canvas.setFocus()
    fields = inputs(window.desk.bench)
    assert len(fields) >= 11
    for widget in fields:
        if widget.hasFocus():
            continue
        before = content(widget)
        place = QPointF(widget.rect().center())
        event = QWheelEvent(
            place, widget.mapToGlobal(place), QPoint(0, 0), QPoint(0, 120), Qt.MouseButton.NoButton,
            Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
        )  # fmt: skip
        QApplication.sendEvent(widget, event)
        assert content(widget) == before, widget.accessibleName()
    assert window.document.plan == plan
    assert window.document.stack.count() == 0


def test_a_scattering_length_and_a_field_exclude_each_other(window: MainWindow, settle: Settle) -> None:
    form = window.desk.bench.species
    type_into(form.length, "90 a0")
    type_into(form.field, "155 G")
    settle(window)
    assert window.document.plan.species.scattering_length is None
    assert form.length.text() == ""
    assert window.document.plan.species.field is not None
    window.document.stack.undo()
    assert form.length.text() == "90 a0"
    assert form.field.text() == ""


def test_an_empty_scattering_length_shows_the_number_of_the_data_and_how_sure_it_is(window: MainWindow) -> None:
    assert window.desk.bench.species.length.placeholderText() == "100.4 a0 (recalled)"


def test_a_field_tells_the_scattering_length_that_it_makes(window: MainWindow, settle: Settle) -> None:
    from app.widgets.form import plan_with_entry

    window.document.edit(plan_with_entry(window.document.plan, "species.key", "133Cs"), "species")
    form = window.desk.bench.species
    type_into(form.field, "21 G")
    settle(window)
    assert window.answers.cloud is not None
    length = window.answers.cloud.scattering.value
    shown = form._notes["species.field"].text()
    if length is None:
        assert shown
    else:
        assert shown == f"a = {length / 5.29177210544e-11:.4g} a0 at this field (recalled)"


def test_saving_with_a_wrong_field_says_which_value_was_kept(window: MainWindow, tmp_path, monkeypatch) -> None:
    from PySide6.QtWidgets import QFileDialog

    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_args: (str(tmp_path / "a.toml"), ""))
    type_into(window.desk.bench.cloud.temperature, "hot")
    assert window.files.save()
    assert "saved with the last good value" in window.banner.text
