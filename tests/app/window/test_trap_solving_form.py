"""Solving backwards in the Trap form: asked on the worker, read, and only then taken, as one step."""

from __future__ import annotations

import threading
from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

import app.answers.trap_solving
from app.answers.trap_controls import Control, ControlKind, Until
from app.engine import trap_answer
from app.forms.trap_solving import SolvingCard
from app.plan import plan_with, read_plan
from app.widgets.form import Choice
from app.window.main_window import MainWindow
from physics.constants import boltzmann
from physics.species import load_species

Settle = Callable[[MainWindow], None]
PRESETS = Path(__file__).parents[3] / "presets" / "traps"


@pytest.fixture
def crossed(lasting_window: MainWindow, settle: Settle) -> MainWindow:
    plan = read_plan(PRESETS / "crossed_beams_rubidium.toml")
    lasting_window.document.load(plan_with(plan, {"cloud.atoms": "4e5", "cloud.temperature": "620 nK"}), None, None)
    lasting_window.desk.tabs.setCurrentWidget(lasting_window.desk.field)  # the page that asks least of a trap
    settle(lasting_window)
    return lasting_window


@pytest.fixture
def card(crossed: MainWindow) -> SolvingCard:
    card = crossed.desk.bench.trap.solving
    assert card is not None
    card.set_unfolded(False)
    card.depth_field.set_quantity(None)
    card.frequency_field.set_quantity(None)
    choose(card.control, Control(ControlKind.POWER, "long"))
    choose(card.until, Until.DEPTH)
    assert not card.button.isVisible()
    QTest.keyClick(card.head.fold, Qt.Key.Key_Space)
    assert card.button.isVisible()
    return card


def result_of(card: SolvingCard) -> str:
    return card.result.text().replace("\N{NO-BREAK SPACE}", " ")


def choose(box: Choice, data: object) -> None:
    index = [box.itemData(place) for place in range(box.count())].index(data)
    box.setCurrentIndex(index)
    box.activated.emit(index)


def test_a_power_for_a_depth_is_read_before_it_is_taken(crossed: MainWindow, card: SolvingCard, settle: Settle) -> None:
    plan, threads = crossed.document.plan, []
    solve = app.answers.trap_solving.solve_trap

    def watched(*args: object) -> object:
        threads.append(threading.get_ident())
        return solve(*args)  # type: ignore[arg-type]

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(app.answers.trap_solving, "solve_trap", watched)
        card.depth_field.setFocus()
        QTest.keyClicks(card.depth_field, "12 uK")
        QTest.keyClick(card.depth_field, Qt.Key.Key_Return)
        assert card.result.text() == "Working it out …"
        assert card.button.text() == "Stop"
        settle(crossed)
    assert threads
    assert threading.get_ident() not in threads
    assert crossed.document.plan == plan
    first, frequencies, depth, _sag = result_of(card).splitlines()
    assert first.startswith("Power of beam long: 520(5) mW → ")
    assert frequencies.startswith("Frequencies: ")
    assert depth == "Depth: 6.78 µK → 12.0 µK"
    QTest.keyClick(card.apply, Qt.Key.Key_Space)
    assert crossed.document.stack.count() == 1
    assert crossed.document.stack.undoText() == "change of power of beam long"
    settle(crossed)
    assert crossed.desk.bench.trap.made_depth.text() == "12.0 µK"
    assert card.solved is None
    assert not card.apply.isVisible()
    crossed.document.stack.undo()
    assert crossed.document.plan == plan


def test_a_measured_frequency_calibrates_a_waist(crossed: MainWindow, card: SolvingCard, settle: Settle) -> None:
    choose(card.control, Control(ControlKind.WAIST, "long"))
    choose(card.until, Until.FREQUENCY_Z)
    assert "calibrates the waist" in card.note_of("until")
    assert card.frequency_field.isVisible()
    assert not card.depth_field.isVisible()
    QTest.keyClicks(card.frequency_field, "150 Hz")
    QTest.keyClick(card.button, Qt.Key.Key_Space)
    settle(crossed)
    assert result_of(card).startswith("Waist of beam long: 72(2) um → 74.")
    card.apply.click()
    settle(crossed)
    assert trap_answer(crossed.document.plan).survey.frequencies[2] == pytest.approx(150.0, rel=1e-4)


def test_the_lowest_power_still_holds(crossed: MainWindow, card: SolvingCard, settle: Settle) -> None:
    choose(card.until, Until.HOLDS)
    assert not card.depth_field.isVisible()
    card.button.click()
    settle(crossed)
    card.apply.click()
    settle(crossed)
    answer = trap_answer(crossed.document.plan)
    assert answer.trapped
    assert answer.survey.depth < 1e-9 * boltzmann


def test_the_gradient_that_levitates_brings_coils(crossed: MainWindow, card: SolvingCard, settle: Settle) -> None:
    choose(card.control, Control(ControlKind.LEVITATION))
    assert card.until.currentData() is Until.LEVITATES
    assert not card.depth_field.isVisible()
    card.button.click()
    settle(crossed)
    assert "Levitation of the coils: none → 30.4" in result_of(card)
    card.apply.click()
    coils = crossed.document.plan.trap.coils
    assert coils is not None
    assert coils.levitation is not None
    # m g = mu_B/2 times the gradient for F=1, mF=-1 of 87Rb
    state = load_species("87Rb").state("F=1 mF=-1")
    assert coils.levitation.value == pytest.approx(state.mass * 9.80665 / (0.5 * 9.2740100657e-24), rel=3e-3)


def test_what_cannot_be_is_said_in_a_sentence(crossed: MainWindow, card: SolvingCard, settle: Settle) -> None:
    choose(card.until, Until.MEAN_FREQUENCY)
    card.button.click()
    assert card.frequency_field.error_text == "type the frequency"
    QTest.keyClicks(card.frequency_field, "9 MHz")
    card.button.click()
    settle(crossed)
    assert card.result.text().startswith("No power of beam long")
    assert not card.apply.isVisible()
    # what is typed here is no part of the plan: a wrong text makes no answer doubtful
    card.frequency_field.selectAll()
    QTest.keyClicks(card.frequency_field, "fast")
    QTest.keyClick(card.frequency_field, Qt.Key.Key_Return)
    settle(crossed)
    assert crossed.desk.bench.problems == ()
    assert not crossed.desk.verdict.stale


def test_what_was_found_goes_with_the_trap_it_was_found_for(
    crossed: MainWindow, card: SolvingCard, settle: Settle
) -> None:
    choose(card.control, Control(ControlKind.LEVITATION))
    card.button.click()
    settle(crossed)
    assert card.apply.isVisible()
    crossed.document.edit(plan_with(crossed.document.plan, {"cloud.atoms": "3e4"}), "atoms")
    assert card.apply.isVisible()  # the cloud has nothing to do with it
    card.apply.click()
    assert crossed.document.plan.cloud.atoms.value == 3e4
    assert card.solved is None
    assert card.result.text() == ""


def test_it_can_be_stopped_and_the_window_goes_on(
    crossed: MainWindow, card: SolvingCard, settle: Settle, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    gate = threading.Event()
    monkeypatch.setattr(app.answers.trap_solving, "solve_trap", lambda *_args: gate.wait(20.0))
    choose(card.control, Control(ControlKind.LEVITATION))
    card.button.click()
    crossed.document.edit(plan_with(crossed.document.plan, {"cloud.temperature": "300 nK"}), "temperature")
    qtbot.waitUntil(lambda: crossed.answers.current)  # the cloud is answered meanwhile
    card.button.click()
    assert card.result.text() == ""
    assert card.button.text() == "Work it out"
    settle(crossed)
    gate.set()
    assert not card.apply.isVisible()
