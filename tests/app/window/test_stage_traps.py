"""The trap that a stage begins in, typed in a window of its own."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from pytestqt.qtbot import QtBot

from app import ramp_edits, transfer_edits
from app.plan import DEFAULT_PLAN, Plan
from app.ramp_choices import Handing
from app.trap_choices import TrapChoice
from app.trap_edits import crossed_pair
from app.window.main_window import MainWindow
from app.window.stage_trap_dialog import StageTrapDialog

Settle = Callable[[MainWindow], None]


def handed_over() -> Plan:
    """From a harmonic trap into two beams that cross."""
    plan = replace(DEFAULT_PLAN, ramp=ramp_edits.usual_ramp(DEFAULT_PLAN))
    plan = ramp_edits.with_new_stage(plan, 1, hold=True)
    return transfer_edits.with_transfer(plan, 1, Handing.SUDDEN, TrapChoice(beams=crossed_pair(plan)))


@pytest.fixture
def window(lasting_window: MainWindow) -> MainWindow:
    lasting_window.document.load(handed_over(), None, None)
    return lasting_window


@pytest.fixture
def dialog(window: MainWindow, qtbot: QtBot) -> StageTrapDialog:
    """Opened as by its button on the page."""
    window.desk.ramp.panel.stages.set_plan(window.document.plan)
    window.desk.ramp.panel.stages.transfers[1].more.click()
    dialog = window.stage_traps.dialog
    assert dialog is not None
    qtbot.waitUntil(lambda: window.stage_traps.settled)
    return dialog


def test_it_shows_the_beams_and_what_follows_from_them(dialog: StageTrapDialog) -> None:
    assert dialog.isVisible()
    assert dialog.windowTitle() == "Trap of stage 2"
    assert dialog.form.made is not None
    assert [card.name for card in dialog.form.made.cards] == ["A", "B"]
    assert "Hz" in dialog.form.made_frequencies.text()


def test_what_is_typed_is_in_the_plan_and_can_be_taken_back(
    window: MainWindow, dialog: StageTrapDialog, qtbot: QtBot
) -> None:
    before = window.document.plan
    assert dialog.form.made is not None
    card = dialog.form.made.card("A")
    card.set_unfolded(True)
    card.power.selectAll()
    qtbot.keyClicks(card.power, "2.5 W")
    # Return takes what was typed, and presses no button.
    qtbot.keyClick(card.power, Qt.Key.Key_Return)
    stage = window.document.plan.ramp[1]
    assert stage.trap is not None
    assert [beam.power.value for beam in stage.trap.beams] == [2.5, 1.0]
    assert stage.handing is Handing.SUDDEN
    assert window.document.plan.trap == before.trap
    assert window.document.stack.undoText() == "change of power of beam A, trap of stage 2"
    qtbot.waitUntil(lambda: window.stage_traps.settled)
    window.document.stack.undo()
    assert window.document.plan == before
    assert card.power.text() == "1 W"


def test_a_beam_can_be_added_and_frequencies_given_instead(window: MainWindow, dialog: StageTrapDialog) -> None:
    assert dialog.form.made is not None
    dialog.form.made.add_beam.click()
    trap = window.document.plan.ramp[1].trap
    assert trap is not None
    assert [beam.name for beam in trap.beams] == ["A", "B", "C"]
    dialog.form.by_frequencies.click()
    trap = window.document.plan.ramp[1].trap
    assert trap is not None
    assert trap.harmonic


def test_it_follows_its_stage_and_closes_with_it(window: MainWindow, dialog: StageTrapDialog, qtbot: QtBot) -> None:
    plan = window.document.plan
    window.document.edit(ramp_edits.with_new_stage(plan, 0, hold=True), "number of stages")
    assert dialog.windowTitle() == "Trap of stage 3"
    window.document.edit(transfer_edits.with_transfer(window.document.plan, 2, None), "trap")
    assert not dialog.isVisible()
    qtbot.waitUntil(lambda: window.stage_traps.settled)


def test_another_plan_closes_it(window: MainWindow, dialog: StageTrapDialog) -> None:
    window.document.load(DEFAULT_PLAN, None, None)
    assert not dialog.isVisible()
