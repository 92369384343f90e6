"""Ramps out of the window as tables, and in again."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtWidgets import QDialogButtonBox, QFileDialog

from app.figures.picture import Role
from app.figures.ramp_columns import ATOMS
from app.plan import DEFAULT_PLAN, Plan
from app.ramp_edits import usual_ramp, with_new_stage
from app.units import ATOM_NUMBER, TEMPERATURE, read_quantity
from app.widgets.ramp_table_dialog import RampTableDialog


def plan_with_ramp() -> Plan:
    """Two stages of five seconds each."""
    cloud = replace(
        DEFAULT_PLAN.cloud, atoms=read_quantity("5e6", ATOM_NUMBER), temperature=read_quantity("3 uK", TEMPERATURE)
    )
    plan = replace(DEFAULT_PLAN, cloud=cloud)
    return with_new_stage(replace(plan, ramp=usual_ramp(plan)), 1)


@pytest.fixture
def page(lasting_window, settle):
    window = lasting_window
    window.document.load(plan_with_ramp(), None, None)
    window.desk.tabs.setCurrentWidget(window.desk.ramp)
    settle(window)
    return window.desk.ramp


def chosen(monkeypatch, name: str, path: Path) -> None:
    monkeypatch.setattr(QFileDialog, name, lambda *_args: (str(path), ""))


def test_a_ramp_is_written_with_the_step_and_units_that_were_chosen(qtbot, page, monkeypatch, tmp_path):
    path = tmp_path / "out.csv"
    chosen(monkeypatch, "getSaveFileName", path)

    def accept(dialog: RampTableDialog) -> int:
        dialog.step.setFocus()
        dialog.step.selectAll()
        qtbot.keyClicks(dialog.step, "2500 ms")
        dialog.units["depth"].setCurrentText("nK")
        dialog.cloud.setChecked(True)
        return int(RampTableDialog.DialogCode.Accepted)

    monkeypatch.setattr(RampTableDialog, "exec", accept)
    page.panel.choose_view("Stages")
    page.panel.stages.save_button.click()
    lines = path.read_text().splitlines()
    assert lines[0].startswith("time [s],scale,depth [nK],atoms,")
    assert "temperature" in lines[0]
    assert len(lines) == 1 + 5
    assert [line.split(",")[0] for line in lines[1:]] == ["0", "2.5", "5", "7.5", "10"]
    assert float(lines[1].split(",")[2]) == pytest.approx(30_000.0)


def test_the_dialog_waits_for_a_step_that_can_be(qtbot, page):
    dialog = RampTableDialog(page.cloud.plan, None)
    ok = dialog.buttons.button(QDialogButtonBox.StandardButton.Ok)
    assert ok.isEnabled()
    dialog.step.selectAll()
    qtbot.keyClicks(dialog.step, "1 h")
    assert "step" in dialog.problem.text()
    assert not ok.isEnabled()


def test_a_table_becomes_the_ramp_and_undo_brings_the_old_one_back(page, settle, monkeypatch, tmp_path):
    window = page.window()
    path = tmp_path / "in.csv"
    path.write_text("time [s],depth [uK]\n0,30\n2,8\n6,3\n")
    chosen(monkeypatch, "getOpenFileName", path)
    page.panel.choose_view("Stages")
    page.panel.stages.read_button.click()
    settle(window)
    (stage,) = window.document.plan.ramp
    assert stage.duration.value == 6.0
    assert [value.value / stage.moves[0].points[0][1].value for _t, value in stage.moves[0].points] == pytest.approx(
        [1.0, 8 / 30, 0.1]
    )
    assert page.panel.controls.curves[0].times[-1] == 6.0
    assert page.panel.stages.moves[0][0].points.text() == "0 s: 30 uK; 2 s: 8 uK; 6 s: 3 uK"
    window.document.stack.undo()
    settle(window)
    assert window.document.plan.ramp == plan_with_ramp().ramp


def test_the_points_of_a_table_are_typed(qtbot, page, settle):
    window = page.window()
    page.panel.choose_view("Stages")
    editor = page.panel.stages
    editor.moves[0][0].shape.activated.emit(3)
    settle(window)
    points = editor.moves[0][0].points
    assert points.text() == "0 s: 30 µK; 5 s: 3.00 µK"
    points.setFocus()
    points.selectAll()
    qtbot.keyClicks(points, "0 s: 30 uK; 1 s: 9 uK; 4 s 2 uK")
    points.commit()
    assert '"4 s 2 uK" is no point' in editor.problem
    points.selectAll()
    qtbot.keyClicks(points, "0 s: 30 uK; 1 s: 9 uK; 4 s: 2 uK")
    points.commit()
    settle(window)
    assert editor.problem == ""
    stage = window.document.plan.ramp[0]
    assert stage.duration.value == 4.0
    assert [time.value for time, _value in stage.moves[0].points] == [0.0, 1.0, 4.0]
    assert page.panel.controls.curves[0].at(1.0) == pytest.approx(9e-6)
    window.document.stack.undo()
    settle(window)
    assert editor.moves[0][0].points.text() == "0 s: 30 µK; 5 s: 3.00 µK"


def test_a_table_that_cannot_be_read_changes_nothing_and_is_told_of(page, settle, tmp_path):
    told: list[str] = []
    page.told.connect(told.append)
    before: Plan = page.window().document.plan
    path = tmp_path / "bad.csv"
    for text, word in (
        ("time [s],depht [uK]\n0,1\n1,2\n", "depht"),
        ("", "empty"),
        ("time [s],knife [MHz]\n0,3\n1,2\n", "knife"),
    ):
        path.write_text(text)
        page.exchange.read_table(path)
        assert word in told[-1]
    assert page.window().document.plan == before
    curves = page.panel.columns.plots[ATOMS].picture().curves
    assert next(c for c in curves if c.role is Role.FIRST).y[0] == pytest.approx(5e6)
