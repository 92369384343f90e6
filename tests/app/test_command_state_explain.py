"""`coldward state --explain`: how a number is worked out, as text and as data."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from app.__main__ import main
from app.quantities import QUANTITIES

ROOT = Path(__file__).resolve().parents[2]
PLAN = str(ROOT / "presets" / "plans" / "crossed_trap_rubidium.toml")


def test_the_page_has_heading_inputs_and_steps(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["state", PLAN, "--explain", "critical_temperature"]) == 0
    captured = capsys.readouterr()
    assert captured.err == ""
    lines = captured.out.splitlines()
    assert lines[0] == "87Rb, F=1 mF=-1; model: semi-ideal"
    assert any(line.startswith("critical temperature (ideal), Tc = 138.4 nK") for line in lines)
    assert "       = 1.38355e-7 K" in lines
    assert not any("What this answer does not cover" in line for line in lines)


def test_several_names_are_explained_in_order(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["state", PLAN, "--explain", "fugacity", "--explain", "truncation"]) == 0
    out = capsys.readouterr().out
    assert out.index("fugacity, z = ") < out.index("truncation parameter, η = ")


def test_the_json_object_gains_the_explanations(capsys: pytest.CaptureFixture[str]) -> None:
    names = ["thermal_radii", "fermi_energy", "log_fugacity"]
    arguments = [part for name in names for part in ("--explain", name)]
    assert main(["state", PLAN, "--json", *arguments]) == 0
    answer: dict[str, Any] = json.loads(
        capsys.readouterr().out, parse_constant=lambda text: pytest.fail(f"{text} in JSON")
    )
    assert set(answer["quantities"]) == set(QUANTITIES)
    radii, energy, log_z = answer["explain"]
    assert [entry["name"] for entry in answer["explain"]] == names
    assert radii["value"] == answer["quantities"]["thermal_radii"]["value"]
    assert energy["value"] is None
    assert energy["reason"] == "needs fermions; 87Rb is a boson"
    assert {"symbol", "meaning", "text", "value", "unit", "origin", "source", "certainty"} == set(log_z["inputs"][0])
    assert log_z["steps"][-1]["value"] == answer["quantities"]["log_fugacity"]["value"]


def test_without_the_flag_the_object_is_as_before(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["state", PLAN, "--json"]) == 0
    assert "explain" not in json.loads(capsys.readouterr().out)


@pytest.mark.parametrize("output", [[], ["--json"]])
def test_an_unknown_name_is_one_sentence_with_the_nearest_and_status_1(
    output: list[str], capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["state", PLAN, *output, "--explain", "fugacity", "--explain", "fermi_temprature"]) == 1
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.startswith(
        'coldward: no quantity is named "fermi_temprature"; the nearest are fermi_temperature'
    )
    assert captured.err.count("\n") == 1


def test_an_explanation_loads_no_window_toolkit_and_no_plotting() -> None:
    code = (
        "import sys; from app.__main__ import main; "
        f"status = main(['state', {PLAN!r}, '--explain', 'mean_density']); loaded = set(sys.modules); "
        "heavy = ('PySide6', 'matplotlib', 'scipy.optimize', 'scipy.integrate', 'pint'); "
        "print(status, [name for name in heavy if name in loaded], file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stderr.strip().splitlines()[-1] == "0 []"
