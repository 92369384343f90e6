"""`coldward compare`, as a script calls it."""

from __future__ import annotations

import csv
import json
from pathlib import Path
from typing import Any

import pytest

from app.__main__ import main
from app.candidate_columns import USUAL_COLUMNS
from physics.species import load_species, species_keys

ROOT = Path(__file__).resolve().parents[2]
LIGHT = str(ROOT / "presets" / "traps" / "crossed_beams_rubidium.toml")
FLAGS = ["--frequencies", "120 Hz, 120 Hz, 20 Hz", "--depth", "3 uK", "--atoms", "1e5", "--temperature", "200 nK"]
STATES = sum(len(load_species(key).states) for key in species_keys())


def compare_json(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict[str, Any]:
    assert main(["compare", *arguments, "--json"]) == 0
    captured = capsys.readouterr()
    assert captured.err == ""
    answer: dict[str, Any] = json.loads(captured.out, parse_constant=lambda text: pytest.fail(f"{text} in JSON"))
    return answer


def state_json(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict[str, Any]:
    assert main(["state", *arguments, "--json"]) == 0
    answer: dict[str, Any] = json.loads(capsys.readouterr().out)
    return answer


def test_the_contract_holds_for_all_states(capsys: pytest.CaptureFixture[str]) -> None:
    answer = compare_json(capsys, *FLAGS)
    assert list(answer)[:5] == ["coldward", "version", "input", "basis", "rows"]
    assert answer["coldward"] == 1
    assert answer["basis"] == "same frequencies"
    assert len(answer["rows"]) == STATES
    for row in answer["rows"]:
        assert {"key", "state", "trapped", "reason", "model", "quantities"} <= set(row)
        assert set(row["quantities"]) == set(USUAL_COLUMNS) - {"evaporated_atoms", "evaporation_time"}
        for entry in row["quantities"].values():
            assert {"value", "unit", "low", "high", "label", "source", "certainty"} <= set(entry)
            assert (entry["value"] is None) == (entry["certainty"] == "unknown")
            assert entry["value"] is not None or entry["reason"]


def test_rows_say_what_state_says(capsys: pytest.CaptureFixture[str]) -> None:
    names = "peak_phase_space_density,elastic_collision_rate,three_body_lifetime,truncation,critical_temperature"
    flags = ["120(2) Hz, 120 Hz, 20 Hz", "1.0(1)e5", "200(10) nK"]
    cloud = ["--frequencies", flags[0], "--depth", "3 uK", "--atoms", flags[1], "--temperature", flags[2]]
    answer = compare_json(capsys, *cloud, "--species", "87Rb,41K,40K", "--columns", names)
    for row in answer["rows"]:
        alone = state_json(capsys, *cloud, "--species", row["key"], "--state", row["state"])
        assert row["model"] == alone["model"]
        for name in names.split(","):
            for place in ("value", "low", "high", "unit", "label", "source"):
                assert row["quantities"][name][place] == alone["quantities"][name][place], (row["key"], name, place)


def test_in_the_same_light_each_has_its_own_trap(capsys: pytest.CaptureFixture[str]) -> None:
    answer = compare_json(
        capsys, LIGHT, "--basis", "same light", "--species", "87Rb,84Sr", "--columns", "trap_depth,sag,truncation"
    )
    assert main(["trap", LIGHT, "--json"]) == 0
    trap = json.loads(capsys.readouterr().out)
    strontium, rubidium = answer["rows"][:2]
    assert (strontium["key"], rubidium["key"]) == ("84Sr", "87Rb")
    assert rubidium["quantities"]["trap_depth"]["value"] == trap["depth"]
    assert rubidium["quantities"]["sag"]["value"] == trap["sag"]
    assert (strontium["trapped"], strontium["model"], strontium["fails"]) == (False, None, "not trapped")
    assert "gravity pulls the atoms out" in strontium["reason"]
    assert strontium["quantities"]["trap_depth"] == {
        "value": None,
        "unit": "J",
        "low": None,
        "high": None,
        "reason": "not trapped",
        "certainty": "unknown",
        "label": "trap depth",
        "source": "Grimm, Weidemueller, Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000)",
    }


def test_the_page_fits_a_terminal_and_says_what_is_recalled(capsys: pytest.CaptureFixture[str]) -> None:
    for arguments in (FLAGS, [LIGHT, "--basis", "same light", "--species", "87Rb,40K,6Li,84Sr,41K"]):
        assert main(["compare", *arguments]) == 0
        out = capsys.readouterr().out
        assert max(map(len, out.splitlines())) <= 100
        assert "ʳ recalled" in out
        assert "nan" not in out.casefold()


def test_rows_are_sorted_the_better_end_first_and_unknown_ones_last(capsys: pytest.CaptureFixture[str]) -> None:
    for name, better in (("elastic_collision_rate", -1.0), ("rethermalisation_time", 1.0)):
        answer = compare_json(capsys, *FLAGS, "--columns", name, "--sort", name)
        values = [row["quantities"][name]["value"] for row in answer["rows"]]
        known = [value for value in values if value is not None]
        assert known == sorted(known, key=lambda value: better * value)
        assert values[len(known) :] == [None] * (len(values) - len(known))
        assert 0 < len(known) < len(values)


def test_filters_and_weights_are_the_user_s(capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ["--only", "bosons", "--only", "elastic_collision_rate >= 5 1/s", "--columns", "elastic_collision_rate"]
    weights = ["--weight", "elastic_collision_rate=3", "--weight", "mass=1 less"]
    answer = compare_json(capsys, *FLAGS, *arguments, *weights)
    assert 0 < len(answer["rows"]) < STATES
    scores = [row["score"] for row in answer["rows"]]
    assert scores == sorted(scores, reverse=True)
    for row in answer["rows"]:
        assert row["quantities"]["elastic_collision_rate"]["value"] >= 5.0
        assert sum(row["score_parts"].values()) == pytest.approx(row["score"])
    assert answer["input"]["only"] == ["bosons", "elastic_collision_rate >= 5 1/s"]


def test_a_file_has_full_precision_and_certainties(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "compare.csv"
    assert main(["compare", *FLAGS, "--species", "87Rb,85Rb", "-o", str(path)]) == 0
    assert capsys.readouterr().out == ""
    rows = list(csv.DictReader(path.read_text().splitlines()))
    answer = compare_json(capsys, *FLAGS, "--species", "87Rb,85Rb")
    assert len(rows) == len(answer["rows"]) == 4
    for line, row in zip(rows, answer["rows"], strict=True):
        assert (line["species"], line["state"]) == (row["key"], row["state"])
        entry = row["quantities"]["scattering_length"]
        found = line["scattering_length [m]"]
        assert (float(found) if found else None) == entry["value"]
        assert line["scattering_length certainty"] == entry["certainty"]
    assert [line["fails"] for line in rows].count("no data") == 1


def test_the_best_evaporation_is_found_on_demand(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    flags = ["--frequencies", "300 Hz, 300 Hz, 100 Hz", "--depth", "60 uK", "--atoms", "5e6", "--temperature", "6 uK"]
    answer = compare_json(
        capsys, *flags, "--species", "168Er,171Yb", "--background-lifetime", "60 s", "--evaporate",
        "--columns", "evaporated_atoms,evaporation_time",
    )  # fmt: skip
    found = {(row["key"], row["state"]): row["quantities"] for row in answer["rows"]}
    best = found["168Er", "mJ=-6"]
    assert 1e4 < best["evaporated_atoms"]["value"] < 5e6
    assert 0.1 < best["evaporation_time"]["value"] < 300.0
    # The plan names no target, so condensation stands for it.
    assert best["evaporated_atoms"]["certainty"] == "assumed"
    assert "2.612" in best["evaporated_atoms"]["reason"]
    polarised = found["171Yb", "F=1/2 mF=+1/2"]["evaporated_atoms"]
    assert polarised["value"] is None
    assert "do not meet" in polarised["reason"]


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        ((*FLAGS, "--basis", "same light"), "the same light needs a trap of beams or coils"),
        ((*FLAGS, "--basis", "same lihgt"), '--basis must be one of "same frequencies", "same light", "same start"'),
        ((*FLAGS, "--species", "87Rx"), 'no species "87Rx"'),
        ((*FLAGS, "--columns", "elastic_colision_rate"), "the nearest is elastic_collision_rate"),
        ((*FLAGS, "--sort", "score"), "--sort score needs at least one --weight"),
        ((*FLAGS, "--only", "nice"), '"nice" is not a filter'),
        ((*FLAGS, "--only", "sag <= 50"), "sag needs a unit"),
        ((*FLAGS, "--weight", "sag=-1"), "the weight of sag must be positive"),
        ((*FLAGS, "--weight", "sag=much"), 'the weight of sag must be a number, got "much"'),
    ],
)
def test_what_cannot_be_is_said_in_one_sentence(
    arguments: tuple[str, ...], sentence: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["compare", *arguments]) == 1
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.startswith("coldward: ")
    assert len(captured.err.splitlines()) == 1
    assert sentence in captured.err


def test_rows_without_an_answer_are_told_of_and_the_others_are_written(capsys: pytest.CaptureFixture[str]) -> None:
    """A quadrupole holds atoms and has no frequencies."""
    plan = str(ROOT / "presets" / "traps" / "quadrupole_rubidium.toml")
    status = main(["compare", plan, "--basis", "same light", "--species", "87Rb", "--json"])
    captured = capsys.readouterr()
    rows = {row["state"]: row for row in json.loads(captured.out)["rows"]}
    assert rows["F=1 mF=+1"]["fails"] == "not trapped"
    held = rows["F=1 mF=-1"]
    assert held["trapped"]
    assert status == (1 if held["fails"] == "no answer" else 0)
    assert ("87Rb F=1 mF=-1" in captured.err) == (held["fails"] == "no answer")
