"""Maps that take long: a draft at once, then the map, with progress, and a way to stop."""

import time
from collections.abc import Callable

import pytest
from pytestqt.qtbot import QtBot

from app.answers import map as module
from app.engine import MapAnswer, MapLimits
from app.plan import DEFAULT_PLAN, Plan, plan_with
from app.window.main_window import MainWindow
from physics.models import Model

Settle = Callable[[MainWindow], None]
Tick = Callable[[float], bool]


def use(window: MainWindow, model: str) -> None:
    window.document.edit(plan_with(window.document.plan, {"cloud.model": model}), "model")


def shown(window: MainWindow) -> MapAnswer:
    assert window.desk.map._ground is not None
    return window.desk.map._ground.answer


@pytest.fixture
def slow_map(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """Makes slow maps endless; the list counts how many were begun."""
    begun: list[int] = []

    def endless(plan: Plan, limits: MapLimits, tick: Tick) -> MapAnswer | None:
        begun.append(1)
        while tick(0.4):
            time.sleep(0.002)
        return None

    monkeypatch.setattr("app.pages.map.map_with_progress", endless)
    return begun


@pytest.mark.parametrize(
    ("name", "model", "line"),
    [("exact levels", Model.EXACT_LEVELS, "exact levels saturated"), ("Hartree-Fock", Model.HARTREE_FOCK, "onset")],
)
def test_the_map_of_a_slow_model_arrives_with_its_own_threshold(
    window: MainWindow, settle: Settle, name: str, model: Model, line: str
) -> None:
    use(window, name)
    settle(window)
    answer = shown(window)
    assert answer.model is model
    assert answer.complete
    assert answer.atoms.size == module.SLOW_MAP_POINTS
    names = [curve.name for curve in window.desk.map.plot.picture().curves if curve.name]
    assert any(line in text for text in names)
    assert "condensation, ideal" in names
    assert "shifted by size and interaction" in names
    assert not window.desk.map.bar.progress.isVisible()


def test_a_draft_is_shown_meanwhile_and_says_so(window: MainWindow, qtbot: QtBot, slow_map: list[int]) -> None:
    use(window, "Hartree-Fock")
    qtbot.waitUntil(lambda: shown(window).asked is Model.HARTREE_FOCK)
    assert shown(window).model is Model.SEMI_IDEAL
    assert "semi-ideal" in window.desk.map.plot.picture().note
    progress = window.desk.map.bar.progress
    qtbot.waitUntil(lambda: progress.isVisible() and progress.label.text() == "Hartree-Fock map 40 %")
    window.answers.stop_part()


def test_a_map_that_is_under_way_is_not_begun_again_by_a_moving_cloud(
    window: MainWindow, qtbot: QtBot, slow_map: list[int]
) -> None:
    use(window, "exact levels")
    qtbot.waitUntil(lambda: bool(slow_map))
    for value in range(200, 230):
        window.document.edit(plan_with(window.document.plan, {"cloud.temperature": f"{value} nK"}), "T", "same")
        qtbot.wait(1)
    assert slow_map == [1]
    assert window.answers.cloud is not None
    assert window.answers.cloud.plan == window.document.plan
    window.answers.stop_part()


def test_a_stopped_map_stays_stopped_until_it_is_wanted(
    window: MainWindow, qtbot: QtBot, settle: Settle, slow_map: list[int], monkeypatch: pytest.MonkeyPatch
) -> None:
    use(window, "exact levels")
    progress = window.desk.map.bar.progress
    qtbot.waitUntil(progress.isVisible)
    progress.button.click()
    assert window.answers.settled
    assert progress.label.text() == "exact levels map stopped"
    assert progress.button.text() == "Compute"
    window.document.edit(plan_with(window.document.plan, {"cloud.temperature": "230 nK"}), "T")
    settle(window)
    assert slow_map == [1]
    monkeypatch.setattr("app.pages.map.map_with_progress", module.map_with_progress)
    progress.button.click()
    settle(window)
    assert shown(window).complete
    assert not progress.isVisible()


def test_another_trap_or_page_takes_the_place_of_a_map_under_way(
    window: MainWindow, qtbot: QtBot, settle: Settle, slow_map: list[int]
) -> None:
    use(window, "exact levels")
    qtbot.waitUntil(lambda: bool(slow_map))
    window.document.edit(plan_with(window.document.plan, {"trap.frequencies": "99 Hz, 99 Hz, 9 Hz"}), "trap")
    qtbot.waitUntil(lambda: len(slow_map) == 2)
    window.desk.show_page(2)
    settle(window)
    assert window.desk.profile.plots[0].canvas.picture is not None
    assert not window.desk.map.bar.progress.running
    window.desk.show_page(0)
    qtbot.waitUntil(lambda: len(slow_map) == 3)
    window.answers.stop_part()


def test_the_default_plan_needs_no_steps(window: MainWindow) -> None:
    assert DEFAULT_PLAN.cloud.model is None
    assert shown(window).complete
    assert not window.desk.map.bar.progress.running
