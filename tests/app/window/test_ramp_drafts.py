"""A ramp in a trap of beams under the hand: drafts while a stage is dragged, surveys once it is let go."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from pytestqt.qtbot import QtBot

from app.figures.ramp_controls import Handle
from app.plan import DEFAULT_PLAN, Plan
from app.ramp_choices import MoveChoice, StageChoice
from app.trap_choices import TrapChoice
from app.trap_edits import crossed_pair
from app.units import ATOM_NUMBER, BEAM_POWER, DURATION, TEMPERATURE, read_quantity
from app.window.main_window import MainWindow
from physics.ramps import Control, Knob

POWER = Control(Knob.POWER, "A")


def plan_of_beams() -> Plan:
    cloud = replace(
        DEFAULT_PLAN.cloud,
        atoms=read_quantity("2e5", ATOM_NUMBER),
        temperature=read_quantity("5 uK", TEMPERATURE),
    )
    stage = StageChoice(
        duration=read_quantity("100 ms", DURATION),
        moves=(MoveChoice(control=POWER, end=read_quantity("0.9 W", BEAM_POWER)),),
    )
    return replace(DEFAULT_PLAN, trap=TrapChoice(beams=crossed_pair(DEFAULT_PLAN)), cloud=cloud, ramp=(stage,))


def test_a_drag_shows_drafts_and_ends_with_surveys(
    lasting_window: MainWindow, qtbot: QtBot, settle: Callable[[MainWindow], None]
) -> None:
    window = lasting_window
    window.document.load(plan_of_beams(), None, None)
    page = window.desk.ramp
    window.desk.tabs.setCurrentWidget(page)
    qtbot.waitUntil(lambda: page.answer is not None and not page.draft)
    before = page.answer
    assert before is not None
    # Under the hand: the curves follow, and no ramp is kept that was not simulated with its surveys.
    page._drag_to(Handle(stage=0, control=POWER), 0.1, 0.8)
    qtbot.waitUntil(lambda: page.draft)
    draft = page.answer
    assert draft is not None
    assert draft.run.final["depth"] < 0.999 * before.run.final["depth"]
    assert "A draft" in page.panel.detail.text()
    page.keep_reference()
    assert not page.references
    # Let go: the same from surveys.
    page._end_drag()
    qtbot.waitUntil(lambda: page.answer is not None and not page.draft)
    settle(window)
    exact = page.answer
    assert exact is not None
    assert exact is not draft
    assert abs(exact.run.final["depth"] / draft.run.final["depth"] - 1.0) < 1e-3
    assert abs(exact.run.final["atoms"] / draft.run.final["atoms"] - 1.0) < 0.03
    assert "A draft" not in page.panel.detail.text()
