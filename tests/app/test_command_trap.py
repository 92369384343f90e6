"""`coldward trap`, as a script calls it."""

from __future__ import annotations

import json
import math
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from app.__main__ import main
from physics.constants import boltzmann

ROOT = Path(__file__).resolve().parents[2]
PLANS = sorted(path for folder in ("plans", "traps") for path in (ROOT / "presets" / folder).glob("*.toml"))
MADE = ROOT / "tests" / "data" / "plan_of_beams_and_coils.toml"
KEYS = [
    "coldward", "version", "input", "trapped", "reason", "frequencies", "axes", "minimum", "sag", "depth",
    "depth_temperature", "arm_depth", "scattering_rate", "heating_rate", "volume_curve", "escape", "way_out", "reasons",
    "notes", "caveats",
]  # fmt: skip
NUMBERS = KEYS[5:16]
QUADRUPOLE = """coldward = 1
[species]
key = "87Rb"
state = "F=1 mF=-1"
[trap.coils]
gradient = "150 G/cm"
[cloud]
atoms = "1e5"
temperature = "20 uK"
"""


def trap_json(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict[str, Any]:
    assert main(["trap", *arguments, "--json"]) == 0
    captured = capsys.readouterr()
    assert captured.err == ""
    answer: dict[str, Any] = json.loads(captured.out, parse_constant=lambda text: pytest.fail(f"{text} in JSON"))
    assert list(answer) == KEYS
    assert answer["coldward"] == 1
    assert set(answer["reasons"]) == {name for name in NUMBERS if answer[name] is None}
    return answer


def changed(tmp_path: Path, old: str, new: str) -> str:
    text = MADE.read_text(encoding="utf-8")
    assert old in text
    path = tmp_path / "changed.toml"
    path.write_text(text.replace(old, new), encoding="utf-8")
    return str(path)


@pytest.mark.parametrize("plan", [*PLANS, MADE], ids=lambda path: path.stem)
def test_every_preset_plan_keeps_the_contract(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    answer = trap_json(capsys, str(plan))
    assert answer["trapped"] is True
    assert answer["reason"] is None
    if answer["frequencies"] is not None:
        assert all(frequency > 0.0 for frequency in answer["frequencies"])
        np.testing.assert_allclose(np.array(answer["axes"]) @ np.transpose(answer["axes"]), np.eye(3), atol=1e-9)
    if answer["depth"] is not None:
        assert answer["depth_temperature"] == pytest.approx(answer["depth"] / boltzmann, rel=1e-12)
        energy, volume = (np.array(answer["volume_curve"][name]) for name in ("energy", "volume"))
        assert energy[-1] <= answer["depth"] * (1.0 + 1e-12)
        assert np.all(np.diff(energy) > 0.0)
        assert np.all(np.diff(volume) >= 0.0)


def test_frequencies_on_the_command_line_are_the_trap(capsys: pytest.CaptureFixture[str]) -> None:
    flags = ["--frequencies", "120 Hz, 90 Hz, 20 Hz", "--atoms", "1e5", "--temperature", "1 uK", "--depth", "5 uK"]
    answer = trap_json(capsys, "--species", "87Rb", *flags)
    assert answer["frequencies"] == [120.0, 90.0, 20.0]
    assert answer["depth_temperature"] == pytest.approx(5e-6, rel=1e-12)
    # W(U) = (4 pi/3) (2U/m)^(3/2)/(w1 w2 w3), the ellipsoid of a harmonic potential
    mass = 86.909180531 * 1.66053906892e-27
    omegas = math.prod(2.0 * math.pi * f for f in answer["frequencies"])
    expected = 4.0 * math.pi / 3.0 * (2.0 * answer["depth"] / mass) ** 1.5 / omegas
    assert answer["volume_curve"]["volume"][-1] == pytest.approx(expected, rel=1e-8)
    assert answer["reasons"]["sag"] == "the trap is given by its frequencies"


def test_a_trap_that_holds_nothing_is_an_answer(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plan = changed(tmp_path, '"2.5(1) W"', '"2.5 mW"')
    plan_text = Path(plan).read_text(encoding="utf-8").replace('levitation = "30.5 G/cm"', 'levitation = "1 G/cm"')
    Path(plan).write_text(plan_text, encoding="utf-8")
    answer = trap_json(capsys, plan)
    assert answer["trapped"] is False
    assert answer["reason"].startswith("gravity pulls the atoms out")
    assert {answer[name] for name in NUMBERS} == {None}
    assert main(["trap", plan]) == 0
    assert "Not trapped: gravity pulls the atoms out" in capsys.readouterr().out


def test_a_quadrupole_has_a_depth_and_no_frequencies(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "quadrupole.toml"
    path.write_text(QUADRUPOLE, encoding="utf-8")
    answer = trap_json(capsys, str(path))
    assert answer["frequencies"] is None
    assert "cusp" in answer["reasons"]["frequencies"]
    assert answer["depth"] > 0.0
    assert {"field_zero", "wall"} <= {note["id"] for note in answer["notes"]}
    assert main(["trap", str(path)]) == 0
    assert "– (the field vanishes at the minimum" in capsys.readouterr().out


def test_the_readable_page_has_the_numbers_and_the_cautions(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["trap", str(MADE)]) == 0
    page = capsys.readouterr().out
    assert page.startswith("133Cs, F=3 mF=+3; trap of beams A and cross and coils\n")
    for name in ("frequencies", "depth", "atoms leave", "minimum at", "sag", "photons scattered"):
        assert f"\n{name}  " in page
    assert "IEC 60825-1" in page
    assert "0.5 mT" in page
    assert "nan" not in page
    assert main(["trap", str(PLANS[0])]) == 0
    assert "IEC" not in capsys.readouterr().out


def test_cautions_are_caveats_of_the_object(capsys: pytest.CaptureFixture[str]) -> None:
    caveats = trap_json(capsys, str(MADE))["caveats"]
    assert [caveat["id"] for caveat in caveats] == ["laser_light", "coils", "estimates"]
    assert all(caveat["severity"] == "note" and caveat["value"] is None for caveat in caveats)
    assert "IEC 60825-1" in caveats[0]["text"]
    assert trap_json(capsys, str(ROOT / "presets" / "plans" / "degenerate_lithium.toml"))["caveats"] == []


def test_a_plan_that_cannot_be_read_is_one_sentence(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["trap", str(tmp_path / "none.toml")]) == 1
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.startswith("coldward: ")
    assert captured.err.count("\n") == 1


def test_the_verb_needs_no_window_toolkit_and_no_plotting() -> None:
    code = (
        f"import sys; from app.__main__ import main; assert main(['trap', {str(MADE)!r}, '--json']) == 0; "
        "sys.exit(any(name.split('.')[0] in ('PySide6', 'matplotlib') for name in sys.modules))"
    )
    assert subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, check=False).returncode == 0


CROSSED = str(ROOT / "presets" / "traps" / "crossed_beams_rubidium.toml")
ONE_BEAM = str(ROOT / "presets" / "traps" / "single_beam_lithium.toml")
LEVITATED = str(ROOT / "presets" / "traps" / "levitated_caesium.toml")
COILS = str(ROOT / "presets" / "traps" / "quadrupole_rubidium.toml")


def solved_json(capsys: pytest.CaptureFixture[str], plan: str, *arguments: str) -> dict[str, Any]:
    assert main(["trap", plan, *arguments, "--json"]) == 0
    answer: dict[str, Any] = json.loads(capsys.readouterr().out)
    assert list(answer) == [*KEYS, "solution"]
    assert answer["input"]["vary"] == answer["solution"]["vary"]
    return answer


@pytest.mark.parametrize(
    ("wish", "read", "wanted"),
    [
        ("depth=10 uK", lambda answer: answer["depth_temperature"], 10e-6),
        ("mean_frequency=150 Hz", lambda answer: math.prod(answer["frequencies"]) ** (1.0 / 3.0), 150.0),
        ("frequency_z=0.2 kHz", lambda answer: answer["frequencies"][2], 200.0),
    ],
)
def test_a_power_is_found_for_what_is_wanted_of_the_trap(
    wish: str, read: Any, wanted: float, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    answer = solved_json(capsys, CROSSED, "--vary", "power", "--beam", "long", "--until", wish)
    assert read(answer) == pytest.approx(wanted, rel=1e-4)
    solution = answer["solution"]
    assert (solution["beam"], solution["unit"], solution["before"]) == ("long", "W", 0.52)
    # the trap of the printed power, surveyed afresh, is the printed trap
    text = Path(CROSSED).read_text(encoding="utf-8").replace('"520(5) mW"', f'"{solution["value"]!r} W"')
    path = tmp_path / "solved.toml"
    path.write_text(text, encoding="utf-8")
    assert read(trap_json(capsys, str(path))) == pytest.approx(wanted, rel=1e-4)


def test_all_powers_a_waist_and_a_gradient_can_be_varied(capsys: pytest.CaptureFixture[str]) -> None:
    doubled = solved_json(capsys, CROSSED, "--vary", "waist", "--beam", "across", "--until", "frequency_x=93 Hz")
    assert doubled["frequencies"][0] == pytest.approx(93.0, rel=1e-4)
    assert doubled["solution"]["unit"] == "m"
    assert solved_json(capsys, CROSSED, "--vary", "powers", "--until", "depth=20 uK")["solution"]["unit"] == "1"
    # a quadrupole holds once its pull along gravity beats the weight: mu B' = m g, mu = muB/2 of this state
    least = solved_json(capsys, COILS, "--vary", "gradient", "--until", "holds")["solution"]["value"]
    weight = 86.909180531 * 1.66053906892e-27 * 9.80665
    assert least == pytest.approx(weight / (0.5 * 9.2740100657e-24), rel=2e-3)  # gF is that near 1/2


def test_the_lowest_power_that_holds_is_printed_with_the_one_that_stood_there(
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main(["trap", ONE_BEAM, "--vary", "power", "--until", "holds"]) == 0
    page = capsys.readouterr().out
    assert page.startswith("Power of beam A: 4.9")
    assert "mW (it was 9.0000 W)" in page.splitlines()[0]
    assert "6Li" in page
    assert "Not trapped" not in page


def test_the_levitation_that_carries_the_atoms(capsys: pytest.CaptureFixture[str]) -> None:
    answer = solved_json(capsys, LEVITATED, "--vary", "levitation", "--until", "levitates")
    # m g/mu of the stretched state, mu = 0.75 muB: 31.1 G/cm
    assert answer["solution"]["value"] == pytest.approx(0.311, rel=2e-3)
    assert answer["sag"] == pytest.approx(0.0, abs=1e-9)


def test_quotes_and_capitals_around_a_wish_are_let_pass(capsys: pytest.CaptureFixture[str]) -> None:
    plain = solved_json(capsys, CROSSED, "--vary", "powers", "--until", "mean_frequency=150 Hz")
    for wish in ('Mean-Frequency="150 Hz"', "mean_frequency = '150Hz'"):
        found = solved_json(capsys, CROSSED, "--vary", "powers", "--until", wish)
        assert found["solution"]["value"] == plain["solution"]["value"]


def test_another_value_that_does_it_is_told(capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ("--vary", "levitation", "--until", "depth=1 uK")
    solution = solved_json(capsys, LEVITATED, *arguments)["solution"]
    # above and below the gradient that carries the atoms, 31.08 G/cm
    assert solution["also"] < 0.3108 < solution["value"]
    assert main(["trap", LEVITATED, *arguments]) == 0
    assert capsys.readouterr().out.splitlines()[1] == "30.696 G/cm does it too; the nearer one is taken."


@pytest.mark.parametrize(
    ("plan", "arguments", "sentence"),
    [
        (
            CROSSED,
            ("power", "--until", "holds"),
            "needs --beam with the name of a beam; the trap's beams: long, across",
        ),
        (CROSSED, ("power", "--beam", "B", "--until", "holds"), 'the trap has no beam "B"; its beams: long, across'),
        (CROSSED, ("gradient", "--until", "holds"), "the coils of the trap have no gradient to vary"),
        (CROSSED, ("power", "--beam", "long", "--until", "depth=10 kg"), '"kg" is not a unit of trap depth'),
        (
            COILS,
            ("gradient", "--until", "mean_frequency=5 Hz"),
            "no gradient of the coils from 0.156 G/cm to 1.64e5 G/cm gives the wanted value; the trap has no "
            "frequencies there",
        ),
        (
            LEVITATED,
            ("levitation", "--until", "depth=2 uK"),
            "gives the wanted value; the closest is 1.41 µK, with 31.1 G/cm",
        ),
        (COILS, ("powers", "--until", "holds"), "the trap has no beams whose powers could be varied"),
        (COILS, ("gradient", "--until", "levitates"), "only the levitation can be varied until it levitates"),
        (str(PLANS[0]), ("power", "--until", "holds"), "given by its frequencies has no beams or coils to vary"),
    ],
)
def test_a_wish_that_cannot_be_met_is_one_sentence(
    plan: str, arguments: tuple[str, ...], sentence: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["trap", plan, "--vary", *arguments]) == 1
    captured = capsys.readouterr()
    assert captured.out == ""
    assert sentence in captured.err
    assert captured.err.count("\n") == 1


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        (("--vary", "power"), "--vary goes with --until, which is missing"),
        (("--until", "holds"), "--until goes with --vary, which is missing"),
        (("--vary", "colour", "--until", "holds"), "invalid choice: 'colour'"),
        (("--vary", "power", "--until", "deep"), '"deep" is no wish; use one of depth=…, mean_frequency=…'),
        (("--vary", "power", "--until", "depth"), 'depth needs a value, such as depth="10 uK"'),
        (("--vary", "power", "--until", "holds=3"), "holds takes no value"),
    ],
)
def test_flags_that_cannot_be_read_are_a_status_of_their_own(
    arguments: tuple[str, ...], sentence: str, capsys: pytest.CaptureFixture[str]
) -> None:
    try:
        status = main(["trap", CROSSED, *arguments])
    except SystemExit as stop:  # argparse
        status = int(stop.code or 0)
    assert status == 2
    assert sentence in capsys.readouterr().err
