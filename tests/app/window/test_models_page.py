"""The Models page: four models in a table, the one in use marked and chosen there; long work is shown and stopped."""

import time
from collections.abc import Callable

import pytest
from PySide6.QtGui import QGuiApplication
from pytestqt.qtbot import QtBot

from app.answers.models import ModelsAnswer
from app.plan import DEFAULT_PLAN, Plan, plan_with
from app.window.main_window import MainWindow
from physics.models import Model

Settle = Callable[[MainWindow], None]
MakeWindow = Callable[..., MainWindow]


@pytest.fixture
def cold(load_plan: MakeWindow, settle: Settle) -> MainWindow:
    window = load_plan(plan_with(DEFAULT_PLAN, {"cloud.temperature": "80 nK"}))
    window.actions_by_id["view.models"].trigger()
    settle(window)
    return window


def test_four_models_stand_in_the_table_with_the_one_in_use_marked(cold: MainWindow) -> None:
    table = cold.desk.models.table
    rows = table.row_texts()
    assert [row[0] for row in rows] == ["ideal", "semi-ideal", "exact levels", "Hartree-Fock"]
    assert all("…" not in row for row in rows)
    firsts = [table.item(place, 0) for place in range(4)]
    assert [item is not None and item.text().startswith("●") for item in firsts] == [False, True, False, False]
    assert all(item is not None and item.toolTip() for item in firsts)
    assert "65 % to 81 %" in cold.desk.models.sentence.text()
    assert len([c for c in cold.desk.models.plot.picture().curves if c.name]) == 5


def test_a_model_is_chosen_in_the_table(cold: MainWindow, settle: Settle) -> None:
    table = cold.desk.models.table
    table.setFocus()
    table.setCurrentCell(3, 0)
    table.cellActivated.emit(3, 0)  # Return, or a double click as the platform has it
    settle(cold)
    assert cold.document.plan.cloud.model is Model.HARTREE_FOCK
    assert cold.document.stack.count() == 1
    item = table.item(3, 0)
    assert item is not None
    assert item.text().startswith("●")


def test_the_table_is_copied_as_text(cold: MainWindow) -> None:
    cold.activateWindow()
    table = cold.desk.models.table
    table.setFocus()
    table.selectRow(1)
    cold.copy()
    text = QGuiApplication.clipboard().text()
    assert text.splitlines()[0].split("\t")[1:] == [
        "condenses below",
        "condensed",
        "peak density",
        "energy per atom/k",
    ]
    assert text.splitlines()[1].startswith("semi-ideal\t138 nK\t66 %")
    assert len(text.splitlines()) == 2


def test_fermions_have_two_models_and_the_estimates(load_plan: MakeWindow, settle: Settle) -> None:
    window = load_plan(plan_with(DEFAULT_PLAN, {"species.key": "6Li", "species.field": "832 G"}))
    window.actions_by_id["view.models"].trigger()
    settle(window)
    page = window.desk.models
    assert [row[0] for row in page.table.row_texts()] == ["ideal", "exact levels"]
    assert "near unitarity" in page.detail.text()


def test_a_change_of_the_plan_is_followed_and_what_is_there_is_not_made_again(
    cold: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch
) -> None:
    page = cold.desk.models
    before = page.table.row_texts()
    cold.document.edit(plan_with(cold.document.plan, {"cloud.temperature": "100 nK"}), "temperature")
    settle(cold)
    assert page.table.row_texts() != before
    asked: list[object] = []
    monkeypatch.setattr("app.pages.models.models_answer", lambda *given: asked.append(given))
    cold.desk.show_page(0)
    settle(cold)
    cold.desk.show_page(5)
    settle(cold)
    assert asked == []


def test_a_hidden_page_computes_nothing(window: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[object] = []
    monkeypatch.setattr("app.pages.models.models_answer", lambda *given: asked.append(given))
    window.document.edit(plan_with(window.document.plan, {"cloud.atoms": "2e5"}), "atoms")
    settle(window)
    assert asked == []


def test_models_that_take_long_show_what_is_there_and_can_be_stopped(
    cold: MainWindow, settle: Settle, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    from app.answers import models as module

    page, curve = cold.desk.models, module._curve
    hold = [True]

    def slow(plan: Plan, model: Model, reach: float) -> module.ModelCurve:
        while model is Model.HARTREE_FOCK and hold[0]:
            time.sleep(0.002)
        return curve(plan, model, reach)

    monkeypatch.setattr(module, "_curve", slow)
    cold.document.edit(plan_with(cold.document.plan, {"cloud.atoms": "3e5"}), "atoms")
    qtbot.waitUntil(lambda: page.bar.progress.isVisible() and "75 %" in page.bar.progress.label.text())
    qtbot.waitUntil(lambda: page.table.row_texts()[3][1] == "…")
    assert page.table.row_texts()[2][1] != "…"
    page.bar.progress.button.click()
    assert cold.answers.settled
    assert "stopped" in page.bar.progress.label.text()
    hold[0] = False
    assert isinstance(page._found.answer if page._found else None, ModelsAnswer)
    # wanted after all
    page.bar.progress.button.click()
    settle(cold)
    assert page.table.row_texts()[3][1] != "…"
    assert not page.bar.progress.isVisible()
