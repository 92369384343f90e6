"""The Candidates page: rows that come, order, filters, weights, units and columns; a species is used; evaporation."""

import math
import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from app.answers import candidates as answers
from app.answers.candidate_evaporation import EvaporationResult
from app.answers.candidate_row import Failure
from app.candidate_choices import Basis, CandidatesChoice, Start
from app.candidate_order import Trait
from app.pages.candidates import CandidatesPage
from app.plan import DEFAULT_PLAN, Plan, SpeciesChoice, read_plan
from app.widgets.candidate_model import Kind
from app.widgets.conditions_dialog import ConditionsDialog, FieldsDialog
from app.widgets.species_dialog import SpeciesDialog
from app.window.main_window import MainWindow
from physics.constants import bohr_radius

Settle = Callable[[MainWindow], None]
MakeWindow = Callable[..., MainWindow]
LIGHT = Path(__file__).resolve().parents[3] / "presets" / "traps" / "crossed_beams_rubidium.toml"
FEW = replace(DEFAULT_PLAN, candidates=CandidatesChoice(keys=("87Rb", "41K", "40K", "85Rb", "7Li")))


def page_of(window: MainWindow) -> CandidatesPage:
    return window.desk.candidates


def names(window: MainWindow) -> list[str]:
    return [row.name for row in page_of(window).table.model_.shown.rows]


def values(window: MainWindow, name: str) -> list[float]:
    return [row.cell(name).value for row in page_of(window).table.model_.shown.rows]


def heading_texts(window: MainWindow) -> list[str]:
    model = page_of(window).table.model_
    return [model.heading(model.head(place)) for place in range(model.columnCount())]


@pytest.fixture
def compared(make_window: MakeWindow, settle: Settle) -> MainWindow:
    window = make_window(FEW)
    window.actions_by_id["view.candidates"].trigger()
    settle(window)
    return window


def test_every_candidate_has_its_row_and_the_plan_s_own_is_marked(compared: MainWindow) -> None:
    page = page_of(compared)
    assert len(names(compared)) == 16
    assert "16 states of 5 species in the same frequencies" in page.sentence.text()
    heads = [page.table.model_.headerData(place, Qt.Orientation.Vertical) for place in range(16)]
    assert [str(head).strip() for head in heads if "●" in str(head)] == ["● 87Rb |1,-1>"]
    assert page.table.hasFocus()
    assert page.plot.picture().title == "where each becomes degenerate"


def test_cells_say_what_is_known_how_sure_and_why_not(compared: MainWindow) -> None:
    model = page_of(compared).table.model_
    column = model.place_of("scattering_length")
    cells = {row.name: model.text(place, column) for place, row in enumerate(model.shown.rows)}
    assert cells["87Rb  F=1 mF=-1"] == "100ʳ"
    assert cells["85Rb  F=2 mF=-2"] == "–"
    tips = {row.name: model.tip_at(model.index(place, column)) for place, row in enumerate(model.shown.rows)}
    assert "recalled" in tips["87Rb  F=1 mF=-1"]
    assert "needs a magnetic field" in tips["85Rb  F=2 mF=-2"]
    spoken = model.data(model.index(0, column), Qt.ItemDataRole.AccessibleTextRole)
    assert str(spoken).startswith("7Li |1,+1>, scattering length [a0]: unknown, needs a magnetic field")
    status = next(place for place in range(model.columnCount()) if model.head(place).kind is Kind.STATUS)
    assert {model.text(place, status) for place in range(16)} >= {"", "no data", "attractive", "no collisions"}


def test_a_column_orders_table_and_ranking_and_unknown_ones_come_last(compared: MainWindow, settle: Settle) -> None:
    page = page_of(compared)
    page.view.group.button(1).click()
    for descending in (True, False):
        header = page.table.horizontalHeader()
        header.sectionClicked.emit(page.table.model_.place_of("elastic_collision_rate"))
        settle(compared)
        found = values(compared, "elastic_collision_rate")
        known = [value for value in found if math.isfinite(value)]
        assert known == sorted(known, reverse=descending)
        assert all(math.isnan(value) for value in found[len(known) :])
        picture = page.plot.picture()
        assert picture.title == "ranked by elastic collision rate, mean per atom"
        assert picture.marks[0].x == pytest.approx(next(value for value in known if value > 0.0))
    assert page.view.order.currentText() == "elastic collision rate, mean per atom"


def test_filters_are_the_user_s_and_are_kept(compared: MainWindow, make_window: MakeWindow, settle: Settle) -> None:
    page = page_of(compared)
    page.choices.rules.click()
    page.rules.traits[Trait.BOSONS].click()
    assert {row.bosons for row in page.table.model_.shown.rows} == {True}
    page.rules.traits[Trait.FERMIONS].click()
    assert page.rules.sieve.traits == (Trait.FERMIONS,)
    page.rules.traits[Trait.FERMIONS].click()
    limits = page.rules.limits
    limits.column.setCurrentIndex(limits.column.findData("elastic_collision_rate"))
    limits.text.setText("5")
    limits.add.click()
    assert "needs a unit" in limits.error.text()
    limits.text.setText("5 1/s")
    limits.add.click()
    assert not limits.error.text()
    assert limits.chip_texts() == ("elastic collision rate, mean per atom ≥ 5 1/s",)
    assert min(values(compared, "elastic_collision_rate")) >= 5.0
    assert "pass the filters" in page.detail.text()
    assert page.choices.rules.text() == "Filters 1 · weights"
    compared.settings.flush()
    again = make_window(FEW)
    again.actions_by_id["view.candidates"].trigger()
    settle(again)
    assert names(again) == names(compared)


def test_weights_make_a_score_that_shows_its_parts(compared: MainWindow) -> None:
    page = page_of(compared)
    weighing = page.rules.weighing
    for name, weight in (("elastic_collision_rate", "2"), ("mass", "")):
        weighing.column.setCurrentIndex(weighing.column.findData(name))
        weighing.text.setText(weight)
        weighing.add.click()
    assert weighing.chip_texts() == ("2 × elastic collision rate, mean per atom", "1 × mass")
    model = page.table.model_
    place = model.place_of("score")
    first = model.text(0, place)
    assert " = " in first
    assert " + " in first
    scores = [score.value for score in model.shown.scores]
    known = [score for score in scores if math.isfinite(score)]
    assert known == sorted(known, reverse=True)
    assert all(math.isnan(score) for score in scores[len(known) :])
    assert model.text(len(scores) - 1, place) == "–"
    assert "2/3" in model.tip_at(model.index(0, place))
    weighing.chips.itemAt(0).widget().click()
    assert weighing.chip_texts() == ("1 × mass",)


def test_units_and_columns_are_the_reader_s(compared: MainWindow, settle: Settle) -> None:
    page = page_of(compared)
    place = page.table.model_.place_of("threshold_temperature")
    menu = page.table.head_menu(place)
    assert menu is not None
    chosen = next(action for action in menu.actions() if action.text() == "in µK")
    chosen.trigger()
    assert "threshold temperature [µK]" in heading_texts(compared)
    assert compared.settings.units["threshold_temperature"] == "µK"
    next(action for action in menu.actions() if action.text() == "Hide this column").trigger()
    assert not any(text.startswith("threshold temperature") for text in heading_texts(compared)[:2])
    page.choose_columns(("mass", "mean_density"))
    settle(compared)
    assert heading_texts(compared) == ["remarks", "mass [u]", "mean density [1/cm^3]", "model"]


def test_rows_are_copied_and_saved_with_their_marks(compared: MainWindow, tmp_path: Path) -> None:
    page = page_of(compared)
    page.table.setFocus()
    page.table.selectRow(names(compared).index("41K  F=2 mF=+2"))
    compared.copy()
    lines = QGuiApplication.clipboard().text().splitlines()
    assert len(lines) == 2
    assert lines[1].startswith("41K F=2 mF=+2\t\t")
    assert "60.5ʳ" in lines[1]
    page.write_data(tmp_path / "candidates.csv")
    text = (tmp_path / "candidates.csv").read_text()
    assert text.splitlines()[0].startswith("species,state,trapped,fails,reason,model")
    assert len(text.splitlines()) == 17


def test_return_puts_a_species_into_the_plan_and_undo_takes_it_back(
    compared: MainWindow, settle: Settle, qtbot: QtBot
) -> None:
    page = page_of(compared)
    page.table.setCurrentIndex(page.table.model_.index(names(compared).index("41K  F=2 mF=+2"), 2))
    qtbot.keyClick(page.table, Qt.Key.Key_Return)
    settle(compared)
    assert compared.document.plan.species.key == "41K"
    assert compared.document.plan.cloud == FEW.cloud
    assert "41K" in compared.actions_by_id["edit.undo"].text()
    compared.document.stack.undo()
    settle(compared)
    assert compared.document.plan == FEW


def test_the_basis_is_part_of_the_plan(compared: MainWindow, settle: Settle) -> None:
    page = page_of(compared)
    page.choices.basis.setCurrentIndex(3)
    page.choices.basis.activated.emit(3)
    settle(compared)
    choice = compared.document.plan.candidates
    assert (choice.basis, choice.start) == (Basis.SAME_START, Start.PHASE_SPACE_DENSITY)
    assert choice.keys == FEW.candidates.keys
    assert "as far from degeneracy" in page.sentence.text()
    compared.document.stack.undo()
    settle(compared)
    assert page.choices.basis.currentText() == "same frequencies"
    step = compared.document.stack.index()
    page.choices.basis.activated.emit(0)  # as it is: nothing to be undone
    assert compared.document.stack.index() == step


def test_without_light_the_same_light_says_what_to_do(compared: MainWindow, settle: Settle) -> None:
    page = page_of(compared)
    page.choices.basis.activated.emit(1)
    settle(compared)
    assert page.is_empty
    assert "no light" in page.empty.text
    page.empty.buttons()[0].click()
    settle(compared)
    assert not page.is_empty
    assert compared.document.plan.candidates.basis is Basis.SAME_FREQUENCIES


def test_in_the_same_light_rows_come_as_they_are_done(
    make_window: MakeWindow, settle: Settle, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    plan = replace(
        read_plan(LIGHT), candidates=CandidatesChoice(basis=Basis.SAME_LIGHT, keys=("41K", "84Sr", "87Rb"))
    )  # fmt: skip
    window = make_window(plan)
    hold = [True]
    judged = answers._row

    def slow(plan: Plan, *rest: object) -> object:
        while plan.species.key == "84Sr" and hold[0]:
            time.sleep(0.002)
        return judged(plan, *rest)  # type: ignore[arg-type]

    monkeypatch.setattr(answers, "_row", slow)
    monkeypatch.setattr(answers, "PATIENCE", -1.0)
    window.actions_by_id["view.candidates"].trigger()
    page = page_of(window)
    qtbot.waitUntil(lambda: names(window) == ["41K  F=2 mF=+2", "41K  F=1 mF=+1"])
    qtbot.waitUntil(lambda: page.bar.progress.isVisible())
    page.bar.progress.button.click()
    assert window.answers.settled
    assert len(names(window)) == 2
    hold[0] = False
    page.bar.progress.button.click()
    settle(window)
    assert len(names(window)) == 6
    row = next(row for row in page.table.model_.shown.rows if row.key == "84Sr")
    assert row.failure is not None
    assert "gravity" in page.table.model_.tip_at(page.table.model_.index(names(window).index(row.name), 0))
    # What is there is not made again.
    monkeypatch.setattr(answers, "_row", lambda *_given: pytest.fail("judged again"))
    window.desk.show_page(0)
    settle(window)
    window.actions_by_id["view.candidates"].trigger()
    settle(window)
    assert len(names(window)) == 6


def test_the_best_evaporation_is_worked_out_on_demand_and_can_be_stopped(
    compared: MainWindow, settle: Settle, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    hold = [True]

    def evaporate(rows, found, told):  # type: ignore[no-untyped-def]
        for place, row in enumerate(rows):
            while hold[0] and place == 3:
                if not told(0.5):
                    return None
                time.sleep(0.002)
            reason = "" if row.key == "87Rb" else "made up"
            if not found(place, EvaporationResult(atoms=math.nan if reason else 4e4, time=5.0, reason=reason)):
                return None
        return tuple(rows)

    monkeypatch.setattr("app.answers.candidate_jobs.evaporate_rows", evaporate)
    page = page_of(compared)
    assert all(math.isnan(value) for value in values(compared, "evaporated_atoms"))
    page.choices.evaporate.click()
    qtbot.waitUntil(lambda: page.bar.progress.isVisible())
    assert "best evaporations" in page.bar.progress.label.text()
    page.bar.progress.button.click()
    assert compared.answers.settled
    hold[0] = False
    page.choices.evaporate.click()
    settle(compared)
    found = dict(zip(names(compared), values(compared, "evaporated_atoms"), strict=True))
    assert found["87Rb  F=1 mF=-1"] == 4e4
    assert math.isnan(found["41K  F=2 mF=+2"])
    assert not page.choices.evaporate.isEnabled()


def test_species_are_ticked_in_a_dialog(compared: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch) -> None:
    def ticked(dialog: SpeciesDialog) -> int:
        assert len(dialog.chosen) == 16
        dialog.search.setText("sr")
        dialog.tick(())
        assert not dialog.buttons.button(dialog.buttons.StandardButton.Ok).isEnabled()
        dialog._states["88Sr", "ground state"].setCheckState(0, Qt.CheckState.Checked)
        return int(SpeciesDialog.DialogCode.Accepted)

    monkeypatch.setattr(SpeciesDialog, "exec", ticked)
    page_of(compared).choices.species.click()
    settle(compared)
    assert names(compared) == ["88Sr  ground state"]
    assert compared.document.plan.candidates.keys == ("88Sr",)


def test_a_candidate_is_compared_in_a_field_of_its_own(
    compared: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch
) -> None:
    page = page_of(compared)

    def typed(dialog: ConditionsDialog) -> int:
        assert [field.placeholderText() for field in dialog.fields.values()][2:4] == ["not used", "as the data have it"]
        okay = dialog.buttons.button(dialog.buttons.StandardButton.Ok)
        dialog.fields["field"].setText("160 furlongs")
        dialog.fields["field"].textEdited.emit("160 furlongs")
        dialog.fields["field"].commit()
        assert not okay.isEnabled()
        dialog.fields["field"].setText("160 G")
        dialog.fields["field"].textEdited.emit("160 G")
        assert okay.isEnabled()
        return int(ConditionsDialog.DialogCode.Accepted)

    monkeypatch.setattr(ConditionsDialog, "exec", typed)
    place = names(compared).index("85Rb  F=2 mF=-2")
    menu = page.table.menu_at(page.table.model_.index(place, 2))
    assert menu is not None
    next(action for action in menu.actions() if action.text().startswith("Conditions")).trigger()
    settle(compared)
    assert len(names(compared)) == 16
    row = page.table.model_.shown.rows[place]
    assert row.cell("scattering_length").known
    assert row.failure is None
    assert [c.key for c in compared.document.plan.candidates.candidates] == ["85Rb"]
    compared.document.stack.undo()
    settle(compared)
    assert compared.document.plan == FEW


def test_what_is_known_of_a_cell_is_there_for_readers_without_a_mouse(compared: MainWindow) -> None:
    page = page_of(compared)
    page.view.group.button(2).click()
    page.table.setCurrentIndex(page.table.model_.index(0, page.table.model_.place_of("good_to_bad_ratio")))
    QApplication.processEvents()
    assert "good to bad collisions" in page.explanation.toPlainText()
    assert "source:" in page.explanation.toPlainText()


def test_a_hidden_page_computes_nothing(window: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("app.answers.candidate_jobs.candidates_answer", lambda *_given: pytest.fail("asked"))
    settle(window)
    assert names(window) == []


def test_the_best_field_of_all_is_asked_for_in_a_dialog(
    compared: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch
) -> None:
    page = page_of(compared)

    def typed(dialog: FieldsDialog) -> int:
        okay = dialog.buttons.button(dialog.buttons.StandardButton.Ok)
        for name, text in (("lowest_field", "155 G"), ("highest_field", "150 G"), ("wanted_length", "90 a0")):
            dialog.fields[name].setText(text)
            dialog.fields[name].textEdited.emit(text)
        assert not okay.isEnabled()
        assert "the lowest field must be below the highest" in dialog.error.text()
        dialog.fields["highest_field"].setText("170 G")
        dialog.fields["highest_field"].textEdited.emit("170 G")
        assert okay.isEnabled()
        return int(FieldsDialog.DialogCode.Accepted)

    monkeypatch.setattr(FieldsDialog, "exec", typed)
    page.choices.fields.click()
    settle(compared)
    assert compared.document.plan.candidates.highest_field is not None
    rows = {row.name: row for row in page.table.model_.shown.rows}
    rubidium = rows["85Rb  F=2 mF=-2"]
    assert rubidium.search is not None
    assert rubidium.cell("scattering_length").value == pytest.approx(90.0 * bohr_radius)
    assert rows["41K  F=2 mF=+2"].search is None
    # The plan's own atoms stay as they are.
    assert compared.document.plan.species.field is None


def test_where_the_plan_s_own_atoms_are_not_held_others_are_found(make_window: MakeWindow, settle: Settle) -> None:
    green = read_plan(LIGHT.with_name("green_beams_ytterbium.toml"))
    repelled = replace(
        green,
        species=SpeciesChoice(key="87Rb"),
        candidates=CandidatesChoice(keys=("87Rb", "174Yb"), basis=Basis.SAME_LIGHT),
    )
    window = make_window(repelled)
    window.actions_by_id["view.candidates"].trigger()
    settle(window)
    assert window.answers.cloud is None
    page = page_of(window)
    assert [row.failure for row in page.table.model_.shown.rows] == [Failure.NOT_TRAPPED] * 3 + [None]
    assert page.sentence.text().startswith("4 states of 2 species in the same light and coils")
    assert page.choices.basis.currentText() == "same light and coils"
    # In the frequencies of atoms that are not held nothing can be compared, and the way back is offered.
    page.questions.choose_basis(0)
    settle(window)
    assert page.is_empty
    assert "holds no atoms" in page.empty.text
    page.empty.buttons()[0].click()
    settle(window)
    assert not page.is_empty
    # A species that is held can be taken into the plan, which then has an answer.
    page.table.selectRow(3)
    page.table.use_asked.emit(page.table.model_.shown.rows[3])
    settle(window)
    assert window.document.plan.species.key == "174Yb"
    assert window.answers.current
