"""The Trap page: cuts, sections and scans follow the plan; what is not trapped is drawn with the reason."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from app.figures.theme import DARK
from app.plan import DEFAULT_PLAN, Plan, plan_with, read_plan
from app.units import Quantity
from app.widgets.trap_options import TrapView
from app.window.main_window import MainWindow
from physics.traps.survey import survey

Settle = Callable[[MainWindow], None]
MakeWindow = Callable[..., MainWindow]
ROOT = Path(__file__).parents[3]
FALLS = ROOT / "tests" / "data" / "plan_of_a_trap_that_holds_nothing.toml"


def preset(name: str) -> Plan:
    return read_plan(ROOT / "presets" / "traps" / f"{name}.toml")


def with_power(plan: Plan, watts: float) -> Plan:
    beam = plan.trap.beams[0]
    changed = replace(beam, power=Quantity(f"{watts:g} W", watts))
    return replace(plan, trap=plan.trap.with_beam(beam.name, changed))


@pytest.fixture
def lithium(make_window: MakeWindow, settle: Settle) -> MainWindow:
    window = make_window(preset("single_beam_lithium"))
    window.actions_by_id["view.trap"].trigger()
    settle(window)
    return window


def names(window: MainWindow) -> list[str]:
    return [plot.picture().title for plot in window.desk.trap.plots]


def test_the_cuts_stand_under_what_the_trap_comes_to(lithium: MainWindow) -> None:
    page = lithium.desk.trap
    assert page.sentence.text() == "51.13 × 6831 × 6831 Hz, 338 µK deep (10 kT), sag 5.32 nm."
    assert page.detail.text() == "Atoms leave over a pass of the potential, downwards."
    assert names(lithium) == ["along x", "along y", "along z and gravity"]
    texts = [label.text for label in page.cuts[1].picture().labels]
    assert texts == ["depth 338 µK", "kT 34.0 µK", "harmonic"]


def test_a_power_that_is_typed_changes_the_cuts(lithium: MainWindow, settle: Settle) -> None:
    page = lithium.desk.trap
    before = page.cuts[1].picture()
    lithium.document.edit(with_power(lithium.document.plan, 4.5), "power")
    settle(lithium)
    after = page.cuts[1].picture()
    assert page.sentence.text().startswith("36.15 × 4831 × 4831 Hz, 168 µK deep")
    assert (before.y.high, after.y.high) == (500.0, 300.0)
    assert page.cuts[1].canvas.picture is not None
    assert page.cuts[1].canvas.picture.y.high == after.y.high  # it has been painted


def test_the_temperature_moves_the_line_of_the_cloud_and_nothing_is_worked_out(
    lithium: MainWindow, settle: Settle
) -> None:
    page = lithium.desk.trap
    ground = page._ground
    lithium.document.edit(plan_with(lithium.document.plan, {"cloud.temperature": "36 uK"}), "temperature")
    settle(lithium)
    assert page._ground is ground
    assert "kT 36.0 µK" in [label.text for label in page.cuts[1].picture().labels]


def test_the_condensate_has_its_chemical_potential_on_the_cuts(make_window: MakeWindow, settle: Settle) -> None:
    window = make_window(plan_with(DEFAULT_PLAN, {"cloud.temperature": "50 nK", "cloud.atoms": "1e6"}))
    window.actions_by_id["view.trap"].trigger()
    settle(window)
    assert window.answers.cloud is not None
    shown = [label.text for label in window.desk.trap.cuts[0].picture().labels]
    mu = float(window.answers.cloud.equilibrium.chemical_potential) / 1.380649e-23
    assert f"µ {mu * 1e9:.3g} nK" in shown


def test_the_section_is_chosen_with_the_keyboard_and_marks_the_way_out(
    lithium: MainWindow, settle: Settle, qtbot: QtBot
) -> None:
    page = lithium.desk.trap
    lithium.activateWindow()
    button = page.options.views.button(0)
    button.setFocus()
    qtbot.waitUntil(button.hasFocus)
    QTest.keyClick(button, Qt.Key.Key_Right)
    settle(lithium)
    assert page.view is TrapView.SECTION
    assert len(page.plots) == 1
    picture = page.section.picture()
    assert picture.title == "potential over the plane xz through the minimum"
    assert picture.field is not None
    plane = page.options.plane
    plane.setFocus()
    QTest.keyClick(plane, Qt.Key.Key_Down)
    settle(lithium)
    assert page.section.picture().title == "potential over the plane yz through the minimum"
    assert (picture.x.label, page.section.picture().x.label) == ("x", "y")


def test_a_section_that_is_zoomed_is_worked_out_for_what_is_seen(lithium: MainWindow, settle: Settle) -> None:
    page = lithium.desk.trap
    page.choose(TrapView.SECTION)
    settle(lithium)
    whole = page.section.picture()
    page.zoom(0.5)
    settle(lithium)
    part = page.section.picture()
    assert part.field is not None
    assert (part.field.x[0], part.field.x[-1]) == pytest.approx((part.x.low, part.x.high))
    assert part.x.high - part.x.low == pytest.approx(0.5 * (whole.x.high - whole.x.low))
    page.home()
    settle(lithium)
    assert page.section.picture().x == whole.x


def test_a_scan_is_drawn_along_the_control_and_follows_another_one(lithium: MainWindow, settle: Settle) -> None:
    page = lithium.desk.trap
    page.choose(TrapView.SCAN)
    settle(lithium)
    frequencies, depth, sag = (plot.picture() for plot in page.plots)
    assert (frequencies.x.label, frequencies.x.unit) == ("power of beam A", "W")
    assert [label.text for label in frequencies.labels] == ["x", "y", "z", "now"]
    curve = depth.curves[0]
    assert curve.x[[0, -1]] == pytest.approx([4.5, 18.0])
    assert curve.y[-1] / curve.y[0] == pytest.approx(4.0, rel=0.01)  # depth ~ power, where gravity hardly counts
    assert sag.y.unit == "nm"
    page.options.range.setCurrentIndex(0)
    page.options.control.setCurrentIndex(1)
    settle(lithium)
    assert page.plots[0].picture().x.label == "waist of beam A"
    assert page.plots[1].picture().curves[0].x[[0, -1]] == pytest.approx([28.8, 32.0 / 0.9])


def test_a_scan_tells_how_far_it_is_and_can_be_stopped_and_begun_again(
    lithium: MainWindow, settle: Settle, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    page = lithium.desk.trap
    gate, asked = threading.Event(), []

    def slow(*given: object, **named: object) -> object:
        asked.append(given)
        if len(asked) > 3:
            gate.wait(10.0)
        return survey(*given, **named)  # type: ignore[arg-type]

    monkeypatch.setattr("physics.traps.survey.survey", slow)
    page.choose(TrapView.SCAN)
    qtbot.waitUntil(lambda: len(asked) > 3 and page.bar.progress.running)
    qtbot.waitUntil(lambda: page.plots[0] is page.scans[0] and page.plots[0].ready)  # no longer the cuts
    assert "scan of the power of beam A" in page.bar.progress.label.text()
    partial = page.plots[1].picture().curves[0]
    assert 1 <= len(partial.x) <= 3  # what is there is drawn
    page.bar.progress.button.click()
    assert "stopped" in page.bar.progress.label.text()
    gate.set()
    qtbot.waitUntil(lambda: not lithium.answers.newest.busy)
    assert len(asked) < 33
    page.bar.progress.button.click()
    settle(lithium)
    assert len(page.plots[1].picture().curves[0].x) == 33
    assert not page.bar.progress.running


def test_ranges_in_which_nothing_is_held_are_left_out_with_a_word(make_window: MakeWindow, settle: Settle) -> None:
    window = make_window(preset("crossed_beams_rubidium"))
    window.actions_by_id["view.trap"].trigger()
    page = window.desk.trap
    page.options.range.setCurrentIndex(2)  # a fifth to five times
    page.choose(TrapView.SCAN)
    settle(window)
    picture = page.plots[1].picture()
    assert "not trapped" in [label.text for label in picture.labels]
    curve = picture.curves[0]
    np.testing.assert_array_equal(np.isnan(curve.y), curve.x < 0.396)


def test_a_trap_that_holds_nothing_is_drawn_with_the_reason(make_window: MakeWindow, settle: Settle) -> None:
    window = make_window(preset("single_beam_lithium"))
    window.actions_by_id["view.trap"].trigger()
    settle(window)
    window.document.edit(read_plan(FALLS), "plan")
    settle(window)
    page = window.desk.trap
    assert window.desk.verdict.stale
    assert page.sentence.text().startswith("Not trapped: gravity pulls the atoms out")
    assert names(window) == ["along x", "along y", "along z", "along gravity"]
    assert all(plot.canvas.stale_text is None for plot in page.plots)
    for view in (TrapView.SECTION, TrapView.SCAN):
        page.choose(view)
        settle(window)
        assert page.plots[0].ready
        assert page.sentence.text().startswith("Not trapped")
    window.document.stack.undo()
    page.choose(TrapView.CUTS)
    settle(window)
    assert page.sentence.text().startswith("51.13 ×")


def test_a_window_that_begins_with_such_a_trap_draws_it_too(make_window: MakeWindow, settle: Settle) -> None:
    window = make_window(read_plan(FALLS))
    window.actions_by_id["view.trap"].trigger()
    settle(window)
    assert window.answers.cloud is None
    assert len(names(window)) == 4


def test_a_harmonic_trap_has_cuts_and_a_section_but_no_scan(window: MainWindow, settle: Settle) -> None:
    window.actions_by_id["view.trap"].trigger()
    settle(window)
    page = window.desk.trap
    assert names(window) == ["along x", "along y", "along z"]
    page.choose(TrapView.SECTION)
    settle(window)
    assert page.section.picture().field is not None
    page.choose(TrapView.SCAN)
    settle(window)
    assert page.is_empty
    assert page.empty.text.startswith("This trap is given by its frequencies")
    page.choose(TrapView.CUTS)
    settle(window)
    assert not page.is_empty
    assert len(page.plots) == 3


def test_the_page_is_saved_as_a_picture_and_as_numbers_with_units(
    lithium: MainWindow, settle: Settle, tmp_path: Path
) -> None:
    page = lithium.desk.trap
    page.write_data(tmp_path / "cuts.csv")
    page.write_picture(tmp_path / "cuts.svg")
    text = (tmp_path / "cuts.csv").read_text(encoding="utf-8")
    assert text.startswith("# along x\n")
    assert "distance from the minimum [mm]" in text
    assert "potential U/k [µK]" in text
    assert "along z and gravity" in (tmp_path / "cuts.svg").read_text(encoding="utf-8")
    page.choose(TrapView.SECTION)
    settle(lithium)
    page.write_data(tmp_path / "section.csv")
    assert "x [mm],z [µm]" in (tmp_path / "section.csv").read_text(encoding="utf-8")


def test_all_its_plots_turn_dark(lithium: MainWindow) -> None:
    page = lithium.desk.trap
    page.set_theme(DARK)
    assert all(plot.canvas.theme is DARK for plot in (*page.cuts, page.section, *page.scans))


def test_a_hidden_page_computes_nothing(window: MainWindow, settle: Settle, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[object] = []
    monkeypatch.setattr("app.pages.trap.trap_cuts", lambda *given: asked.append(given))
    window.document.edit(plan_with(window.document.plan, {"cloud.atoms": "2e5"}), "atoms")
    settle(window)
    assert asked == []
