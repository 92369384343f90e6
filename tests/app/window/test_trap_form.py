"""The Trap form: a trap changed over, beams and coils added, changed, moved, named, switched and removed."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise
from pathlib import Path

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLineEdit, QWidget
from pytestqt.qtbot import QtBot

from app.engine import trap_answer
from app.forms.beam_card import BeamCard
from app.forms.made_trap import MadeTrap
from app.forms.trap import TrapForm
from app.plan import DEFAULT_PLAN, Gravity, parse_plan, plan_with, read_plan
from app.trap_words import depth_text
from app.widgets.card import CardHead
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
PRESETS = Path(__file__).parents[3] / "presets" / "traps"


def type_into(field: QLineEdit, text: str, key: Qt.Key = Qt.Key.Key_Return) -> None:
    field.setFocus()
    field.selectAll()
    QTest.keyClick(field, Qt.Key.Key_Delete)
    for sign in text:  # the test keyboard has only the letters of ASCII
        QTest.keyClicks(field, sign) if sign.isascii() else field.insert(sign)
    QTest.keyClick(field, key)


def form_of(window: MainWindow) -> TrapForm:
    return window.desk.bench.trap


def made_of(window: MainWindow) -> MadeTrap:
    made = form_of(window).made
    assert made is not None
    return made


def choose(head: CardHead, words: str) -> None:
    """The entry of a card's menu with these words."""
    next(action for action in head.menu.actions() if words in action.text().replace("&", "")).trigger()


def names(window: MainWindow) -> list[str]:
    return [beam.name for beam in window.document.plan.trap.beams]


# Certain numbers need no draws, which take most of the time of an answer in a real trap.
PLAN = plan_with(DEFAULT_PLAN, {"cloud.atoms": "1e5", "cloud.temperature": "200 nK"})


@pytest.fixture
def crossed(lasting_window: MainWindow, settle: Settle) -> MainWindow:
    """A window that was changed over to beams, all cards folded."""
    lasting_window.document.load(PLAN, None, None)
    lasting_window.desk.tabs.setCurrentWidget(lasting_window.desk.field)  # the page that asks least of a trap
    form = form_of(lasting_window)
    form.by_beams.click()
    made = made_of(lasting_window)
    for card in (*made.cards, made.coils):
        card.set_unfolded(False)
    form.caution.set_unfolded(True)
    settle(lasting_window)
    return lasting_window


@pytest.fixture
def card(crossed: MainWindow) -> BeamCard:
    """Its first beam, unfolded."""
    first = made_of(crossed).cards[0]
    QTest.keyClick(first.head.fold, Qt.Key.Key_Space)
    assert first.unfolded
    return first


def test_changing_over_starts_with_a_crossed_pair_that_holds_the_cloud(crossed: MainWindow) -> None:
    form = form_of(crossed)
    assert names(crossed) == ["A", "B"]
    assert form.by_beams.isChecked()
    assert form.made_frequencies.accessibleDescription().endswith(" Hz")
    assert not any(field.isVisible() for field in (*form.frequencies, form.depth_field))
    assert not crossed.desk.verdict.stale
    assert crossed.document.stack.undoText() == "change of how the trap is given"


def test_changing_back_restores_what_was_typed_on_either_side(crossed: MainWindow, settle: Settle) -> None:
    form = form_of(crossed)
    type_into(made_of(crossed).cards[0].power, "750 mW")
    beams = crossed.document.plan.trap
    form.by_frequencies.click()
    assert crossed.document.plan == PLAN
    type_into(form.frequencies[0], "90 Hz")
    frequencies = crossed.document.plan.trap
    form.by_beams.click()
    assert crossed.document.plan.trap == beams
    form.by_frequencies.click()
    assert crossed.document.plan.trap == frequencies
    settle(crossed)
    crossed.document.stack.undo()
    assert crossed.document.plan.trap == beams
    assert form.by_beams.isChecked()
    # another plan has nothing to do with what was typed for this one
    crossed.document.load(DEFAULT_PLAN, None, None)
    form.by_beams.click()
    assert crossed.document.plan.trap != beams


def test_a_plan_of_beams_can_go_over_to_the_frequencies_that_they_make(
    lasting_window: MainWindow, settle: Settle
) -> None:
    window, plan = lasting_window, read_plan(PRESETS / "crossed_beams_rubidium.toml")
    window.document.load(plan, None, None)
    settle(window)
    form_of(window).by_frequencies.click()
    settle(window)
    found, trap = trap_answer(plan).survey, window.document.plan.trap
    assert trap.frequencies is not None
    assert [f.value for f in trap.frequencies] == pytest.approx(list(found.frequencies), rel=1e-3)
    assert trap.depth is not None
    assert trap.depth.value == pytest.approx(found.depth, rel=1e-3)


def test_a_power_changed_by_a_key_changes_frequencies_and_map(
    crossed: MainWindow, card: BeamCard, settle: Settle
) -> None:
    form, canvas = form_of(crossed), crossed.desk.map.plot.canvas
    crossed.desk.tabs.setCurrentWidget(crossed.desk.map)
    settle(crossed)
    before, picture = form.made_frequencies.text(), canvas.picture
    card.power.setFocus()
    QTest.keyClick(card.power, Qt.Key.Key_PageUp)
    assert crossed.document.plan.trap.beam("A").power.value > 1.0
    assert form.made_frequencies.property("stale")  # quiet until the new ones are there
    assert form.made_frequencies.text() == before
    settle(crossed)
    assert not form.made_frequencies.property("stale")
    assert form.made_frequencies.text() != before
    assert canvas.picture is not picture
    assert crossed.document.stack.undoText() == "change of power of beam A"
    crossed.document.stack.undo()
    settle(crossed)
    assert form.made_frequencies.text() == before
    assert card.power.text() == "1 W"


def test_typing_in_a_field_is_one_step_of_undo(crossed: MainWindow, card: BeamCard) -> None:
    steps = crossed.document.stack.count()
    type_into(card.waist, "55.5 um")
    assert crossed.document.stack.count() == steps + 1
    type_into(card.waist, "50 um")
    assert crossed.document.stack.count() == steps + 2


def test_a_beam_is_added_like_the_last_along_a_free_axis_and_has_the_keyboard(
    crossed: MainWindow, settle: Settle
) -> None:
    made = made_of(crossed)
    QTest.keyClick(made.add_beam, Qt.Key.Key_Space)
    assert names(crossed) == ["A", "B", "C"]
    new = crossed.document.plan.trap.beam("C")
    assert new.direction == (0.0, 0.0, 1.0)
    assert made.card("C").unfolded
    assert made.card("C").isAncestorOf(crossed.focusWidget() or crossed)
    settle(crossed)
    crossed.document.stack.undo()
    assert names(crossed) == ["A", "B"]
    assert len(made.cards) == 2


def test_a_beam_is_duplicated_moved_and_removed_by_its_menu_and_keys(crossed: MainWindow) -> None:
    made = made_of(crossed)
    choose(made.card("A").head, "Duplicate")
    assert names(crossed) == ["A", "C", "B"]
    copy = made.card("C")
    assert crossed.document.plan.trap.beam("C").direction == crossed.document.plan.trap.beam("A").direction
    choose(copy.head, "Move up")
    assert names(crossed) == ["C", "A", "B"]
    assert made.cards[0] is copy  # its card went with it, and so does the keyboard
    assert copy.isAncestorOf(crossed.focusWidget() or crossed)
    assert not next(a for a in copy.head.menu.actions() if "Move &up" in a.text()).isEnabled()
    choose(copy.head, "Move down")
    choose(copy.head, "Move down")
    assert names(crossed) == ["A", "B", "C"]
    QApplication.processEvents()
    assert [card.pos().y() for card in made.cards] == sorted(card.pos().y() for card in made.cards)
    choose(made.card("A").head, "Remove")
    assert names(crossed) == ["B", "C"]
    for _ in range(5):
        crossed.document.stack.undo()
    assert names(crossed) == ["A", "B"]
    keys = {action.shortcut().toString() for action in made.cards[0].head.menu.actions()}
    assert {"F2", "Ctrl+D", "Alt+Up", "Alt+Down"} <= keys


def test_the_last_beam_stays_with_a_sentence(crossed: MainWindow, settle: Settle) -> None:
    made = made_of(crossed)
    choose(made.card("A").head, "Remove")
    choose(made.card("B").head, "Remove")
    assert names(crossed) == ["B"]
    assert any("needs a beam or coils" in problem for problem in crossed.desk.bench.problems)
    crossed.document.stack.undo()
    settle(crossed)
    assert crossed.desk.bench.problems == ()


def test_a_rename_keeps_card_and_answer_and_a_taken_name_is_refused(
    crossed: MainWindow, card: BeamCard, settle: Settle
) -> None:
    type_into(card.name_field, "long arm")
    assert names(crossed) == ["long arm", "B"]
    assert made_of(crossed).cards[0] is card
    assert card.power.accessibleName() == "Power of beam long arm"
    assert card.head.fold.text() == "long arm"
    type_into(card.name_field, "B")
    assert names(crossed) == ["long arm", "B"]
    assert card.problems == ('two beams are named "B": each needs a name of its own',)
    assert card.name_field.text() == "B"
    settle(crossed)
    assert crossed.desk.verdict.stale
    QTest.keyClick(card.name_field, Qt.Key.Key_Escape)
    assert card.problems == ()
    assert card.name_field.text() == "long arm"
    assert not crossed.desk.verdict.stale
    type_into(card.name_field, "x" * 41)
    assert "1 to 40 characters" in card.problems[0]


def test_a_beam_switched_off_keeps_its_numbers(crossed: MainWindow, settle: Settle) -> None:
    before = form_of(crossed).made_frequencies.text()
    switch = made_of(crossed).cards[1].head.switch
    QTest.keyClick(switch, Qt.Key.Key_Space)
    settle(crossed)
    beam = crossed.document.plan.trap.beam("B")
    assert not beam.on
    assert beam.power.text == "1 W"
    assert form_of(crossed).made_frequencies.text() != before
    assert not form_of(crossed).facts["arm_depth"].isVisible()
    QTest.keyClick(switch, Qt.Key.Key_Space)
    settle(crossed)
    assert form_of(crossed).made_frequencies.text() == before


WRONG = (
    ("power", "2 furlong", "furlong"),
    ("waist", "", "needs a waist"),
    ("direction", "0, 0, 0", "not be zero"),
    ("direction", "up", "three numbers"),
    ("m2", "0.5", "from 1"),
    ("wavelength", "1 nm", "wavelength must be"),
)


def test_bad_input_is_said_beside_the_field_and_blanks_nothing(
    crossed: MainWindow, card: BeamCard, settle: Settle
) -> None:
    plan, shown = crossed.document.plan, form_of(crossed).made_frequencies.text()
    for name, text, words in WRONG:
        field = getattr(card, name)
        type_into(field, text)
        settle(crossed)
        (problem,) = crossed.desk.bench.problems
        assert words in problem
        assert crossed.document.plan == plan
        assert crossed.desk.verdict.stale
        assert form_of(crossed).made_frequencies.text() == shown
        assert crossed.desk.readouts.stale
        assert crossed.answers.cloud is not None
        QTest.keyClick(field, Qt.Key.Key_Escape)
        QTest.keyClick(field, Qt.Key.Key_Return)
        settle(crossed)
        assert crossed.desk.bench.problems == ()
        assert not crossed.desk.verdict.stale


def test_two_waists_a_focus_and_a_direction(crossed: MainWindow, card: BeamCard, settle: Settle) -> None:
    type_into(card.second_waist, "25 um")
    type_into(card.focus[2], "-12 um")
    type_into(card.direction, "1 0.2 0")
    beam = crossed.document.plan.trap.beam("A")
    assert [waist.value for waist in beam.waists] == pytest.approx([40e-6, 25e-6])
    assert [place.value for place in beam.focus] == pytest.approx([0.0, 0.0, -12e-6])
    assert beam.direction == (1.0, 0.2, 0.0)
    assert card.direction.text() == "1, 0.2, 0"
    type_into(card.second_waist, "")
    assert len(crossed.document.plan.trap.beam("A").waists) == 1
    card.set_unfolded(False)
    assert card.head.summary.text() == "1064 nm, 1 W, 40 µm, along (1, 0.2, 0)"


def test_coils_come_and_go_and_are_changed(crossed: MainWindow, settle: Settle) -> None:
    made = made_of(crossed)
    QTest.keyClick(made.add_coils, Qt.Key.Key_Space)
    settle(crossed)
    coils = made.coils
    assert coils.isVisible()
    assert coils.unfolded
    assert not made.add_coils.isVisible()
    type_into(coils.numbers["levitation"], "12 G/cm")
    type_into(coils.axis, "1; 0; 1")
    type_into(coils.centre[0], "5 um")
    held = crossed.document.plan.trap.coils
    assert held is not None
    assert held.levitation is not None
    assert held.levitation.value == pytest.approx(0.12)
    assert held.axis == (1.0, 0.0, 1.0)
    assert held.centre[0].value == pytest.approx(5e-6)
    type_into(made.gravity, "off")
    assert any("levitate along gravity" in problem for problem in crossed.desk.bench.problems)
    QTest.keyClick(made.gravity, Qt.Key.Key_Escape)
    type_into(coils.numbers["levitation"], "")
    type_into(made.gravity, "off")
    assert crossed.document.plan.trap.gravity is Gravity.OFF
    settle(crossed)
    assert form_of(crossed).sag.text() == "–"
    choose(coils.head, "Remove")
    assert crossed.document.plan.trap.coils is None
    assert not coils.isVisible()
    crossed.document.stack.undo()
    assert crossed.document.plan.trap.coils is not None


def test_nothing_held_is_said_with_the_reason_under_the_form(
    crossed: MainWindow, card: BeamCard, settle: Settle
) -> None:
    type_into(card.power, "1 mW")
    type_into(made_of(crossed).cards[1].power, "1 mW")
    settle(crossed)
    form = form_of(crossed)
    assert form.made_frequencies.text() == "not trapped"
    assert form.note_of("made.frequencies").startswith("Gravity pulls the atoms out")
    assert not form.facts["scattering_rate"].isVisible()
    crossed.document.stack.undo()
    crossed.document.stack.undo()
    settle(crossed)
    assert form.made_depth.text() == depth_text(trap_answer(crossed.document.plan))
    assert form.facts["scattering_rate"].isVisible()


def test_what_was_typed_is_saved_and_read_again(
    crossed: MainWindow, card: BeamCard, settle: Settle, tmp_path: Path
) -> None:
    path = tmp_path / "made.toml"
    type_into(card.name_field, "long")
    type_into(card.power, "640(10) mW")
    made_of(crossed).add_coils.click()
    plan = crossed.document.plan
    assert crossed.files._write(path)
    text = path.read_text(encoding="utf-8")
    assert 'power = "640(10) mW"' in text
    assert parse_plan(text, "made.toml") == plan
    crossed.document.load(DEFAULT_PLAN, None, None)
    crossed.files.read(path)
    settle(crossed)
    assert crossed.document.plan == plan
    assert made_of(crossed).cards[0].power.text() == "640(10) mW"
    assert not crossed.desk.verdict.stale


def test_the_keyboard_goes_through_cards_from_top_to_bottom(crossed: MainWindow, qtbot: QtBot) -> None:
    made, form = made_of(crossed), form_of(crossed)
    made.add_beam.click()
    made.add_coils.click()
    choose(made.card("C").head, "Move up")
    for card in (*made.cards, made.coils):
        card.set_unfolded(True)
    assert form.solving is not None
    form.solving.set_unfolded(True)
    crossed.activateWindow()
    qtbot.waitUntil(crossed.isActiveWindow)
    QApplication.processEvents()
    form.by_beams.setFocus()
    visited: list[QWidget] = []
    while (focus := QApplication.focusWidget()) is not None and form.isAncestorOf(focus) and focus not in visited:
        visited.append(focus)
        QTest.keyClick(focus, Qt.Key.Key_Tab)
    heights = [widget.mapTo(form, QPoint(0, widget.height() // 2)).y() for widget in visited]
    assert len(visited) > 50
    assert all(after >= before - 4 for before, after in pairwise(heights))
    lines = [line for line in form.findChildren(QLineEdit) if line.isVisible()]
    spoken = [line.accessibleName() for line in lines]
    assert len(set(spoken)) == len(spoken)
    assert all(line in visited and line.toolTip() and line.whatsThis() for line in lines)


def test_a_caution_appears_with_half_a_watt_and_folds(crossed: MainWindow, card: BeamCard, settle: Settle) -> None:
    caution = form_of(crossed).caution
    assert "IEC 60825-1" in caution.text  # the pair starts with a watt each
    for shown in made_of(crossed).cards:
        type_into(shown.power, "0.4 W")
    assert caution.text == ""
    assert not caution.isVisible()
    type_into(card.power, "0.5 W")
    assert caution.isVisible()
    assert "ANSI Z136.1" in caution.text
    assert "0.5 mT" not in caution.text
    QTest.keyClick(caution.fold, Qt.Key.Key_Space)
    assert not caution.body.isVisible()
    assert caution.fold.isVisible()
    type_into(card.power, "0.6 W")
    assert not caution.body.isVisible()  # read once, it stays folded
    made_of(crossed).add_coils.click()
    assert caution.body.isVisible()  # of something else now
    assert "0.5 mT" in caution.text
    form_of(crossed).by_frequencies.click()
    assert not caution.isVisible()
