"""What the views of the ramp show of a passenger."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.plan import Plan
from app.plan_file import parse_plan
from app.widgets.quantity_field import QuantityField
from app.widgets.ramp_measured import MeasuredView
from app.widgets.ramp_waypoints import waypoint_cells, waypoint_headings, waypoints_csv
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
MakeWindow = Callable[..., MainWindow]

PLAN = """
coldward = 1
[species]
key = "87Rb"
state = "F=2 mF=+2"
[trap]
frequencies = ["340 Hz", "540 Hz", "640 Hz"]
depth = "80 uK"
[cloud]
atoms = "1.5e6"
temperature = "8 uK"
[[ramp.stage]]
duration = "300 ms"
control = "scale"
end = 0.5
shape = "exponential"
[[measured]]
label = "Tuesday"
stage = 1
atoms = "1.0(1)e6"
temperature = "2.8(2) uK"
[passenger.species]
key = "40K"
state = "F=9/2 mF=+9/2"
[passenger.cloud]
atoms = "1.5e5"
temperature = "8 uK"
"""


def plan() -> Plan:
    return parse_plan(PLAN, "test")


def test_waypoints_have_a_row_of_the_passenger_under_each() -> None:
    from app.answers.waypoints import waypoints_answer

    found = waypoints_answer(plan(), (0.05, 0.06))
    cells = waypoint_cells(found)
    assert [row[0] for row in cells] == ["0.0500", "40K", "0.0600", "40K"]
    assert {len(row) for row in cells} == {len(waypoint_headings(found))}
    assert cells[1][3].startswith("T/TF ")
    head, first, _ = waypoints_csv(found).splitlines()
    assert len(head.split(",")) == len(first.split(","))
    assert "passenger reduced temperature" in head


def test_what_is_measured_of_the_passenger_is_typed_beside_the_cloud(load_plan: MakeWindow, settle: Settle) -> None:
    window = load_plan(plan())
    window.actions_by_id["view.ramp"].trigger()
    settle(window)
    panel = window.desk.ramp.panel
    panel.choose_view("Measured")
    settle(window)
    view = panel.views["Measured"]
    assert isinstance(view, MeasuredView)
    name = "Atoms of the passenger at measured cloud 1"
    (atoms,) = [field for field in view.findChildren(QuantityField) if field.accessibleName() == name]
    assert atoms.placeholderText() == "as simulated"
    QTest.keyClicks(atoms, "9.0e4")
    QTest.keyClick(atoms, Qt.Key.Key_Return)
    settle(window)
    (cloud,) = window.document.plan.measured
    assert cloud.passenger_atoms is not None
    assert cloud.passenger_atoms.value == 9e4
    assert cloud.passenger_temperature is None
