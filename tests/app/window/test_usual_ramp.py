"""A plan without a ramp is given the usual one by a click that no survey of the trap holds up."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app import ramp_edits
from app.passenger_edits import with_usual_passenger
from app.plan import DEFAULT_PLAN, Plan, read_plan
from app.widgets.page import Page
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
BEAMS = Path(__file__).resolve().parents[3] / "presets" / "traps" / "crossed_beams_rubidium.toml"


@pytest.fixture
def asked(lasting_window: MainWindow, settle: Settle) -> Callable[[str, Plan], Page]:
    """The page of that name in front, with a plan that has no ramp."""

    def asked_on(name: str, plan: Plan) -> Page:
        lasting_window.document.load(replace(plan, ramp=()), None, None)
        page = getattr(lasting_window.desk, name)
        lasting_window.desk.tabs.setCurrentWidget(page)
        settle(lasting_window)
        return page

    return asked_on


@pytest.mark.parametrize("name", ["ramp", "mixture"])
def test_it_is_worked_out_off_the_gui_thread_and_is_one_step_of_undo(
    asked, lasting_window: MainWindow, qtbot: QtBot, settle: Settle, monkeypatch, name: str
) -> None:
    page = asked(name, with_usual_passenger(DEFAULT_PLAN))
    workers: list[threading.Thread] = []
    right = ramp_edits.usual_ramp

    def recorded(*args):
        workers.append(threading.current_thread())
        return right(*args)

    monkeypatch.setattr(ramp_edits, "usual_ramp", recorded)
    page.usual.ask()
    assert lasting_window.document.plan.ramp == ()  # the click is over, the ramp is still to come
    qtbot.waitUntil(lambda: bool(lasting_window.document.plan.ramp), timeout=60_000)
    assert lasting_window.document.plan.ramp == right(lasting_window.document.plan)
    if name == "ramp":
        qtbot.waitUntil(lambda: not page.bar.buttons["home"].isHidden())
        assert page.bar.status.text
        page.panel.choice.button(list(page.panel.views).index("Caveats")).click()
        assert page.bar.status.text == ""
        assert page.bar.buttons["home"].isHidden()
    assert workers[0] is not threading.main_thread()
    settle(lasting_window)
    lasting_window.document.stack.undo()
    assert lasting_window.document.plan.ramp == ()
    settle(lasting_window)


def test_why_there_is_none_is_told(asked, lasting_window: MainWindow, qtbot: QtBot, settle: Settle, monkeypatch):
    page = asked("ramp", DEFAULT_PLAN)
    # Nothing is plotted: no tools that need a plot, and no hint at one.
    assert page.bar.status.text == ""
    assert page.bar.buttons["home"].isHidden()

    def refuse(*_args):
        raise ValueError("the trap holds nothing")

    monkeypatch.setattr(ramp_edits, "usual_ramp", refuse)
    with qtbot.waitSignal(page.told, timeout=60_000) as told:
        page.usual.ask()
    assert told.args == ["the trap holds nothing."]
    settle(lasting_window)
    assert lasting_window.document.plan.ramp == ()


def test_it_can_be_stopped_and_asked_for_again(
    asked, lasting_window: MainWindow, qtbot: QtBot, settle: Settle, monkeypatch
):
    page = asked("ramp", DEFAULT_PLAN)
    under_way, go_on = threading.Event(), threading.Event()
    right = ramp_edits.usual_ramp

    def held_up(plan, tell):
        tell(0.5)
        under_way.set()
        go_on.wait(60.0)
        tell(0.9)
        return right(plan)

    monkeypatch.setattr(ramp_edits, "usual_ramp", held_up)
    page.usual.ask()
    assert under_way.wait(60.0)
    page.part_stopped.emit()
    go_on.set()
    settle(lasting_window)
    assert lasting_window.document.plan.ramp == ()
    page.usual.ask()
    qtbot.waitUntil(lambda: bool(lasting_window.document.plan.ramp), timeout=60_000)
    settle(lasting_window)


def test_it_tells_of_each_survey_and_goes_no_further_once_nobody_wants_it() -> None:
    plan, shares = read_plan(BEAMS), []
    stages = ramp_edits.usual_ramp(plan, shares.append)
    assert stages == ramp_edits.usual_ramp(plan)
    assert shares[0] == 0.0
    assert shares == sorted(shares)
    assert 2 <= len(shares) <= 7
    assert shares[-1] <= 1.0

    class Enough(Exception):
        pass

    def stop(_share: float) -> None:
        raise Enough

    with pytest.raises(Enough):
        ramp_edits.usual_ramp(plan, stop)
