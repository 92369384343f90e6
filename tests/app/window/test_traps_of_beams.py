"""A plan whose trap is made of beams: answered, its numbers to read in the Trap form."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.engine import trap_answer
from app.plan import DEFAULT_PLAN, Plan, read_plan
from app.trap_words import depth_text, frequencies_text, sag_text
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
DATA = Path(__file__).parents[2] / "data"
FALLS = DATA / "plan_of_a_trap_that_holds_nothing.toml"


@pytest.fixture(scope="module")
def plan() -> Plan:
    return read_plan(DATA / "plan_of_beams_and_coils.toml")


def test_its_numbers_stand_where_the_fields_were(window: MainWindow, settle: Settle, plan: Plan) -> None:
    trap = window.desk.bench.trap
    facts = trap.made_frequencies, trap.made_depth, trap.sag
    fields = *trap.frequencies, trap.depth_field
    assert not any(fact.isVisible() for fact in facts)
    window.document.edit(plan, "plan")
    settle(window)
    answer = trap_answer(plan)
    assert [fact.accessibleDescription() for fact in facts] == [
        frequencies_text(answer),
        depth_text(answer),
        sag_text(answer),
    ]
    assert all(fact.isVisible() for fact in facts)
    line = trap.made_frequencies.fontMetrics().height()
    assert trap.made_frequencies.height() < 2 * line  # at the bench's usual width
    assert not any(field.isVisible() for field in fields)
    assert not window.desk.verdict.stale
    for page in window.desk.pages:
        window.desk.tabs.setCurrentWidget(page)
        settle(window)
        assert all(plot.canvas.stale_text is None for plot in page.plots if plot.ready)
    window.document.edit(DEFAULT_PLAN, "plan")
    settle(window)
    assert not any(fact.isVisible() for fact in facts)
    assert all(field.isVisible() and field.isEnabled() for field in fields)


def test_the_cloud_in_it_can_be_edited_and_the_numbers_stay(
    make_window: Callable[..., MainWindow], settle: Settle, plan: Plan
) -> None:
    window = make_window(plan)
    before = window.desk.bench.trap.made_frequencies.accessibleDescription()
    assert before.endswith(" Hz")
    atoms = window.desk.bench.cloud.atoms
    QTest.keyClick(atoms, Qt.Key.Key_A, Qt.KeyboardModifier.ControlModifier)
    QTest.keyClicks(atoms, "3e5")
    settle(window)
    assert window.answers.cloud is not None
    assert window.answers.cloud.plan.cloud.atoms.value == 3e5
    assert not window.desk.verdict.stale
    assert window.desk.bench.trap.made_frequencies.accessibleDescription() == before


def test_a_trap_that_holds_nothing_says_so_in_the_form(window: MainWindow, settle: Settle) -> None:
    window.document.edit(read_plan(FALLS), "plan")
    settle(window)
    trap = window.desk.bench.trap
    assert trap.made_frequencies.text() == "not trapped"
    assert trap.note_of("made.frequencies").startswith("Gravity pulls the atoms out")
    window.desk.tabs.setCurrentWidget(window.desk.slices)  # shows the last good answer, of another trap
    settle(window)
    assert trap.made_frequencies.text() == "not trapped"
