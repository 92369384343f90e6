"""The verbs, as a script calls them."""

from __future__ import annotations

import csv
import io
import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from app.__main__ import main
from app.caveat_words import caveat_text
from app.engine import cloud_answer
from app.plan import plan_with, read_plan
from app.quantities import QUANTITIES

ROOT = Path(__file__).resolve().parents[2]
PLANS = sorted((ROOT / "presets" / "plans").glob("*.toml"))
FLAGS = ["--species", "87Rb", "--frequencies", "120 Hz, 120 Hz, 20 Hz", "--atoms", "1e5", "--temperature", "200 nK"]


def state_json(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict[str, Any]:
    assert main(["state", *arguments, "--json"]) == 0
    captured = capsys.readouterr()
    assert captured.err == ""
    answer: dict[str, Any] = json.loads(captured.out, parse_constant=lambda text: pytest.fail(f"{text} in JSON"))
    return answer


# --- state ---


@pytest.mark.parametrize("plan", PLANS, ids=lambda path: path.stem)
def test_state_prints_the_contract_for_every_preset_plan(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    answer = state_json(capsys, str(plan))
    assert list(answer)[:3] == ["coldward", "version", "input"]
    assert answer["coldward"] == 1
    assert set(answer["quantities"]) == set(QUANTITIES)
    for name, entry in answer["quantities"].items():
        assert {"value", "unit", "low", "high", "label", "source"} <= set(entry)
        assert entry["unit"] == QUANTITIES[name].unit
        assert (entry["value"] is None) == ("reason" in entry)
    for caveat in answer["caveats"]:
        assert set(caveat) == {"id", "severity", "text", "value"}
        assert caveat["text"].endswith(".")


def test_flags_give_a_plan_and_the_answer_is_the_engine_s(capsys: pytest.CaptureFixture[str]) -> None:
    answer = state_json(capsys, *FLAGS)
    assert answer["input"]["cloud.temperature"] == "200 nK"
    # 0.9405 hbar wbar N^(1/3)/k: Bagnato, Pritchard, Kleppner, Phys. Rev. A 35, 4354 (1987); the digits by hand.
    assert answer["quantities"]["critical_temperature"]["value"] == pytest.approx(138.36e-9, rel=1e-4)
    assert answer["quantities"]["fermi_energy"] == {
        "value": None,
        "unit": "J",
        "low": None,
        "high": None,
        "reason": "needs fermions",
        "label": "Fermi energy",
        "source": QUANTITIES["fermi_energy"].source,
    }


def test_flags_override_the_file(capsys: pytest.CaptureFixture[str]) -> None:
    answer = state_json(capsys, str(PLANS[0]), "--temperature", "50 nK")
    assert answer["quantities"]["condensate_fraction"]["value"] > 0.8


def test_a_negative_scattering_length_may_follow_its_flag(capsys: pytest.CaptureFixture[str]) -> None:
    answer = state_json(capsys, *FLAGS, "--scattering-length=-20 a0")
    assert answer["model"] == "ideal"
    assert {"model_not_repulsive", "attractive"} <= {caveat["id"] for caveat in answer["caveats"]}


def test_the_readable_page_opens_with_the_verdict(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["state", str(PLANS[0])]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].startswith("87Rb, F=1 mF=-1; model: semi-ideal")
    assert "times too hot for condensation" in lines[2]
    assert any("What this answer does not cover" in line for line in lines)


@pytest.mark.parametrize(
    ("arguments", "text"),
    [
        (["--temperature", "-3 nK"], 'coldward: --temperature: temperature must be from 1 pK to 10 K, got "-3 nK"'),
        (["--temperature", "3"], "coldward: --temperature: temperature needs a unit"),
        (["--species", "88Rb"], 'coldward: --species: no species "88Rb" in the data; the nearest'),
        (["--model", "classical"], "coldward: --model"),
        (["--frequencies", "120 Hz, 20 Hz"], "coldward: --frequencies"),
    ],
)
def test_a_bad_value_is_one_sentence_and_status_1(
    arguments: list[str], text: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["state", *FLAGS, *arguments]) == 1
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.startswith(text)
    assert captured.err.count("\n") == 1


def test_a_missing_file_is_one_sentence_and_status_1(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["state", str(tmp_path / "none.toml")]) == 1
    captured = capsys.readouterr()
    assert "none.toml" in captured.err
    assert captured.err.count("\n") == 1


def test_a_model_that_finds_no_solution_says_so(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    import app.engine

    def lost(*_args: object) -> None:
        raise ArithmeticError("the condensate did not converge")

    monkeypatch.setattr(app.engine, "cloud_answer", lost)
    assert main(["state", *FLAGS]) == 1
    assert capsys.readouterr().err == "coldward: the condensate did not converge\n"


def test_a_command_line_that_cannot_be_read_is_status_2() -> None:
    with pytest.raises(SystemExit) as exit_status:
        main(["state", "--no-such-flag"])
    assert exit_status.value.code == 2


@pytest.mark.parametrize("verb", ["state", "map", "profile", "species"])
def test_verbs_load_no_window_toolkit_and_state_no_plotting(verb: str) -> None:
    arguments = [str(PLANS[0])] if verb != "species" else []
    code = (
        "import sys; from app.__main__ import main; "
        f"status = main({[verb, *arguments]!r}); loaded = set(sys.modules); "
        "heavy = ('PySide6', 'matplotlib', 'scipy.optimize', 'scipy.integrate', 'pint'); "
        "print(status, [name for name in heavy if name in loaded], file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stderr.strip().splitlines()[-1] == "0 []"


MADE = ROOT / "tests" / "data" / "plan_of_beams_and_coils.toml"


@pytest.mark.parametrize("verb", ["state", "map", "profile"])
def test_a_trap_that_holds_nothing_has_no_cloud(verb: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main([verb, str(MADE.with_name("plan_of_a_trap_that_holds_nothing.toml"))]) == 1
    captured = capsys.readouterr()
    assert captured.out == ""
    start = "coldward: the trap of this plan, beams A and cross and coils, holds no atoms: gravity pulls the atoms out"
    assert captured.err.startswith(start)
    assert captured.err.count("\n") == 1


def test_a_cloud_in_beams_has_the_frequencies_and_the_depth_of_its_trap(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["trap", str(MADE), "--json"]) == 0
    trap = json.loads(capsys.readouterr().out)
    answer = state_json(capsys, str(MADE))
    quantities = answer["quantities"]
    assert quantities["mean_frequency"]["value"] == pytest.approx(np.prod(trap["frequencies"]) ** (1 / 3), rel=1e-9)
    assert quantities["truncation"]["value"] == pytest.approx(trap["depth_temperature"] / 200e-9, rel=1e-9)
    assert quantities["harmonic_reduced_temperature"]["value"] > 0.0
    # 2.5(1) W: frequencies of a trap of light go with the root of the power, its depth with the power
    spread = quantities["truncation"]
    assert (spread["high"] - spread["low"]) / spread["median"] == pytest.approx(
        2 * 0.994 * np.hypot(0.04, 0.05), rel=0.05
    )


def test_frequencies_take_the_place_of_beams_and_coils(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    flags = ["--frequencies", "120 Hz, 120 Hz, 20 Hz"]
    answer = state_json(capsys, str(MADE), *flags)
    assert answer["quantities"]["mean_frequency"]["value"] == pytest.approx((120 * 120 * 20) ** (1 / 3), rel=1e-12)
    clouds = write_clouds(tmp_path, "atoms,fx [Hz],fy [Hz],fz [Hz]\n1e5,120,120,20\n1e5,120,,\n1e5,,,\n")
    assert main(["table", clouds, "--plan", str(MADE)]) == 1
    captured = capsys.readouterr()
    row = next(csv.DictReader(io.StringIO(captured.out)))
    assert float(row["mean_frequency [Hz]"]) == answer["quantities"]["mean_frequency"]["value"]
    errors = captured.err.splitlines()
    assert errors[0].endswith("line 3: fy and fz must be given too, or --frequencies for all rows")
    assert len(errors) == 1


def test_what_stands_beside_the_frequencies_is_told_of(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["state", str(MADE.with_name("plan_version_1.toml"))]) == 0
    text = capsys.readouterr().out
    assert "The section [trap.beam] of the plan is kept, and not used: the trap frequencies are given." in text


# --- map and profile ---


def test_the_map_as_csv_holds_the_cloud_s_own_numbers(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    target = tmp_path / "map.csv"
    ranges = ["--atoms-range", "1e5 to 2e5", "--temperature-range", "200 nK to 300 nK", "--points", "3"]
    assert main(["map", *FLAGS, *ranges, "-o", str(target)]) == 0
    rows = list(csv.DictReader(io.StringIO(target.read_text())))
    assert len(rows) == 9
    solved = cloud_answer(
        plan_with(read_plan(PLANS[0]), {"cloud.atoms": "1e5", "cloud.temperature": "200 nK"})
    ).equilibrium
    assert float(rows[0]["peak_phase_space_density"]) == pytest.approx(
        float(solved.peak_phase_space_density), rel=1e-12
    )
    assert capsys.readouterr().out == ""


@pytest.mark.parametrize("verb", ["map", "profile"])
@pytest.mark.parametrize(("ending", "magic"), [(".png", b"\x89PNG"), (".svg", b"<?xml"), (".pdf", b"%PDF")])
def test_pictures_are_written_by_the_ending_of_the_name(verb: str, ending: str, magic: bytes, tmp_path: Path) -> None:
    target = tmp_path / f"picture{ending}"
    assert main([verb, str(PLANS[0]), "-o", str(target)]) == 0
    assert target.read_bytes().startswith(magic)


def test_an_unknown_ending_is_refused_with_the_known_ones(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["map", str(PLANS[0]), "-o", str(tmp_path / "map.xls")]) == 1
    assert "must end in .csv, .png, .svg or .pdf" in capsys.readouterr().err


def test_a_range_that_is_none_is_refused(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["map", str(PLANS[0]), "--atoms-range", "1e5-2e5"]) == 1
    assert '--atoms-range: a range is written "low to high", got "1e5-2e5"' in capsys.readouterr().err
    assert main(["map", str(PLANS[0]), "--points", "1"]) == 1
    for points in ("1", "0", "-5"):
        assert main(["map", str(PLANS[0]), "--points", points]) == 1
        assert f"--points must be from 2 to 2000, got {points}" in capsys.readouterr().err


@pytest.mark.parametrize(("verb", "more"), [("map", ["--points", "4"]), ("profile", ["--axis", "z"])])
def test_map_and_profile_as_json_hold_the_numbers_of_the_csv(
    verb: str, more: list[str], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    target = tmp_path / "answer.csv"
    assert main([verb, *FLAGS, *more, "--json", "-o", str(target)]) == 0
    answer = json.loads(capsys.readouterr().out, parse_constant=lambda text: pytest.fail(f"{text} in JSON"))
    assert list(answer)[:4] == ["coldward", "version", "input", "model"]
    header, *rows = csv.reader(io.StringIO(target.read_text()))
    units = {name: f" [{unit}]" if unit != "1" else "" for name, unit in answer["units"].items()}
    assert header == [name + units[name] for name in answer["columns"]]
    for name, cells in zip(answer["columns"], zip(*rows, strict=True), strict=True):
        assert answer["columns"][name] == [float(cell) for cell in cells]


def test_the_profile_goes_to_stdout_without_a_file(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["profile", *FLAGS, "--axis", "z"]) == 0
    rows = list(csv.DictReader(io.StringIO(capsys.readouterr().out)))
    position = np.array([float(row["position [m]"]) for row in rows])
    total = np.array([float(row["density_total [1/m^3]"]) for row in rows])
    assert position[0] == -position[-1]
    assert np.argmax(total) == position.size // 2


# --- table ---


def write_clouds(tmp_path: Path, text: str) -> str:
    path = tmp_path / "clouds.csv"
    path.write_text(text, encoding="utf-8")
    return str(path)


def test_a_table_answers_the_good_rows_and_names_the_bad_ones(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    clouds = write_clouds(
        tmp_path,
        "run,species,temperature [uK],atoms,fx [Hz]\n"
        "one,87Rb,0.2,1e5,100\n"
        "two,6Li,0.5,1e6,\n"
        "three,1X,1,1e5,2\n"
        "four,87Rb,-1,1e5,2\n"
        "five,87Rb,1\n",
    )
    target = tmp_path / "out.csv"
    assert main(["table", clouds, "--plan", str(PLANS[0]), "-o", str(target)]) == 1
    rows = list(csv.DictReader(io.StringIO(target.read_text())))
    assert [row["run"] for row in rows] == ["one", "two"]
    assert rows[0]["fermi_energy [J]"] == ""
    assert float(rows[1]["fermi_temperature [K]"]) > 0.0
    assert rows[1]["model"] == "ideal"
    errors = capsys.readouterr().err.splitlines()
    assert len(errors) == 3
    assert 'clouds.csv, line 4: column "species": no species "1X"' in errors[0]
    assert 'clouds.csv, line 5: column "temperature [uK]": temperature must be from 1 pK to 10 K' in errors[1]
    assert "clouds.csv, line 6: 5 cells are needed, as in the header, got 3" in errors[2]


def test_a_row_says_what_state_says(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    clouds = write_clouds(tmp_path, "temperature [nK],atoms\n80,2e5\n")
    assert main(["table", clouds, *FLAGS]) == 0
    row = next(csv.DictReader(io.StringIO(capsys.readouterr().out)))
    answer = state_json(capsys, *FLAGS, "--temperature", "80 nK", "--atoms", "2e5")
    for name in ("condensate_fraction", "peak_density [1/m^3]"):
        assert float(row[name]) == answer["quantities"][name.split()[0]]["value"]
    assert float(row["condensate_radii_z [m]"]) == answer["quantities"]["condensate_radii"]["value"][2]


WHOLE = "species,state,atoms,temperature [uK],fx [Hz],fy [Hz],fz [Hz],depth [uK]\n"


def test_a_table_that_says_all_needs_no_plan(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    clouds = write_clouds(
        tmp_path, WHOLE + "87Rb,F=2 mF=+2,1e5,0.2,120,120,20,5\n6Li,,1e5,,300,300,20,\n87Rb,,1e5,0.2,,120,20,\n"
    )
    assert main(["table", clouds]) == 1
    captured = capsys.readouterr()
    rows = list(csv.DictReader(io.StringIO(captured.out)))
    answer = state_json(capsys, *FLAGS, "--state", "F=2 mF=+2", "--depth", "5 uK")
    assert [row["species"] for row in rows] == ["87Rb"]
    assert float(rows[0]["truncation"]) == answer["quantities"]["truncation"]["value"]
    assert captured.err.splitlines() == [
        f'coldward: {clouds}, line 3: column "temperature [uK]" is missing: give the temperature, such as "200 nK"',
        f"coldward: {clouds}, line 4: fx must be given too, or --frequencies for all rows",
    ]


def test_flags_fill_what_a_table_leaves_open(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    clouds = write_clouds(tmp_path, "Atoms,fz [Hz]\n1e5,20\n,30\n")
    assert main(["table", clouds, "--species", "87Rb", "--temperature", "200 nK"]) == 1
    assert capsys.readouterr().err.count("fx and fy must be given too, or --frequencies for all rows") == 2
    assert main(["table", clouds, "--species", "87Rb", "--frequencies", "120 Hz,120 Hz,9 Hz"]) == 1
    assert "line 2: column temperature is missing" in capsys.readouterr().err
    assert main(["table", clouds, *FLAGS[:4], "--temperature", "200 nK"]) == 1
    captured = capsys.readouterr()
    assert 'line 3: column "Atoms" is missing' in captured.err
    row = next(csv.DictReader(io.StringIO(captured.out)))
    assert float(row["mean_frequency [Hz]"]) == pytest.approx((120 * 120 * 20) ** (1 / 3))


def test_a_table_as_json_names_the_line_of_every_row(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    clouds = write_clouds(tmp_path, "temperature [nK]\n80\n-1\n")
    assert main(["table", clouds, *FLAGS, "--json"]) == 1
    answer = json.loads(capsys.readouterr().out)
    assert list(answer)[:3] == ["coldward", "version", "input"]
    assert [row["line"] for row in answer["rows"]] == [2]
    body = state_json(capsys, *FLAGS, "--temperature", "80 nK")
    assert answer["rows"][0]["quantities"] == body["quantities"]
    assert answer["refused"][0]["line"] == 3
    assert answer["refused"][0]["reason"].startswith('column "temperature [nK]": temperature must be from 1 pK')


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("temperature [nK],temperature [uK]\n1,1\n", 'columns "temperature [nK]" and "temperature [uK]" say the same'),
        ("atom\n1e5\n", 'column "atom" is not read; did you mean "atoms"?'),
        ("atoms;temperature [uK]\n1e5;0,2\n", "must have commas between its cells, and decimal points within them"),
        ("", "clouds.csv has no header line"),
        ("pressure [Pa]\n1\n", 'column "pressure \\[Pa\\]" has a unit but is not one of atoms'),
    ],
)
def test_a_table_that_cannot_be_read_is_one_sentence(
    text: str, message: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["table", write_clouds(tmp_path, text), *FLAGS]) == 1
    assert message.replace("\\", "") in capsys.readouterr().err


def test_a_table_that_is_not_there_is_one_sentence(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["table", str(tmp_path / "none.csv")]) == 1
    error = capsys.readouterr().err
    assert error == f"coldward: {tmp_path / 'none.csv'} could not be read: No such file or directory\n"


# --- words ---


def test_every_caveat_has_its_sentence() -> None:
    from physics.caveats import CAVEAT_IDS, Caveat, Severity

    for key in ("87Rb", "6Li"):
        answer = cloud_answer(plan_with(read_plan(PLANS[0]), {"species.key": key}))
        for name in CAVEAT_IDS:
            value = 5.3e-9 if "length" in name else 0.07
            text = caveat_text(
                Caveat(id=name, severity=Severity.NOTE, value=value, numbers={"frozen_axes": 1.0}), answer
            )
            assert text.endswith(".")
            assert "{" not in text
