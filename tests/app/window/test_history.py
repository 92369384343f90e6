"""Undo and redo over the whole window: random edits go back to the start and forth to the end."""

from collections.abc import Callable
from dataclasses import replace

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from app.kinds import ATOM_NUMBER, FREQUENCY, TEMPERATURE
from app.plan import DEFAULT_PLAN, Plan
from app.units import read_quantity
from app.widgets.form import plan_with_entry
from app.window.main_window import MainWindow
from physics.models import Model


def temperature(plan: Plan, value: int) -> Plan:
    return plan_with_entry(plan, "cloud.temperature", read_quantity(f"{value} nK", TEMPERATURE))


def atoms(plan: Plan, value: int) -> Plan:
    return plan_with_entry(plan, "cloud.atoms", read_quantity(f"{value}e3", ATOM_NUMBER))


def frequency(plan: Plan, value: int) -> Plan:
    _, y, z = plan.trap.frequencies
    return replace(plan, trap=replace(plan.trap, frequencies=(read_quantity(f"{value} Hz", FREQUENCY), y, z)))


def species(plan: Plan, value: int) -> Plan:
    return plan_with_entry(plan, "species.key", ("87Rb", "23Na", "6Li", "40K", "133Cs")[value % 5])


def model(plan: Plan, value: int) -> Plan:
    return plan_with_entry(plan, "cloud.model", (None, Model.IDEAL, Model.SEMI_IDEAL)[value % 3])


EDITS = st.lists(
    st.tuples(
        st.sampled_from([temperature, atoms, frequency, species, model]),
        st.integers(1, 900),
        st.sampled_from(["", "typing", "drag 1", "drag 2"]),
    ),
    max_size=25,
)


@pytest.fixture(scope="module")
def shared_window(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory):
    from PySide6.QtCore import QSize

    from app.window.settings import Settings
    from app.window.start import application

    application()
    window = MainWindow(Settings(tmp_path_factory.mktemp("settings")), size=QSize(1200, 800))
    window.furnish(DEFAULT_PLAN)
    yield window
    window.document.stack.setClean()
    window.close()


@given(edits=EDITS)
@settings(max_examples=40, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_undo_all_is_the_start_and_redo_all_is_the_end(
    shared_window: MainWindow, edits: list[tuple[Callable[[Plan, int], Plan], int, str]]
) -> None:
    window, document = shared_window, shared_window.document
    document.load(DEFAULT_PLAN, None, None)
    for edit, value, key in edits:
        document.edit(edit(document.plan, value), "something", key)
    end = document.plan
    window.answers.answer_now()
    sentence = window.desk.verdict.sentence
    while document.stack.canUndo():
        document.stack.undo()
    assert document.plan == DEFAULT_PLAN
    assert document.clean
    assert window.desk.bench.cloud.temperature.text() == DEFAULT_PLAN.cloud.temperature.text
    assert window.desk.bench.species.isotope.currentText() == "87Rb"
    while document.stack.canRedo():
        document.stack.redo()
    assert document.plan == end
    window.answers.answer_now()
    assert window.desk.verdict.sentence == sentence
