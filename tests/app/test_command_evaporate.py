"""`coldward evaporate`, as a script calls it."""

from __future__ import annotations

import csv
import json
import os
import re
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from app.__main__ import main
from app.plan import read_plan

ROOT = Path(__file__).resolve().parents[2]
PRESET = ROOT / "presets" / "plans" / "evaporation_rubidium.toml"
KEYS = ["columns", "units", "controls", "final", "reason"]
CONTRACT = [
    "time", "atoms", "temperature", "peak_phase_space_density", "reduced_temperature", "truncation",
    "elastic_collision_rate", "depth",
]  # fmt: skip
REASONS = ("target reached", "ramp ended", "atoms lost", "not trapped")
TIGHT = """coldward = 1
[species]
key = "87Rb"
state = "F=1 mF=-1"
[trap]
frequencies = ["1500 Hz", "1500 Hz", "1500 Hz"]
depth = "500 uK"
[cloud]
atoms = "2.0(2)e6"
temperature = "50(2) uK"
[losses]
background_lifetime = "20 s"
three_body = "4.3e-29 cm^6/s"
"""
STAGES = """[[ramp.stage]]
label = "fast"
duration = "60 ms"
control = "scale"
end = 0.3
shape = "exponential"
[[ramp.stage]]
duration = "650 ms"
control = "scale"
end = 0.005
shape = "exponential"
[[measured]]
label = "Thursday"
stage = 1
atoms = "1.5(1)e6"
temperature = "15.0(5) uK"
"""
TARGET = "[target]\npeak_phase_space_density = 2.612\nefficiency = 3\n"


@pytest.fixture
def plan(tmp_path: Path) -> str:
    path = tmp_path / "plan.toml"
    path.write_text(TIGHT + TARGET + STAGES, encoding="utf-8")
    return str(path)


@pytest.fixture
def bare(tmp_path: Path) -> str:
    """Without a ramp."""
    path = tmp_path / "bare.toml"
    path.write_text(TIGHT + TARGET, encoding="utf-8")
    return str(path)


@pytest.fixture
def _quick_designs(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("physics.ramp_design._SCAN", 5)
    monkeypatch.setattr("physics.ramp_design._REFINE", 4)
    monkeypatch.setattr("physics.ramp_design._DRIFTS", ())


def evaporate_json(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict[str, Any]:
    assert main(["evaporate", *arguments, "--json"]) == 0
    captured = capsys.readouterr()
    assert captured.err == ""
    answer: dict[str, Any] = json.loads(captured.out, parse_constant=lambda text: pytest.fail(f"{text} in JSON"))
    assert list(answer)[:3] == ["coldward", "version", "input"]
    assert list(answer)[3:8] == KEYS
    assert list(answer["columns"])[: len(CONTRACT)] == CONTRACT
    rows = {len(column) for column in answer["columns"].values()}
    assert len(rows) == 1
    assert answer["reason"] in REASONS
    assert answer["final"] == {name: column[-1] for name, column in answer["columns"].items()}
    return answer


def evaporate_text(capsys: pytest.CaptureFixture[str], *arguments: str) -> str:
    assert main(["evaporate", *arguments]) == 0
    captured = capsys.readouterr()
    assert captured.err == ""
    return captured.out


def trouble(capsys: pytest.CaptureFixture[str], *arguments: str) -> str:
    assert main(["evaporate", *arguments]) == 1
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.startswith("coldward: ")
    assert captured.err.count("\n") == 1
    return captured.err


# --- JSON ---


def test_the_budget_adds_up(plan: str, capsys: pytest.CaptureFixture[str]) -> None:
    answer = evaporate_json(capsys, plan)
    for part in (answer, *answer["stages"]):
        lost = part["atoms_before"] - part["atoms_after"]
        assert sum(part["budget"].values()) == pytest.approx(lost, abs=1e-6 * part["atoms_before"])
        gained = part["energy_after"] - part["energy_before"]
        assert sum(part["energy_budget"].values()) == pytest.approx(gained, abs=1e-6 * part["energy_before"])
    assert answer["atoms_before"] == 2e6
    assert answer["atoms_after"] == pytest.approx(answer["final"]["atoms"], rel=1e-9)
    for process in ("evaporated", "spilled", "background", "two-body", "three-body"):
        totals = sum(stage["budget"][process] for stage in answer["stages"])
        assert answer["budget"][process] == pytest.approx(totals)


def test_columns_and_controls(plan: str, capsys: pytest.CaptureFixture[str]) -> None:
    answer = evaporate_json(capsys, plan)
    columns = answer["columns"]
    assert answer["reason"] == "target reached"
    assert answer["final"]["peak_phase_space_density"] == pytest.approx(2.612, abs=1e-3)
    assert {"scale", "depth setting"} <= columns.keys()
    assert answer["controls"][1] == {"name": "scale", "control": "scale", "beam": None}
    depth = np.array(columns["depth setting"]) * np.array(columns["scale"])
    np.testing.assert_allclose(columns["depth"], depth, rtol=1e-5)
    kelvin = np.array(columns["depth"]) / 1.380649e-23
    np.testing.assert_allclose(columns["truncation"], kelvin / np.array(columns["temperature"]), rtol=1e-9)
    assert answer["stages"][0]["label"] == "fast"
    assert columns["time"][answer["stages"][0]["last_row"]] == pytest.approx(0.06)
    assert {"estimates"} <= {caveat["id"] for caveat in answer["caveats"]}


def test_a_moved_depth_is_the_column_of_the_depth(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    path = tmp_path / "depth.toml"
    path.write_text(TIGHT + STAGES.replace('"scale"', '"depth"').replace("0.3", '"150 uK"').replace("0.005", '"9 uK"'))
    columns = evaporate_json(capsys, str(path))["columns"]
    assert "depth setting" not in columns
    assert columns["depth"][-1] == pytest.approx(9e-6 * 1.380649e-23, rel=1e-5)


def test_a_cloud_too_hot_for_the_trap_is_an_answer(plan: str, capsys: pytest.CaptureFixture[str]) -> None:
    arguments = (plan, "--temperature", "5 K")
    assert main(["evaporate", *arguments, "--json"]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["reason"] == "not trapped"
    assert answer["final"]["atoms"] is None
    assert "Not trapped from the start: the cloud is too hot for the trap." in evaporate_text(capsys, *arguments)


def test_every_answer_is_in_the_text_of_help(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as done:
        main(["evaporate", "--help"])
    assert done.value.code == 0
    shown = capsys.readouterr().out
    for flag in ("--design", "--from", "--waypoints", "--sensitivity", "--ramp", "--step", "--units", "--with-cloud"):
        assert flag in shown


# --- text ---


def test_the_summary_says_what_happens(plan: str, capsys: pytest.CaptureFixture[str]) -> None:
    text = evaporate_text(capsys, plan)
    assert text.startswith("87Rb, F=1 mF=-1; kinetics of a cut thermal cloud\n")
    assert "1 fast  60.0 ms" in text
    assert "\nReaches condensation after " in text
    assert "three-body loss took " in text
    assert "What limits: three-body loss" in text
    assert "What this answer does not cover" in text
    no_target = evaporate_text(capsys, plan, "--target-reduced-temperature", "0.01")
    assert "short of T/Tc = 0.0100" in no_target


def test_flags_override_the_plan(plan: str, capsys: pytest.CaptureFixture[str]) -> None:
    fewer = evaporate_json(capsys, plan, "--atoms", "1e6")
    assert fewer["columns"]["atoms"][0] == pytest.approx(1e6)
    assert fewer["input"]["cloud.atoms"] == "1e6"


def test_waypoints_departures_and_sensitivities(plan: str, capsys: pytest.CaptureFixture[str]) -> None:
    asked = (plan, "--waypoints", "0.05, 0.5, 99", "--expansion", "20 ms", "--sensitivity")
    answer = evaporate_json(capsys, *asked)
    assert [point["peak_phase_space_density"] for point in answer["waypoints"]["points"]] == [0.05, 0.5]
    assert answer["waypoints"]["missed"] == [99.0]
    assert answer["waypoints"]["expansion_time"] == pytest.approx(0.02)
    assert [len(one["runs"]) for one in answer["departures"]] == [5, 5]
    assert answer["departures"][0]["from"] == "Thursday"
    assert answer["sensitivities"][0]["input"] == "atoms"
    text = evaporate_text(capsys, *asked)
    assert "rms widths after 20.0 ms" in text
    assert "Not reached: D = 99.0" in text
    assert 'off at a waypoint by its measured error (that of "Thursday")' in text
    assert "Atoms at the end, with each input 10 % less or more" in text
    assert "calibration of scale" in text


def test_waypoints_from_an_efficiency_alone(bare: str, capsys: pytest.CaptureFixture[str]) -> None:
    text = evaporate_text(capsys, bare, "--waypoints")
    assert text.startswith("Clouds to aim at, with an assumed efficiency of 3")
    assert main(["evaporate", bare, "--waypoints", "0.1", "--json"]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["reason"] is None
    assert answer["waypoints"]["points"][0]["time"] is None


@pytest.mark.usefixtures("_quick_designs")
def test_a_design_is_written_and_simulates_to_the_same(
    bare: str, capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    designed = tmp_path / "designed.toml"
    answer = evaporate_json(capsys, bare, "--design", "-o", str(designed))
    assert answer["design"]["reached"]
    assert answer["design"]["target"] == {"peak_phase_space_density": 2.612}
    assert len(answer["design"]["ramp"]) == len(read_plan(designed).ramp) == 6
    trade = answer["design"]["trade_off"]
    assert len(trade["truncation"]) == len(trade["atoms"]) == len(trade["time"]) == len(trade["reached"])
    assert [bound["bound"] for bound in answer["design"]["bounds"]]
    again = evaporate_json(capsys, str(designed))
    assert again["final"]["atoms"] == pytest.approx(answer["final"]["atoms"], rel=0.01)
    text = evaporate_text(capsys, bare, "--design", "--control", "depth")
    assert "Most atoms reach condensation where depth moves so that the truncation parameter stays at " in text
    assert "What limits\n  " in text
    assert "Most atoms at the target, by the time that it may take" in text


def test_from_a_measured_cloud(plan: str, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    answer = evaporate_json(capsys, plan, "--from", "thursday")
    assert answer["from"] == "Thursday"
    assert answer["begin"] == pytest.approx(0.06)
    assert answer["stages"][0]["number"] == 2
    assert answer["columns"]["atoms"][0] == pytest.approx(1.5e6)
    given = evaporate_json(capsys, plan, "--from", "after stage 1", "--atoms", "1.5e6", "--temperature", "15 uK")
    assert given["final"]["atoms"] == pytest.approx(answer["final"]["atoms"])
    table = tmp_path / "rest.csv"
    assert "after another " in evaporate_text(capsys, plan, "--from", "Thursday", "-o", str(table))
    rows = table.read_text(encoding="utf-8").splitlines()
    assert rows[1].startswith("0,500,0.3")
    assert rows[-1].startswith("0.65,500,0.005")


def test_csv_there_and_back(plan: str, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    table = tmp_path / "ramp.csv"
    first = evaporate_json(capsys, plan, "-o", str(table), "--step", "2 ms", "--units", "time=ms", "--with-cloud")
    lines = table.read_text(encoding="utf-8").splitlines()
    assert lines[0].startswith("time [ms],depth [µK],scale,atoms,temperature [µK],")
    assert len(lines) == 1 + 356
    again = evaporate_json(capsys, plan, "--ramp", str(table))
    assert again["final"]["atoms"] == pytest.approx(first["final"]["atoms"], rel=1e-3)
    assert again["input"]["ramp"] == str(table)


def test_another_ramp_beside_it(plan: str, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    other = tmp_path / "other.toml"
    other.write_text(Path(plan).read_text(encoding="utf-8").replace('atoms = "2.0(2)e6"', 'atoms = "1e6"', 1), "utf-8")
    alone, both = evaporate_json(capsys, str(other)), evaporate_json(capsys, plan, "--reference", str(other))
    assert both["reference"]["file"] == str(other)
    assert both["reference"]["final"] == alone["final"]
    assert both["reference"]["budget"] == alone["budget"]
    assert both["atoms_before"] == 2e6
    assert both["reference"]["atoms_before"] == 1e6
    text = evaporate_text(capsys, plan, "--reference", str(other))
    assert f"Beside the ramp of {other}: " in text
    assert re.search(r"\n +this ramp +reference\n", text)
    assert "there is no such file" in trouble(capsys, plan, "--reference", str(tmp_path / "gone.toml"))


PASSENGER = """
[passenger]
scattering_length = "163 a0"
[passenger.species]
key = "41K"
state = "F=2 mF=+2"
[passenger.cloud]
atoms = "1e5"
temperature = "20 uK"
"""


def test_a_passenger_in_the_table_and_from_a_measured_cloud(
    plan: str, capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    with_one, table = tmp_path / "two.toml", tmp_path / "two.csv"
    with_one.write_text(Path(plan).read_text(encoding="utf-8") + PASSENGER, encoding="utf-8")
    answer = evaporate_json(capsys, str(with_one), "-o", str(table), "--with-cloud", "--step", "10 ms")
    header, *rows = csv.reader(table.read_text(encoding="utf-8").splitlines())
    assert "passenger relaxation_time [s]" in header
    own = answer["passenger"]["columns"]
    assert float(rows[0][header.index("passenger atoms")]) == pytest.approx(own["atoms"][0])
    place = header.index("passenger temperature [µK]")
    middle = np.interp(0.2, own["time"], own["temperature"])
    assert float(rows[20][place]) == pytest.approx(1e6 * middle, rel=1e-3)
    # The columns of clouds do not count where it is read.
    again = evaporate_json(capsys, str(with_one), "--ramp", str(table))
    assert again["final"]["atoms"] == pytest.approx(answer["final"]["atoms"], rel=1e-3)
    # What is not measured of the passenger is as simulated, and said.
    rest = evaporate_json(capsys, str(with_one), "--from", "Thursday")["passenger"]
    begin = evaporate_json(capsys, str(with_one), "--from", "Thursday")["begin"]
    expected = np.exp(np.interp(begin, own["time"], np.log(own["atoms"])))
    assert rest["columns"]["atoms"][0] == pytest.approx(expected, rel=1e-4)
    assert "passenger_as_simulated" in {caveat["id"] for caveat in rest["caveats"]}
    assert "as the ramp up to the measured cloud is simulated" in evaporate_text(
        capsys, str(with_one), "--from", "Thursday"
    )
    written = with_one.read_text(encoding="utf-8")
    at = written.index('label = "Thursday"')
    measured = 'passenger_atoms = "8e4"\npassenger_temperature = "7 uK"\n'
    with_one.write_text(written[:at] + measured + written[at:], encoding="utf-8")
    rest = evaporate_json(capsys, str(with_one), "--from", "Thursday")["passenger"]
    assert rest["columns"]["atoms"][0] == pytest.approx(8e4, rel=1e-9)
    assert rest["columns"]["temperature"][0] == pytest.approx(7e-6, rel=1e-6)
    assert "passenger_as_simulated" not in {caveat["id"] for caveat in rest["caveats"]}


def test_what_is_changed_is_held_against_runs_of_its_kind(
    plan: str, capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    # Sensitivities and departures have the passenger in them where the ramp has it.
    with_one = tmp_path / "two.toml"
    short = Path(plan).read_text(encoding="utf-8").replace('"650 ms"', '"60 ms"').replace("end = 0.005", "end = 0.1")
    with_one.write_text(short + PASSENGER, encoding="utf-8")
    asked = (str(with_one), "--sensitivity", "--waypoints", "0.03")
    both = evaporate_json(capsys, *asked)
    assert both["sensitivities_planned"] == pytest.approx(both["final"]["atoms"], rel=1e-9)
    end = both["passenger"]["final"]["reduced_temperature"]
    assert both["sensitivities_planned_passenger"] == pytest.approx(end, rel=1e-9)
    text = evaporate_text(capsys, *asked)
    assert "first species alone" not in text
    assert "Most for the passenger: " in text
    assert "41K, the passenger, at the same times" in text
    own = both["passenger"]["columns"]
    assert both["waypoints"]["points"]
    for point in both["waypoints"]["points"]:
        T = np.exp(np.interp(point["time"], own["time"], np.log(own["temperature"])))
        assert point["passenger"]["temperature"] == pytest.approx(T, rel=1e-6)
    planned = both["departures"][0]["runs"][0]
    assert planned["passenger_reduced_temperature"] == pytest.approx(end, rel=3e-3)
    # One input by hand: a tenth more passengers.
    head, _, own_text = with_one.read_text(encoding="utf-8").rpartition("[passenger.cloud]")
    with_one.write_text(f"{head}[passenger.cloud]{own_text.replace('1e5', '1.1e5')}", encoding="utf-8")
    changed = evaporate_json(capsys, str(with_one))
    row = next(one for one in both["sensitivities"] if one["input"] == "atoms of the passenger")
    assert row["atoms_more"] == pytest.approx(changed["final"]["atoms"], rel=1e-6)
    assert row["passenger_more"] == pytest.approx(changed["passenger"]["final"]["reduced_temperature"], rel=1e-6)


# --- what cannot be answered ---


def test_errors_are_one_sentence(plan: str, bare: str, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    assert "the plan has no ramp: give it stages" in trouble(capsys, bare)
    assert "cannot be designed: controls with a known start" in trouble(capsys, bare, "--design", "--control", "knife")
    assert '"laser" is no control' in trouble(capsys, bare, "--design", "--control", "laser")
    assert "must end in .csv or .toml" in trouble(capsys, plan, "-o", str(tmp_path / "ramp.png"))
    assert "there is no ramp to write" in trouble(capsys, bare, "--waypoints", "-o", str(tmp_path / "ramp.csv"))
    missing = trouble(capsys, plan, "--from", "after stage 2")
    assert 'no measured cloud is called "after stage 2"; the plan has "Thursday"; or give' in missing
    assert "the ramp has stages 1 to 2, got 9" in trouble(
        capsys, plan, "--from", "after stage 9", "--atoms", "1e5", "--temperature", "1 uK"
    )
    assert "is not a unit" in trouble(capsys, plan, "--waypoints", "--expansion", "2 um")
    broken = tmp_path / "broken.csv"
    broken.write_text("time [s],scale\n0,1\n1,one\n", encoding="utf-8")
    assert "broken.csv, line 3" in trouble(capsys, plan, "--ramp", str(broken))
    broken.write_bytes(b"\xff\xfe\x00")
    assert "is not a text in UTF-8" in trouble(capsys, plan, "--ramp", str(broken))
    gone = tmp_path / "gone.csv"
    assert trouble(capsys, plan, "--ramp", str(gone)) == f"coldward: {gone}: No such file or directory\n"
    with pytest.raises(SystemExit) as done:
        main(["evaporate", plan, "--sidewise"])
    assert done.value.code == 2


@pytest.mark.skipif(os.name == "nt", reason="signals of a terminal")
def test_an_interrupt_ends_quietly() -> None:
    script = (
        "import signal, sys, app.commands.evaporate, app.answers.waypoints, physics.ramp_design\n"
        "signal.signal(signal.SIGINT, signal.default_int_handler)\n"  # who starts tests in the background ignores it
        "from app.__main__ import main\n"
        "print('ready', flush=True)\n"
        "raise SystemExit(main(sys.argv[1:]))\n"
    )
    beams = PRESET.with_name("evaporation_crossed_beams.toml")
    running = subprocess.Popen(
        [sys.executable, "-c", script, "evaporate", str(beams), "--design"],
        cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
    )  # fmt: skip
    assert running.stdout is not None
    assert running.stdout.readline() == "ready\n"
    time.sleep(0.4)  # a design with its surveys takes ten seconds and more
    running.send_signal(signal.SIGINT)
    try:
        out, err = running.communicate(timeout=60)
    finally:
        running.kill()
    assert (running.returncode, out, err) == (130, "", "")


def test_the_preset_reaches_its_condensate(capsys: pytest.CaptureFixture[str]) -> None:
    answer = evaporate_json(capsys, str(PRESET))
    assert answer["reason"] == "target reached"
    assert answer["final"]["condensate_atoms"] == pytest.approx(1e5, rel=1e-3)
