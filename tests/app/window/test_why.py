"""Why this number: opened from a readout, kept up to date, read and copied without a mouse."""

from collections.abc import Callable

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication, QKeySequence, QPalette
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from app.engine import cloud_answer
from app.explanations import explain, explanation_text
from app.kinds import TEMPERATURE
from app.plan import DEFAULT_PLAN
from app.quantities import QUANTITIES
from app.units import read_quantity
from app.widgets.explanation import NOT_CURRENT, ExplanationDialog, ExplanationView
from app.widgets.form import plan_with_entry
from app.window.main_window import MainWindow
from app.window.settings import ThemeChoice

Settle = Callable[[MainWindow], None]


def select(window: MainWindow, name: str) -> None:
    readouts = window.desk.readouts
    model = readouts.model()
    for group in range(model.rowCount()):
        parent = model.index(group, 0)
        for row in range(model.rowCount(parent)):
            if model.index(row, 0, parent).data() == QUANTITIES[name].label:
                readouts.setFocus()
                readouts.setCurrentIndex(model.index(row, 0, parent))
                return
    pytest.fail(f"{name} is not among the readouts")


def opened(window: MainWindow, name: str) -> ExplanationDialog:
    """The view, asked for by the menu of a readout."""
    select(window, name)
    menu = window.desk.readouts.menu_at(window.desk.readouts.currentIndex())
    assert menu is not None
    next(action for action in menu.actions() if action.text() == "Why this number…").trigger()
    dialog = window.why.dialog
    assert dialog is not None
    return dialog


def test_nothing_is_made_before_it_is_asked_for(window: MainWindow) -> None:
    assert window.why.dialog is None


def test_the_menu_of_a_readout_opens_the_steps_to_its_number(window: MainWindow) -> None:
    dialog = opened(window, "critical_temperature")
    assert dialog.isVisible()
    assert not dialog.isModal()
    assert dialog.windowTitle() == "Why this number: critical temperature (ideal)"
    text = dialog.view.toPlainText()
    for piece in ("Tc = 138.4 nK", "Tc = T₀ (N/ζ(3))^(1/3)", "= 1.38355e-7 K", "1.0(1)e5", "Bagnato", "semi-ideal"):
        assert piece in text
    assert dialog.view.isReadOnly()


def test_the_keyboard_opens_scrolls_and_closes_it(window: MainWindow, qtbot: QtBot) -> None:
    select(window, "mean_density")
    assert window.actions_by_id["view.why"].shortcuts() == [QKeySequence("Ctrl+I")]
    window.actions_by_id["view.why"].trigger()
    dialog = window.why.dialog
    assert dialog is not None
    assert dialog.view.explanation is not None
    assert dialog.view.explanation.name == "mean_density"
    dialog.resize(500, 240)
    QApplication.processEvents()
    bar = dialog.view.verticalScrollBar()
    assert bar.maximum() > 0
    QTest.keyClick(dialog.view, Qt.Key.Key_PageDown)
    assert bar.value() > 0
    QTest.keyClick(dialog, Qt.Key.Key_Escape)
    assert not dialog.isVisible()


def test_without_a_current_readout_the_first_one_is_explained(window: MainWindow) -> None:
    window.actions_by_id["view.why"].trigger()
    assert window.why.dialog is not None
    explanation = window.why.dialog.view.explanation
    assert explanation is not None
    assert explanation.name == next(iter(QUANTITIES))


def test_it_follows_the_answer_and_keeps_the_place_of_reading(window: MainWindow, settle: Settle, qtbot: QtBot) -> None:
    dialog = opened(window, "mean_density")
    dialog.resize(500, 240)
    QApplication.processEvents()
    bar = dialog.view.verticalScrollBar()
    bar.setValue(bar.maximum() // 2)
    place = bar.value()
    colder = plan_with_entry(window.document.plan, "cloud.temperature", read_quantity("190 nK", TEMPERATURE))
    window.document.edit(colder, "temperature")
    settle(window)
    qtbot.waitUntil(lambda: window.why.settled)
    assert "190 nK" in dialog.view.toPlainText()
    assert bar.value() == place


def test_a_closed_view_costs_nothing_and_opens_on_the_present_answer(window: MainWindow, settle: Settle) -> None:
    dialog = opened(window, "critical_temperature")
    dialog.close()
    before = dialog.view.explanation
    colder = plan_with_entry(window.document.plan, "cloud.temperature", read_quantity("190 nK", TEMPERATURE))
    window.document.edit(colder, "temperature")
    settle(window)
    assert window.why.settled
    assert dialog.view.explanation is before
    opened(window, "reduced_temperature")
    assert "190 nK" in dialog.view.toPlainText()


def test_a_quantity_of_the_other_statistics_says_why_it_has_no_value(
    window: MainWindow, settle: Settle, qtbot: QtBot
) -> None:
    dialog = opened(window, "critical_temperature")
    window.document.edit(plan_with_entry(window.document.plan, "species.key", "6Li"), "species")
    settle(window)
    qtbot.waitUntil(lambda: window.why.settled)
    assert "no value, needs bosons; 6Li is a fermion" in dialog.view.toPlainText()


def test_it_is_marked_while_the_answer_is_not_current(window: MainWindow, settle: Settle, qtbot: QtBot) -> None:
    dialog = opened(window, "critical_temperature")
    field = window.desk.bench.cloud.temperature
    field.setFocus()
    field.selectAll()
    QTest.keyClicks(field, "hot")
    QTest.keyClick(field, Qt.Key.Key_Return)
    settle(window)
    assert dialog.view.stale
    assert dialog.view.toPlainText().startswith(NOT_CURRENT)
    field.selectAll()
    QTest.keyClicks(field, "210 nK")
    QTest.keyClick(field, Qt.Key.Key_Return)
    settle(window)
    qtbot.waitUntil(lambda: window.why.settled)
    assert not dialog.view.stale
    assert NOT_CURRENT not in dialog.view.toPlainText()


def test_the_value_is_in_the_unit_chosen_for_the_readout(window: MainWindow, qtbot: QtBot) -> None:
    dialog = opened(window, "critical_temperature")
    menu = window.desk.readouts.menu_at(window.desk.readouts.currentIndex())
    assert menu is not None
    next(action for action in menu.actions() if action.text() == "in kHz").trigger()
    qtbot.waitUntil(lambda: window.why.settled)
    assert "Tc = 2.883 kHz" in dialog.view.toPlainText()


def test_all_is_copied_as_plain_text(window: MainWindow) -> None:
    dialog = opened(window, "critical_temperature")
    dialog.copy_button.click()
    answer = window.answers.cloud
    assert answer is not None
    assert QGuiApplication.clipboard().text() == explanation_text(explain(answer, "critical_temperature", "nK"))


def test_a_selection_is_copied_as_text_alone(qapp: QApplication, qtbot: QtBot) -> None:
    view = ExplanationView()
    qtbot.addWidget(view)
    view.show_explanation(explain(cloud_answer(DEFAULT_PLAN), "fugacity"))
    view.selectAll()
    view.copy()
    data = QGuiApplication.clipboard().mimeData()
    assert not data.hasHtml()
    assert "g₃(exp(ln z)) = X" in data.text()


def test_quiet_words_take_the_colours_of_the_look(window: MainWindow) -> None:
    dialog = opened(window, "critical_temperature")
    seen = set()
    for choice in (ThemeChoice.DARK, ThemeChoice.LIGHT):
        window.looks.choose(choice)
        QApplication.processEvents()
        muted = dialog.view.palette().color(QPalette.ColorRole.PlaceholderText).name()
        assert muted in dialog.view.toHtml()
        seen.add(muted)
    assert len(seen) == 2


@pytest.mark.parametrize("name", QUANTITIES)
def test_every_quantity_can_be_shown(name: str, qapp: QApplication, qtbot: QtBot) -> None:
    view = ExplanationView()
    qtbot.addWidget(view)
    explanation = explain(cloud_answer(DEFAULT_PLAN), name)
    view.show_explanation(explanation)
    text = view.toPlainText()
    assert explanation.title in text
    for step in explanation.steps:
        assert step.result in text
