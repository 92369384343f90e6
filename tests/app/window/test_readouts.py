"""Readouts: every quantity with its unit, copied as it is read, explained without a mouse."""

from collections.abc import Callable
from pathlib import Path
from typing import ClassVar

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QAbstractItemModelTester, QTest

from app.plan import read_plan
from app.quantities import QUANTITIES
from app.widgets.form import plan_with_entry
from app.widgets.readings import Reading, printed_unit
from app.widgets.readout_model import ReadoutModel
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
BEAMS = Path(__file__).resolve().parents[3] / "presets" / "traps" / "crossed_beams_rubidium.toml"


def select(window: MainWindow, name: str) -> None:
    readouts = window.desk.readouts
    model = readouts.model()
    for group in range(model.rowCount()):
        parent = model.index(group, 0)
        for row in range(model.rowCount(parent)):
            index = model.index(row, 0, parent)
            if index.data() == QUANTITIES[name].label:
                readouts.setFocus()
                readouts.setCurrentIndex(index)
                return
    pytest.fail(f"{name} is not among the readouts")


def test_the_model_keeps_the_rules_of_item_models(qapp) -> None:
    model = ReadoutModel()
    tester = QAbstractItemModelTester(model, QAbstractItemModelTester.FailureReportingMode.Fatal)
    one = {"critical_temperature": Reading("Tc", "138", "nK"), "peak_density": Reading("n", "6", "1/cm^3")}
    model.show_readings(one, lambda name: "")
    changed: list[str] = []
    model.dataChanged.connect(lambda first, last: changed.append(first.data()))
    for name in one:
        model.reading_of(QUANTITIES[name])  # as where it is on the screen
    model.show_readings(one | {"peak_density": Reading("n", "7", "1/cm^3")}, lambda name: "")
    assert changed == ["peak density"]
    model.mark_stale()
    assert len(changed) == 3
    model.show_readings({"fermi_energy": Reading("EF", "1", "µK")}, lambda name: "")
    assert model.rowCount() == 1
    tester.deleteLater()


def test_what_nobody_looks_at_is_not_worked_out(qapp) -> None:
    class Counted(dict[str, Reading]):
        asked: ClassVar[list[str]] = []

        def __getitem__(self, name: str) -> Reading:
            self.asked.append(name)
            return super().__getitem__(name)

    model = ReadoutModel()
    one = {"critical_temperature": Reading("Tc", "138", "nK"), "peak_density": Reading("n", "6", "1/cm^3")}
    model.show_readings(Counted(one), lambda name: "")
    assert model.reading_of(QUANTITIES["peak_density"]).value == "6"
    Counted.asked.clear()
    model.show_readings(Counted(one), lambda name: "")
    assert set(Counted.asked) == {"peak_density"}


def test_a_harmonic_trap_is_not_set_beside_itself(window: MainWindow, settle: Settle) -> None:
    model = window.desk.readouts._model
    assert "harmonic" not in model.table_text()
    window.document.edit(read_plan(BEAMS), "plan")
    settle(window)
    assert "reduced temperature (harmonic)\tT/Tc" in model.table_text()
    assert "(exact levels)" not in model.table_text()  # only a harmonic trap has known ones
    assert "In the harmonic trap of these frequencies" in [
        model.index(row, 0).data() for row in range(model.rowCount())
    ]


def test_bosons_and_fermions_have_their_own_quantities(window: MainWindow, settle: Settle) -> None:
    text = window.desk.readouts._model.table_text()
    assert "critical temperature (ideal)\tTc\t138" in text
    assert "Fermi temperature" not in text
    window.document.edit(plan_with_entry(window.document.plan, "species.key", "6Li"), "species")
    settle(window)
    text = window.desk.readouts._model.table_text()
    assert "Fermi temperature\tTF\t" in text
    assert "critical temperature" not in text
    assert "condens" not in text
    assert "reduced temperature\tT/TF\t" in text


def test_a_quantity_that_lacks_an_input_says_what_it_needs(window: MainWindow) -> None:
    reading = window.desk.readouts.reading("truncation")
    assert reading.value == "–"
    assert reading.reason == "needs a trap depth"
    select(window, "truncation")
    assert "no value: needs a trap depth" in window.desk.detail.toPlainText()


def test_formula_and_source_are_read_by_keyboard(window: MainWindow) -> None:
    window.actions_by_id["view.readouts"].trigger()
    assert window.desk.readouts.hasFocus()
    select(window, "critical_temperature")
    text = window.desk.detail.toPlainText()
    assert QUANTITIES["critical_temperature"].formula in text
    assert "Bagnato" in text
    assert "68 % of the draws: " in text


def test_values_are_copied_with_their_units(window: MainWindow) -> None:
    select(window, "critical_temperature")
    QTest.keyClick(window.desk.readouts, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    value, unit = QGuiApplication.clipboard().text().split()
    assert (round(float(value), 0), unit) == (138.0, "nK")


def test_all_are_copied_as_a_table(window: MainWindow) -> None:
    window.actions_by_id["edit.copy_all"].trigger()
    lines = QGuiApplication.clipboard().text().splitlines()
    assert lines[0] == "quantity\tsymbol\tvalue\tunit"
    assert len(lines) > 20
    assert all(line.count("\t") == 3 for line in lines)


def test_another_unit_changes_the_text_and_nothing_else_and_is_remembered(make_window) -> None:
    window = make_window()
    readouts = window.desk.readouts
    answer, plan = window.answers.cloud, window.document.plan
    select(window, "critical_temperature")
    menu = readouts.menu_at(readouts.currentIndex())
    assert menu is not None
    choices = {action.text(): action for action in menu.actions()}
    assert choices["in nK"].isChecked()
    choices["in kHz"].trigger()
    # k Tc/h: 138.4 nK is 2.88 kHz
    assert readouts.reading("critical_temperature").unit == "kHz"
    assert float(readouts.reading("critical_temperature").value) == pytest.approx(2.88, abs=0.01)
    assert window.answers.cloud is answer
    assert window.document.plan == plan
    window.close()
    assert make_window().desk.readouts.reading("critical_temperature").unit == "kHz"


def test_a_narrow_window_folds_the_readouts_into_a_tab(make_window, settle: Settle) -> None:
    window = make_window(size=(1000, 700))
    desk = window.desk
    assert desk.folded
    assert desk.tabs.count() == len(desk.pages) + 1
    assert not desk.readouts.isVisible()
    window.actions_by_id["view.readouts"].trigger()
    settle(window)
    assert desk.readouts.isVisible()
    assert desk.readouts.reading("critical_temperature").unit == "nK"
    window.resize(1400, 900)
    settle(window)
    assert not desk.folded
    assert desk.readouts.isVisible()
    assert desk.page_in_front is desk.map


def test_the_verdict_is_copied_as_text(window: MainWindow) -> None:
    window.actions_by_id["edit.copy_verdict"].trigger()
    lines = QGuiApplication.clipboard().text().splitlines()
    assert lines[0] == window.desk.verdict.sentence
    assert lines[1].startswith("peak phase-space density: ")


def test_caveats_are_words_and_can_be_selected(window: MainWindow) -> None:
    caveats = window.desk.caveats
    assert any("recalled" in line.sentence for line in caveats.lines)
    text = caveats.toPlainText()
    for line in caveats.lines:
        assert line.word in text
        assert line.sentence in text
    assert caveats.textInteractionFlags() & Qt.TextInteractionFlag.TextSelectableByKeyboard


@pytest.mark.parametrize(
    ("unit", "printed"),
    [("1/cm^3", "cm⁻³"), ("1/s", "s⁻¹"), ("cm^2", "cm²"), ("cm^6/s", "cm⁶/s"), ("µm", "µm"), ("a0", "a₀")],
)
def test_units_are_set_as_in_print(unit: str, printed: str) -> None:
    assert printed_unit(unit) == printed
