"""Views of the page Ramp that ask for answers of their own: design, waypoints, what counts, measured clouds."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

import pytest
from PySide6.QtGui import QGuiApplication
from pytestqt.qtbot import QtBot

from app.figures.picture import Role
from app.figures.ramp_columns import ATOMS
from app.pages.ramp import RampPage
from app.plan import DEFAULT_PLAN, Plan, TargetChoice
from app.process import own_process
from app.ramp_edits import usual_ramp
from app.units import ATOM_NUMBER, LIFETIME, TEMPERATURE, read_quantity
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]


@pytest.fixture(autouse=True, scope="module")
def end_process() -> Iterator[None]:
    yield
    own_process.close()


def a_plan() -> Plan:
    plan = replace(
        DEFAULT_PLAN,
        cloud=replace(
            DEFAULT_PLAN.cloud,
            atoms=read_quantity("5.0(5)e6", ATOM_NUMBER),
            temperature=read_quantity("3 uK", TEMPERATURE),
        ),
        losses=replace(DEFAULT_PLAN.losses, background_lifetime=read_quantity("60 s", LIFETIME)),
        target=TargetChoice(),
    )
    return replace(plan, ramp=usual_ramp(plan))


@pytest.fixture
def window(lasting_window: MainWindow, settle: Settle) -> MainWindow:
    window = lasting_window
    window.document.load(a_plan(), None, None)
    window.desk.tabs.setCurrentWidget(window.desk.ramp)
    window.desk.ramp.panel.choose_view("Course")
    settle(window)
    return window


def view(window: MainWindow, settle: Settle, name: str) -> RampPage:
    window.desk.ramp.panel.choose_view(name)
    settle(window)
    return window.desk.ramp


def test_a_design_is_worked_out_applied_and_undone(window, settle):
    page = view(window, settle, "Design")
    design = page.panel.design
    before = window.document.plan
    design.go.click()
    settle(window)
    assert "Most atoms reach condensation" in design.sentence.text()
    assert "What binds: " in design.detail.text()
    eta = design.plots[0].picture()
    assert any(mark.role is Role.CLOUD for mark in eta.marks)
    steps = window.document.stack.count()
    design.apply.click()
    settle(window)
    assert len(window.document.plan.ramp) > 1
    assert window.document.plan.trap.depth is not None
    assert window.document.stack.count() == steps + 1
    assert page.answer.run.final["peak_phase_space_density"] > 2.6
    window.document.stack.undo()
    settle(window)
    assert window.document.plan == before


def test_a_plan_without_a_ramp_offers_to_design_one(window, settle):
    window.document.edit(replace(window.document.plan, ramp=()), "ramp", "")
    settle(window)
    page = window.desk.ramp
    assert page.panel.empty.isVisible()
    next(button for button in page.panel.empty.buttons() if button.text() == "Design one").click()
    settle(window)
    assert page.panel.view == "Design"
    assert page.panel.design.go.isVisible()
    assert page.panel.design.go.isEnabled()
    assert not page.panel.empty.isVisible()


def test_a_design_can_be_cancelled_and_asked_for_again(qtbot: QtBot, window, settle):
    page = view(window, settle, "Design")
    design = page.panel.design
    design.go.click()
    qtbot.waitUntil(lambda: window.answers._job is not None)
    page.part_stopped.emit()
    settle(window)
    assert design.sentence.text() == ""
    design.go.click()
    qtbot.waitUntil(lambda: window.answers._job is not None)
    page.part_stopped.emit()
    settle(window)


def test_limits_and_target_of_a_design_are_edits_of_the_plan(qtbot: QtBot, window, settle):
    page = view(window, settle, "Design")
    design = page.panel.design
    design.time.setFocus()
    qtbot.keyClicks(design.time, "12 s")
    assert window.document.plan.limits.time.text == "12 s"
    field = design.targets["target.peak_phase_space_density"]
    field.setFocus()
    qtbot.keyClicks(field, "1.5")
    settle(window)
    assert window.document.plan.target.peak_phase_space_density.value == 1.5
    window.document.stack.undo()
    window.document.stack.undo()
    settle(window)
    assert window.document.plan.limits.time is None
    assert design.time.text() == ""


def test_waypoints_follow_the_ramp_and_say_what_follows_if_a_cloud_is_off(qtbot: QtBot, window, settle):
    page = view(window, settle, "Waypoints")
    waypoints = page.panel.waypoints
    waypoints.densities.setFocus()
    waypoints.densities.selectAll()
    qtbot.keyClicks(waypoints.densities, "0.1, 1, 50")
    waypoints.densities.commit()
    settle(window)
    rows = waypoints.table.row_texts()
    assert [row[0] for row in rows] == ["0.100", "1.00"]
    assert "Not reached: D = 50" in waypoints.sentence.text()
    waypoints.table.selectRow(0)
    settle(window)
    names = [row[0] for row in waypoints.off.row_texts()]
    assert names == ["as planned", "N 10 % less", "N 10 % more"]  # the plan says 5.0(5)e6
    planned = page.answer.run.final["atoms"]
    assert float(waypoints.off.row_texts()[0][1]) == pytest.approx(planned, rel=0.01)
    waypoints.copy.click()
    assert QGuiApplication.clipboard().text().startswith("D\tN\tT\tt")
    assert waypoints.csv().splitlines()[0].startswith("peak phase-space density,atoms,temperature [K],time [s],")
    assert len(waypoints.csv().splitlines()) == 3
    assert "<td>0.100</td>" in waypoints.html()


def test_waypoints_without_a_ramp_go_by_the_assumed_efficiency(window, settle):
    window.document.load(DEFAULT_PLAN, None, None)
    page = view(window, settle, "Waypoints")
    said = page.panel.waypoints.sentence.text()
    assert said.startswith("Without a ramp: by the assumed efficiency γ = 2.5")
    assert said.endswith("it is taken to be 2.0 µK deep at the start.")
    assert all(row[3] == "–" for row in page.panel.waypoints.table.row_texts())


def test_waypoints_are_printed(window, settle, monkeypatch, tmp_path):
    from PySide6.QtPrintSupport import QPrintDialog, QPrinter

    page = view(window, settle, "Waypoints")
    path = tmp_path / "waypoints.pdf"

    def to_file(dialog: QPrintDialog) -> int:
        printer = dialog.printer()
        printer.setOutputFormat(QPrinter.OutputFormat.PdfFormat)
        printer.setOutputFileName(str(path))
        return 1

    monkeypatch.setattr(QPrintDialog, "exec", to_file)
    page.panel.waypoints.print.click()
    assert path.read_bytes().startswith(b"%PDF")


def test_bad_densities_are_refused_and_the_table_stays(qtbot: QtBot, window, settle):
    page = view(window, settle, "Waypoints")
    waypoints = page.panel.waypoints
    before = waypoints.table.row_texts()
    waypoints.densities.setFocus()
    waypoints.densities.selectAll()
    qtbot.keyClicks(waypoints.densities, "0.1, many")
    waypoints.densities.commit()
    settle(window)
    assert "many" in waypoints.error.text()
    assert waypoints.table.row_texts() == before


def test_what_counts_lists_inputs_with_their_effects(window, settle):
    page = view(window, settle, "What counts")
    counts = page.panel.sensitivity
    names = [row[0] for row in counts.table.row_texts()]
    assert "atoms at the start" in names
    assert "background lifetime" in names
    assert counts.sentence.text().startswith(f"What counts most: {names[0]}")


def test_a_measured_cloud_is_added_corrected_and_followed(qtbot: QtBot, window, settle):
    page = view(window, settle, "Measured")
    measured = page.panel.measured
    measured.add.click()
    settle(window)
    (cloud,) = window.document.plan.measured
    assert (cloud.label, cloud.stage) == ("cloud 1", 1)
    assert cloud.atoms.value == pytest.approx(page.answer.run.final["atoms"], rel=0.01)
    measured._place(0, measured_where("TIME"))
    settle(window)
    assert window.document.plan.measured[0].time.text == "1 s"
    assert any(mark.role is Role.MEASURED for mark in page.panel.columns.plots[ATOMS].picture().marks)
    measured.rests[0].click()
    settle(window)
    picture = page.panel.columns.plots[ATOMS].picture()
    (rest,) = [curve for curve in picture.curves if curve.role is Role.REST]
    assert rest.x[0] == pytest.approx(1.0)
    assert rest.y[0] == pytest.approx(cloud.atoms.value)
    assert measured.sentence.text().startswith("From “cloud 1”: ")


def measured_where(name: str):
    from app.measured_edits import Where

    return Where[name]
