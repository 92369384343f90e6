"""The Collisions page: what limits is said, the axis is switched, unknown rates are named."""

from collections.abc import Callable

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.engine import Against
from app.plan import DEFAULT_PLAN, plan_with
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
MakeWindow = Callable[..., MainWindow]


@pytest.fixture
def lossy(make_window: MakeWindow, settle: Settle) -> MainWindow:
    window = make_window(plan_with(DEFAULT_PLAN, {"losses.background_lifetime": "60 s"}))
    window.actions_by_id["view.collisions"].trigger()
    settle(window)
    return window


def test_what_limits_and_what_is_not_known_stand_over_the_plot(lossy: MainWindow) -> None:
    page = lossy.desk.collisions
    assert page.sentence.text().startswith("Loss by background gas limits the lifetime to 60.0 s")
    assert page.detail.text() == "Not known, and not drawn: two-body constant."
    assert all(curve.name != "two-body loss" for curve in page.plot.picture().curves)


def test_the_axis_is_switched_between_temperature_and_atom_number(lossy: MainWindow, settle: Settle) -> None:
    page = lossy.desk.collisions
    assert page.against is Against.TEMPERATURE
    assert page.plot.picture().x.unit == "K"
    button = page.choice.button(0)
    button.setFocus()
    QTest.keyClick(button, Qt.Key.Key_Right)
    settle(lossy)
    assert page.against is Against.ATOMS
    assert page.plot.picture().x.unit == ""
    assert page.plot.picture().note == "at T = 200 nK"


def test_the_page_follows_the_plan(lossy: MainWindow, settle: Settle) -> None:
    page = lossy.desk.collisions
    lossy.document.edit(plan_with(lossy.document.plan, {"losses.three_body": "1e-25 cm^6/s"}), "losses")
    settle(lossy)
    assert page.sentence.text().startswith("Loss by three-body collisions limits")


def test_where_nothing_is_known_the_page_says_what_to_give(make_window: MakeWindow, settle: Settle) -> None:
    window = make_window(plan_with(DEFAULT_PLAN, {"species.key": "6Li"}))
    window.actions_by_id["view.collisions"].trigger()
    settle(window)
    page = window.desk.collisions
    assert page.is_empty
    assert "Neither losses nor collisions are known" in page.empty.text
    assert "background lifetime" in page.empty.text
    window.document.edit(plan_with(window.document.plan, {"species.field": "840 G"}), "field")
    settle(window)
    assert not page.is_empty


def test_the_pointer_reads_a_rate_and_the_time_it_means(lossy: MainWindow) -> None:
    page = lossy.desk.collisions
    page.plot.canvas.pointer_moved.emit((2e-7, 0.02))
    assert page.bar.status.text == "temperature T = 200 nK   0.0200 1/s, once in 50.0 s"


def test_a_hidden_page_computes_nothing(window: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[object] = []
    monkeypatch.setattr("app.pages.collisions.rates_answer", lambda *given: asked.append(given))
    window.document.edit(plan_with(window.document.plan, {"cloud.atoms": "2e5"}), "atoms")
    settle(window)
    assert asked == []
