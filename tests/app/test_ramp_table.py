"""Ramps as tables: what is written is read again, and every mistake is named with its line."""

from __future__ import annotations

import csv
import io
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.answers.ramp import ramp_answer
from app.answers.ramp_inputs import path_of, ramp_of
from app.plan import Plan, PlanError, parse_plan
from app.ramp_quantities import RAMP_COLUMNS, control_column
from app.ramp_table import CLOSE, CLOUD_COLUMNS, ramp_table, read_ramp_table, read_units, usual_step
from physics.ramps import Control, Knob
from physics.trap_path import DEPTH, SCALE

PLAN = """coldward = 1
[species]
key = "87Rb"
state = "F=1 mF=-1"
[trap]
frequencies = ["500 Hz", "500 Hz", "100 Hz"]
depth = "300 uK"
[cloud]
atoms = "2e6"
temperature = "30 uK"
[[ramp.stage]]
duration = "1 s"
control = "scale"
end = 0.4
shape = "exponential"
[[ramp.stage]]
duration = "1.5 s"
control = "depth"
end = "150 uK"
[[ramp.stage.move]]
control = "scale"
end = 0.1
shape = "power law"
exponent = 2
"""


@pytest.fixture(scope="module")
def plan() -> Plan:
    return parse_plan(PLAN, "a.toml")


def cells(text: str) -> list[list[str]]:
    return list(csv.reader(io.StringIO(text)))


def test_a_row_a_step_and_a_column_a_control(plan: Plan) -> None:
    header, *rows = cells(ramp_table(plan, 0.01))
    assert header == ["time [s]", "depth [µK]", "scale"]
    assert len(rows) == 251
    times = np.array([float(row[0]) for row in rows])
    np.testing.assert_allclose(times, np.linspace(0.0, 2.5, 251), atol=1e-12)
    values = ramp_of(plan).values(path_of(plan).standing, times)
    np.testing.assert_allclose([float(row[2]) for row in rows], values[SCALE], rtol=1e-9)
    np.testing.assert_allclose([float(row[1]) for row in rows], values[DEPTH] / 1.380649e-29, rtol=1e-9)


def test_the_last_row_is_the_end_whatever_the_step(plan: Plan) -> None:
    for step, count in ((0.7, 5), (2.5, 2), (0.1, 26)):
        rows = cells(ramp_table(plan, step))[1:]
        assert len(rows) == count
        assert float(rows[-1][0]) == pytest.approx(2.5)
        assert float(rows[-1][2]) == pytest.approx(0.1)


def test_units_are_chosen_by_column(plan: Plan) -> None:
    header, first, *_ = cells(ramp_table(plan, 0.1, {"depth": "mK", "time": "ms"}))
    assert header == ["time [ms]", "depth [mK]", "scale"]
    assert [float(cell) for cell in first] == [0.0, 0.3, 1.0]
    assert read_units("power A=mW,  time = ms") == {"power A": "mW", "time": "ms"}
    with pytest.raises(PlanError, match='units are written "power A=mW, time=ms", got "mW"'):
        read_units("mW")
    with pytest.raises(PlanError, match='a unit is given for "knife", and the columns are time, depth, scale'):
        ramp_table(plan, 0.1, {"knife": "MHz"})
    with pytest.raises(PlanError, match='unit of "depth": "W" is not a unit'):
        ramp_table(plan, 0.1, {"depth": "W"})


def test_steps_that_make_no_table(plan: Plan) -> None:
    with pytest.raises(PlanError, match=r"at most the duration of the ramp, 2.5 s, got 3 s"):
        ramp_table(plan, 3.0)
    with pytest.raises(PlanError, match="more than 200000 rows"):
        ramp_table(plan, 1e-6)


@given(st.floats(1e-4, 1e5))
def test_usual_steps_are_round_and_make_hundreds_of_rows(duration: float) -> None:
    step = usual_step(duration)
    assert 200 <= duration / step * (1.0 + 1e-9) <= 1001
    assert f"{step:e}"[0] in "125"


def test_columns_of_the_cloud_end_with_the_simulation(plan: Plan) -> None:
    plan = parse_plan(PLAN + "[target]\npeak_phase_space_density = 4e-4\n", "a.toml")
    answer = ramp_answer(plan)
    assert answer.reached
    header, *rows = cells(ramp_table(plan, 0.1, answer=answer))
    assert header[3:] == [
        "atoms", "temperature [µK]", "peak_phase_space_density", "reduced_temperature", "truncation",
        "elastic_collision_rate [1/s]", "trap depth [µK]",
    ]  # fmt: skip
    assert len(header) == 3 + len(CLOUD_COLUMNS)
    end = answer.run.final["time"]
    assert all((row[3] == "") == (float(row[0]) > end) for row in rows)
    assert float(rows[0][3]) == 2e6
    assert set(read_ramp_table(ramp_table(plan, 0.1, answer=answer)).values) == {DEPTH, SCALE}


def test_a_table_simulates_as_the_ramp_it_came_from(plan: Plan) -> None:
    table = read_ramp_table(ramp_table(plan, 0.005))
    stage = table.stage(label="as played")
    kept = [len(move.points) for move in stage.moves]
    assert max(kept) < 0.3 * len(table.times)
    assert len(table.stage(thin=False).moves[0].points) == len(table.times) == 501
    again = ramp_answer(replace(plan, ramp=(stage,))).run.final
    planned = ramp_answer(plan).run.final
    assert again["atoms"] == pytest.approx(planned["atoms"], rel=1e-3)
    assert again["temperature"] == pytest.approx(planned["temperature"], rel=1e-3)


@given(st.lists(st.floats(0.001, 1000.0), min_size=2, max_size=60))
def test_thinned_tables_stay_close(values: list[float]) -> None:
    text = "time [s],scale\n" + "".join(f"{0.1 * k:.10g},{value!r}\n" for k, value in enumerate(values))
    table = read_ramp_table(text)
    points = table.stage().moves[0].points
    between = np.interp([time.value for time in table.times], *np.array([(t.value, v.value) for t, v in points]).T)
    np.testing.assert_allclose(between, values, rtol=1.01 * CLOSE, atol=2e-10 * max(values))


def test_tables_as_spreadsheets_write_them() -> None:
    text = '\ufefftime [ms],"power cross 1 [mW]",truncation\r\n0,12.5,9\r\n\r\n"100",1.25e1,8\r\n'
    table = read_ramp_table(text)
    assert table.values[Control(Knob.POWER, "cross 1")][1].value == pytest.approx(0.0125)
    assert table.duration.value == pytest.approx(0.1)


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("", " is empty; its first line names the columns"),
        ("time [s]\n0\n1", "line 1: there is no column of a control"),
        ("scale,time [s]\n1,0\n", 'line 1: the first column must be "time \\[s\\]", got "scale"'),
        ("time [s],laser\n0,1\n", 'line 1: "laser" is no control; controls are depth, scale, power BEAM'),
        ("time [s],power [W]\n0,1\n", 'line 1: "power" is no control'),
        ("time [s],scale,scale\n0,1,1\n1,1,1", "line 1: a column stands there twice"),
        ("time [s],scale\n0,1\n0,2", "line 3: times must increase, got 0 s"),
        ("time [s],scale\n1,1\n2,2", "line 2: times must begin at 0, got 1 s"),
        ("time [s],scale\n0,1\n\n1,x", 'line 4, "scale": scale of the trap: "x" does not begin'),
        ("time [s],scale\n0,1\n1,", 'line 3, "scale": the cell is empty'),
        ("time [s],depth\n0,1\n1,2", 'line 1: "depth" needs a unit, such as "depth \\[µK\\]"'),
        ("time [s],depth [W]\n0,1", 'line 1, "depth": "W" is not a unit'),
        ("time [s],depth [uK\n0,1", "line 1: a bracket is not closed"),
        ("time [s],scale\n0,1\n1", "line 3: 1 cells under 2 columns"),
        ("time [s],power A [W]\n0,-1\n1,2", 'line 2, "power A \\[W\\]": beam power must be from 0 W'),
        ("time [s],scale\n0,1\n", "needs two rows or more"),
        ('time [s],scale\n"0,1\n1', "line 3: unexpected end of data"),
        ('time [s],scale\n0,"1,5"\n1,1', 'line 2, "scale"'),
    ],
)
def test_mistakes_are_named_with_their_line(text: str, sentence: str) -> None:
    with pytest.raises(PlanError, match=f"^r.csv.*{sentence}"):
        read_ramp_table(text, "r.csv")


@pytest.mark.parametrize("between", [";", "\t"])
def test_other_signs_between_columns(between: str) -> None:
    found = read_ramp_table(between.join(("time [s]", "depth [µK]")) + f"\n0{between}50.5\n1{between}20\n")
    assert [value.value for value in found.values[DEPTH]] == pytest.approx([50.5 * 1.380649e-29, 20.0 * 1.380649e-29])
    with pytest.raises(PlanError, match=r'^the table, line 2, "depth \[µK\]": .* the comma in "50,5" is not read'):
        read_ramp_table("time [s];depth [µK]\n0;50,5\n1;20\n")


def test_columns_have_labels_and_units_that_fit() -> None:
    from app.units import factor
    from physics.evaporation_rows import Rows

    for name, column in RAMP_COLUMNS.items():
        assert column.label
        assert name == "time" or name in Rows.__annotations__
        for unit in column.units:
            assert factor("" if unit == "1" else unit, "" if column.unit == "1" else column.unit) > 0.0
    assert control_column(Control(Knob.POWER, "A")).units[0] == "W"
    assert control_column(SCALE).unit == "1"
