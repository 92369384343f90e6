"""Ramps that are kept to compare with are there again in the next session."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from pytestqt.qtbot import QtBot

from app.figures.picture import Role
from app.figures.ramp_columns import ATOMS
from app.plan import DEFAULT_PLAN, Plan
from app.ramp_edits import usual_ramp, with_duration
from app.units import DURATION, read_quantity
from app.widgets.ramp_references import Remembered, reference_texts, remembered_references
from app.window.main_window import MainWindow

MakeWindow = Callable[..., MainWindow]


def ramped(title: str, duration: str = "2 s") -> Plan:
    plan = replace(DEFAULT_PLAN, title=title)
    plan = replace(plan, ramp=usual_ramp(plan))
    return with_duration(plan, 0, read_quantity(duration, DURATION))


def test_what_is_kept_outlives_the_window(make_window: MakeWindow, qtbot: QtBot) -> None:
    first = make_window(ramped("before lunch"))
    first.desk.show_page(4)
    page = first.desk.ramp
    qtbot.waitUntil(lambda: page.answer is not None)
    page.keep_reference()
    kept = page.references[0].answer.run.final["atoms"]
    first.document.stack.setClean()
    first.close()

    second = make_window(ramped("after lunch", "4 s"))
    second.desk.show_page(4)
    page = second.desk.ramp
    qtbot.waitUntil(lambda: bool(page.references))
    assert [ref.name for ref in page.references] == ["before lunch"]
    assert page.references[0].answer.run.final["atoms"] == kept
    qtbot.waitUntil(lambda: page.panel.drop.isVisible())
    roles = [curve.role for curve in page.panel.columns.plots[ATOMS].picture().curves]
    assert Role.REFERENCE in roles
    # Dropped, it is gone for good.
    page.drop_references()
    second.document.stack.setClean()
    second.close()

    third = make_window(ramped("next day"))
    third.desk.show_page(4)
    qtbot.waitUntil(lambda: third.desk.ramp.answer is not None and third.answers.settled)
    assert third.desk.ramp.references == []


def test_texts_that_make_no_sense_are_left_out() -> None:
    plan = ramped("kept")
    texts = reference_texts([Remembered(name="kept", plan=plan)])
    found = remembered_references(("", "no plan", "odd\ncoldward = 99", *texts, "\ncoldward = 1"))
    assert [one.name for one in found] == ["kept"]
    assert found[0].plan == plan
    # So many that nobody could tell them apart: the newest stay.
    assert len(reference_texts([Remembered(name=f"{k}", plan=plan) for k in range(12)])) == 8
