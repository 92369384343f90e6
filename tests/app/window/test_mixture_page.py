"""The page Mixture: a passenger is put in, its numbers follow the plan, and it is followed along the ramp."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from app.answers.ramp import ramp_answer
from app.figures.mixture_courses import ATOMS, CONTACT_RATE, OVERLAP, TEMPERATURE
from app.figures.picture import Role
from app.kinds import TEMPERATURE as TEMPERATURE_KIND
from app.plan import Plan, plan_with, read_plan, save_plan
from app.plan_file import parse_plan
from app.units import read_quantity
from app.widgets.mixture_panel import MixtureView
from app.window.main_window import MainWindow

MakeWindow = Callable[..., MainWindow]
Settle = Callable[[MainWindow], None]
POTASSIUM = Path(__file__).parents[3] / "presets" / "plans" / "sympathetic_potassium.toml"
PLAN = """
coldward = 1
[species]
key = "87Rb"
state = "F=2 mF=+2"
[trap]
frequencies = ["120 Hz", "120 Hz", "60 Hz"]
depth = "60 uK"
[cloud]
atoms = "3e6"
temperature = "6 uK"
[target]
efficiency = 2.5
[[ramp.stage]]
duration = "3 s"
control = "scale"
end = 0.2
shape = "exponential"
[passenger.species]
key = "40K"
state = "F=9/2 mF=+9/2"
[passenger.cloud]
atoms = "1e5"
temperature = "8 uK"
"""


def plan() -> Plan:
    return parse_plan(PLAN, "test")


def without_length() -> Plan:
    """Chromium, of which the data know nothing beside rubidium."""
    given = plan()
    assert given.passenger is not None
    species = replace(given.passenger.species, key="52Cr", state=None)
    return replace(given, passenger=replace(given.passenger, species=species))


def opened(window: MainWindow, settle: Settle, view: MixtureView = MixtureView.CLOUDS) -> MainWindow:
    window.actions_by_id["view.mixture"].trigger()
    settle(window)
    window.desk.mixture.panel.choose(view)
    settle(window)
    return window


def cells(window: MainWindow) -> dict[str, tuple[str, ...]]:
    return {name: rest for name, *rest in window.desk.mixture.panel.table.row_texts()}


def with_temperature(given: Plan, text: str) -> Plan:
    assert given.passenger is not None
    cloud = replace(given.passenger.cloud, temperature=read_quantity(text, TEMPERATURE_KIND))
    return replace(given, passenger=replace(given.passenger, cloud=cloud))


def test_without_a_passenger_it_offers_one_and_shows_its_numbers(
    window: MainWindow, settle: Settle, qtbot: QtBot
) -> None:
    opened(window, settle)
    page = window.desk.mixture
    assert page.panel.empty.text.startswith("This plan has no passenger.")
    assert page.pictures() == ()
    assert page.bar.buttons["home"].isHidden()
    button = page.panel.empty.buttons()[0]
    assert button.text() == "Add a passenger"
    QTest.keyClick(button, Qt.Key.Key_Space)
    settle(window)
    assert not page.bar.buttons["home"].isHidden()
    assert window.document.plan.passenger is not None
    assert not page.panel.is_empty
    assert "85Rb" in page.panel.sentence.text()
    assert cells(window)["state"][1] == window.document.plan.passenger.species.state
    window.document.stack.undo()
    settle(window)
    assert page.panel.is_empty


def test_the_clouds_are_drawn_and_said(load_plan: MakeWindow, settle: Settle) -> None:
    window = opened(load_plan(plan()), settle)
    page = window.desk.mixture
    assert page.panel.sentence.text().startswith("40K shares the centre of 87Rb; at ")
    assert "40K stands at T/TF = " in page.panel.detail.text()
    assert "At γ = 2.50 87Rb can cool" in page.panel.detail.text()
    (picture,) = page.pictures()
    assert [label.text.split(",")[0] for label in picture.labels] == ["87Rb", "40K"]
    assert page.answer is not None
    shown = cells(window)
    assert shown["collisions with the other, per atom"][1].endswith(" /s")
    assert shown["scattering length a₁₂"][0] == "−215.0 a0, seen in its source"
    assert shown["frequencies"] == ["120 × 120 × 60 Hz"] * 2
    assert "Beams or coils would give each species its own" in page.panel.caveats.toPlainText()


def test_a_colder_passenger_collides_more_often(load_plan: MakeWindow, settle: Settle) -> None:
    window = opened(load_plan(plan()), settle)
    page = window.desk.mixture
    assert page.answer is not None
    before, said = page.answer.value("passenger_collision_rate"), page.panel.sentence.text()
    window.document.edit(with_temperature(window.document.plan, "2 uK"), "temperature")
    settle(window)
    assert page.answer.value("passenger_collision_rate") > 1.2 * before
    assert page.panel.sentence.text() != said
    window.document.stack.undo()
    settle(window)
    assert page.answer.value("passenger_collision_rate") == pytest.approx(before)
    assert page.panel.sentence.text() == said


def test_an_unknown_length_is_said_and_nothing_is_drawn_as_zero(load_plan: MakeWindow, settle: Settle) -> None:
    window = opened(load_plan(without_length()), settle)
    page = window.desk.mixture
    assert page.panel.sentence.text().endswith("; how often they collide is not known.")
    unknown = "not known: the data have no scattering length between these two"
    shown = cells(window)
    assert shown["scattering length a₁₂"] == [unknown, ""]
    assert shown["collisions with the other, per atom"] == [unknown, ""]
    assert shown["rethermalisation time"] == [unknown, ""]
    assert len(page.pictures()) == 1  # the clouds are where they are all the same
    page.panel.choose(MixtureView.RAMP)
    settle(window)
    assert page.panel.is_empty
    assert "give passenger.scattering_length" in page.panel.empty.text
    assert page.pictures() == ()


def test_the_passenger_follows_along_the_ramp(load_plan: MakeWindow, settle: Settle) -> None:
    window = opened(load_plan(plan()), settle, MixtureView.RAMP)
    page = window.desk.mixture
    run = ramp_answer(plan()).passenger
    assert run is not None
    final = run.run.passenger.final
    assert f"T/TF = {final['reduced_temperature']:.3g}" in page.panel.sentence.text()
    pictures = {column: plot.picture() for column, plot in page.panel.courses.plots.items()}
    warm, cold = (curve(pictures[TEMPERATURE], role) for role in (Role.FIRST, Role.SECOND))
    assert cold[0] == pytest.approx(8e-6)
    assert warm[0] == pytest.approx(6e-6)
    assert cold[-1] == pytest.approx(warm[-1], rel=0.05)
    assert curve(pictures[ATOMS], Role.SECOND)[-1] == pytest.approx(final["atoms"])
    assert {label.text for label in pictures[CONTACT_RATE].labels} == {"87Rb", "40K"}
    assert np.all(curve(pictures[OVERLAP], Role.TOTAL) == 1.0)  # frequencies that are given have no sag
    assert "Losses in collisions of the two species are left out" in page.panel.caveats.toPlainText()


def curve(picture, role: Role) -> np.ndarray:
    return next(one.y for one in picture.curves if one.role is role)


def test_times_are_read_with_the_arrow_keys(load_plan: MakeWindow, settle: Settle) -> None:
    window = opened(load_plan(plan()), settle, MixtureView.RAMP)
    page = window.desk.mixture
    canvas = page.panel.courses.plots[TEMPERATURE].canvas
    QTest.keyClick(canvas, Qt.Key.Key_Right, Qt.KeyboardModifier.ShiftModifier)
    assert page.reading == pytest.approx(0.1 * float(ramp_answer(plan()).run.time[-1]))
    picture = page.panel.courses.plots[TEMPERATURE].picture()
    assert len(picture.marks) == 2
    assert picture.note.endswith("µK")
    QTest.keyClick(canvas, Qt.Key.Key_Escape)
    assert page.reading is None
    assert page.panel.courses.plots[TEMPERATURE].picture().marks == ()


def test_without_a_ramp_the_usual_one_is_offered(load_plan: MakeWindow, settle: Settle) -> None:
    window = opened(load_plan(replace(plan(), ramp=())), settle, MixtureView.RAMP)
    page = window.desk.mixture
    assert page.panel.empty.text.startswith("This plan has no ramp")
    page.panel.empty.buttons()[0].click()
    settle(window)
    assert window.document.plan.ramp
    assert page.sympathetic is not None
    assert not page.panel.is_empty


def test_the_same_atoms_twice_are_refused_in_words(load_plan: MakeWindow, settle: Settle) -> None:
    given = plan()
    assert given.passenger is not None
    twice = replace(given, passenger=replace(given.passenger, species=given.species))
    window = opened(load_plan(twice), settle)
    assert "is the first species too" in window.desk.mixture.panel.empty.text
    window.document.edit(given, "another")
    settle(window)
    assert not window.desk.mixture.panel.is_empty


def test_a_trap_of_beams_shows_the_sag_and_its_long_ramp_can_be_stopped(
    load_plan: MakeWindow, settle: Settle, qtbot: QtBot
) -> None:
    cold = plan_with(with_temperature(read_plan(POTASSIUM), "1 uK"), {"cloud.temperature": "1 uK"})
    window = opened(load_plan(cold), settle)
    page = window.desk.mixture
    assert page.panel.sentence.text().startswith("40K lies 284 nm above 87Rb;")
    (picture,) = page.pictures()
    levels = [one.y[0] for one in picture.curves if one.role is Role.STAGE]
    assert levels == pytest.approx([0.0, 0.284], abs=0.001)
    assert "minima 284 nm apart" in [label.text for label in picture.labels]
    page.panel.choose(MixtureView.RAMP)
    qtbot.waitUntil(lambda: page.bar.progress.running)
    page.bar.progress.button.click()
    assert page.bar.progress.label.text() == "ramp with the passenger stopped"
    assert page.bar.progress.button.text() == "Compute"
    assert page.panel.empty.text.startswith("The simulation of the ramp was stopped.")
    qtbot.waitUntil(lambda: not window.answers.newest.busy)
    assert page.sympathetic is None
    page.panel.choose(MixtureView.CLOUDS)
    settle(window)
    assert len(page.pictures()) == 1


def test_what_is_saved_is_what_comes_back(load_plan: MakeWindow, settle: Settle, tmp_path: Path) -> None:
    window = opened(load_plan(plan()), settle)
    said = window.desk.mixture.panel.sentence.text()
    save_plan(window.document.plan, tmp_path / "two.toml")
    window.document.edit(with_temperature(window.document.plan, "3 uK"), "temperature")
    settle(window)
    assert window.desk.mixture.panel.sentence.text() != said
    window.document.stack.setClean()
    assert window.files.read(tmp_path / "two.toml")
    settle(window)
    assert window.desk.mixture.panel.sentence.text() == said
