"""The Passenger form: a second species is put in, edited as the first is, taken out again, and kept in the file."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.answers.passenger import between_of
from app.forms.passenger import PassengerForm
from app.passenger_edits import with_usual_passenger
from app.plan import DEFAULT_PLAN, Plan, plan_with, read_plan, save_plan
from app.widgets.form import Form, plan_with_entry
from app.widgets.quantity_field import QuantityField
from app.window.main_window import MainWindow
from physics.constants import bohr_radius
from physics.species import species_keys

MakeWindow = Callable[..., MainWindow]
Settle = Callable[[MainWindow], None]
POTASSIUM = Path(__file__).parents[3] / "presets" / "plans" / "sympathetic_potassium.toml"


def type_over(field: QuantityField, text: str) -> None:
    field.setFocus()
    field.selectAll()
    QTest.keyClicks(field, text)
    QTest.keyClick(field, Qt.Key.Key_Return)


@pytest.fixture
def potassium(make_window: MakeWindow) -> MainWindow:
    return make_window(plan_with(read_plan(POTASSIUM), {"trap.frequencies": "120 Hz, 120 Hz, 60 Hz"}))


def form_of(window: MainWindow) -> PassengerForm:
    return window.desk.bench.passenger


def atoms_of(window: MainWindow) -> Form:
    return form_of(window).parts[0]


def test_it_is_folded_and_offers_a_passenger(window: MainWindow, settle: Settle) -> None:
    form = form_of(window)
    assert not form.add.isVisible()
    form.fold.click()
    assert form.fold.accessibleName() == "Passenger, unfolded"
    form.add.click()
    settle(window)
    passenger = window.document.plan.passenger
    assert passenger is not None
    assert (passenger.cloud.atoms.value, passenger.cloud.temperature.text) == (1e4, "200(10) nK")
    assert not form.add.isVisible()
    assert between_of(window.document.plan).value is not None
    window.document.stack.undo()
    assert window.document.plan.passenger is None
    assert form.add.isVisible()


def test_each_species_gets_a_passenger_that_is_not_itself() -> None:
    for key in species_keys():
        plan = plan_with(DEFAULT_PLAN, {"species.key": key})
        between_of(with_usual_passenger(plan))  # raises PlanError where both are the same


def test_a_plan_with_a_passenger_fills_the_fields(potassium: MainWindow) -> None:
    form = form_of(potassium)
    assert form.unfolded
    assert atoms_of(potassium).isotope.currentText() == "40K"
    assert form.parts[1].atoms.text() == "1.5(2)e5"
    assert form.length.placeholderText() == "-215.0 a0 (seen in its source)"
    assert "Ferlaino" in form.note_of("passenger.scattering_length")
    assert form.parts[1].atoms.accessibleName() == "Atoms of the passenger"
    form.set_unfolded(False)
    assert form.summary.text() == "40K, 1.5(2)e5 at 8.0(5) uK"
    assert form.summary.isVisible()
    assert not form.length.isVisible()


def test_what_is_typed_changes_the_passenger_and_each_field_is_a_step(potassium: MainWindow, settle: Settle) -> None:
    form, stack = form_of(potassium), potassium.document.stack
    first = potassium.document.plan
    type_over(form.parts[1].temperature, "3.25 uK")
    type_over(form.length, "-180 a0")
    settle(potassium)
    plan = potassium.document.plan
    assert plan.passenger is not None
    assert plan.passenger.cloud.temperature.value == pytest.approx(3.25e-6)
    assert between_of(plan).value == pytest.approx(-180.0 * bohr_radius)
    assert (plan.species, plan.cloud, plan.losses) == (first.species, first.cloud, first.losses)
    assert stack.count() == 2  # however many keys each took
    assert stack.undoText() == "change of a₁₂ with the first"
    stack.undo()
    assert stack.undoText() == "change of temperature of the passenger"
    stack.undo()
    assert potassium.document.plan == first
    assert form.parts[1].temperature.text() == "8.0(5) uK"


def test_a_trap_of_its_own(potassium: MainWindow, settle: Settle, tmp_path: Path) -> None:
    form = form_of(potassium)
    first = potassium.document.plan
    assert form.frequencies[2].isVisible()
    assert form.frequencies[2].placeholderText() == "60 Hz, of both"
    assert form.depth_field.placeholderText() == "not given"
    type_over(form.frequencies[2], "85 Hz")
    type_over(form.depth_field, "40 uK")
    settle(potassium)
    passenger = potassium.document.plan.passenger
    assert passenger is not None
    assert passenger.frequencies is not None
    assert [f.value for f in passenger.frequencies] == [120.0, 120.0, 85.0]
    assert passenger.depth is not None
    assert passenger.depth.text == "40 uK"
    assert potassium.document.stack.undoText() == "change of own depth"
    save_plan(potassium.document.plan, tmp_path / "own.toml")
    assert read_plan(tmp_path / "own.toml").passenger == passenger
    # Back to that of the first along every axis: none of its own.
    for field in (form.frequencies[2], form.depth_field):
        field.setFocus()
        field.selectAll()
        QTest.keyClick(field, Qt.Key.Key_Backspace)
        QTest.keyClick(field, Qt.Key.Key_Return)
    settle(potassium)
    assert potassium.document.plan == first
    type_over(form.depth_field, "40 uK")
    atoms_of(potassium).isotope.textActivated.emit("23Na")
    settle(potassium)
    assert potassium.document.plan.passenger is not None
    assert potassium.document.plan.passenger.depth is None


def test_in_beams_the_trap_of_its_own_is_hidden(make_window: MakeWindow, settle: Settle) -> None:
    window = make_window(read_plan(POTASSIUM))
    form = form_of(window)
    form.set_unfolded(True)
    assert form.length.isVisible()
    assert not form.depth_field.isVisible()
    assert not form.frequencies[0].isVisible()


def test_another_isotope_drops_what_was_said_of_the_one_before(potassium: MainWindow, settle: Settle) -> None:
    form = form_of(potassium)
    type_over(form.length, "-180 a0")
    atoms_of(potassium).isotope.textActivated.emit("23Na")
    settle(potassium)
    passenger = potassium.document.plan.passenger
    assert passenger is not None
    assert (passenger.species.key, passenger.species.state, passenger.scattering_length) == ("23Na", None, None)
    assert passenger.cloud.atoms.text == "1.5(2)e5"


def test_another_first_species_drops_the_length_typed_for_both() -> None:
    plan = with_usual_passenger(DEFAULT_PLAN)
    assert plan.passenger is not None
    typed = replace(plan, passenger=replace(plan.passenger, scattering_length=plan_length()))
    changed = plan_with_entry(typed, "species.key", "23Na")
    assert changed.passenger is not None
    assert changed.passenger.scattering_length is None
    assert plan_with_entry(typed, "cloud.atoms", plan.cloud.atoms).passenger == typed.passenger


def plan_length():
    return plan_with(DEFAULT_PLAN, {"species.scattering_length": "50 a0"}).species.scattering_length


def test_an_unknown_length_is_said_to_be_unknown(potassium: MainWindow, settle: Settle) -> None:
    form = form_of(potassium)
    atoms_of(potassium).isotope.textActivated.emit("52Cr")
    settle(potassium)
    assert form.length.placeholderText() == "not known"
    assert form.note_of("passenger.scattering_length") == "The data have no scattering length between these two."


def test_the_first_species_as_its_own_passenger_is_refused_in_words(potassium: MainWindow, settle: Settle) -> None:
    form = form_of(potassium)
    atoms_of(potassium).isotope.textActivated.emit("87Rb")
    state = atoms_of(potassium).state
    state.setCurrentIndex(state.findData("F=2 mF=+2"))
    state.activated.emit(state.currentIndex())
    settle(potassium)
    assert form.trouble.isVisible()
    assert "is the first species too" in form.trouble.text()
    assert not potassium.desk.verdict.stale  # the first species has its answer all the same
    potassium.document.stack.undo()
    settle(potassium)
    assert not form.trouble.isVisible()


def test_bad_input_is_said_beside_the_field_and_unfolds_it(potassium: MainWindow, settle: Settle) -> None:
    form, before = form_of(potassium), potassium.document.plan
    type_over(form.parts[1].temperature, "3 G")
    assert "temperature" in form.problems[0].lower()
    form.set_unfolded(False)
    assert form.unfolded
    assert potassium.document.plan == before
    assert potassium.desk.verdict.stale


def test_removal_is_a_step_and_the_file_keeps_what_is_there(
    potassium: MainWindow, settle: Settle, tmp_path: Path
) -> None:
    form = form_of(potassium)
    type_over(form.parts[1].atoms, "2e4")
    potassium.document.edit(replace(potassium.document.plan, title="kept"), "title")
    assert saved(potassium, tmp_path / "with.toml").passenger == potassium.document.plan.passenger
    form.remove.click()
    settle(potassium)
    assert potassium.document.plan.passenger is None
    assert saved(potassium, tmp_path / "without.toml").passenger is None
    assert not form.remove.isVisible()
    potassium.document.stack.undo()
    passenger = potassium.document.plan.passenger
    assert passenger is not None
    assert passenger.cloud.atoms.text == "2e4"


def saved(window: MainWindow, path: Path) -> Plan:
    save_plan(window.document.plan, path)
    return read_plan(path)
