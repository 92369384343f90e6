"""`coldward species`, as a reader and a script see it."""

from __future__ import annotations

import argparse
import json
import math
import re
import subprocess
import sys
from pathlib import Path

import pytest

from app.commands import species as verb
from app.tables import columns, text_table
from physics.species import load_species, species_keys
from physics.species_file import ISOTOPE_NUMBERS, STATE_NUMBERS


def run(*arguments: str) -> int:
    parser = argparse.ArgumentParser()
    verb.add_parser(parser.add_subparsers())
    args = parser.parse_args(["species", *arguments])
    return int(args.run(args))


def test_the_list_has_every_isotope_and_state(capsys: pytest.CaptureFixture[str]) -> None:
    assert run() == 0
    out, err = capsys.readouterr()
    assert err == ""
    table, legend = out.split("\n\n")
    header, rule, *rows = table.splitlines()
    assert header.split("  ")[0] == "species"
    assert set(rule) == {"-"}
    expected = [state for key in species_keys() for state in load_species(key).states]
    assert len(rows) == len(expected)
    start = header.index("state ")
    for row, state in zip(rows, expected, strict=True):
        assert row[start:].startswith(state.name)
    assert [row.split()[0] for row in rows if not row.startswith(" ")] == list(species_keys())
    for word in ("seen", "memory", "computed", "background"):
        assert word in legend


@pytest.mark.parametrize(
    ("key", "state", "length"),
    [
        ("87Rb", "F=1 mF=-1", "100.4 a0 memory"),
        ("133Cs", "F=3 mF=+3", "1720 a0 (background) memory"),
        ("41K", "F=1 mF=+1", "unknown"),
        ("161Dy", "F=21/2 mF=-21/2", "none: one spin state of fermions"),
    ],
)
def test_the_list_says_how_each_state_scatters(
    capsys: pytest.CaptureFixture[str], key: str, state: str, length: str
) -> None:
    run()
    lines = [" ".join(line.split()) for line in capsys.readouterr().out.splitlines()]
    start = next(place for place, line in enumerate(lines) if line.startswith(f"{key} "))
    assert any(line.endswith(f"{state} {length}") for line in lines[start : start + 3])


def test_one_species_shows_every_number_with_its_source(capsys: pytest.CaptureFixture[str]) -> None:
    assert run("rb87") == 0
    out = capsys.readouterr().out
    rubidium = load_species("87Rb")
    lines = out.splitlines()
    for holder, names in ((rubidium.isotope, ISOTOPE_NUMBERS), *((s, STATE_NUMBERS) for s in rubidium.states)):
        for name in names:
            number = getattr(holder, name)
            if number is not None:
                row = re.compile(rf"\s{re.escape(number.text)}\s+{number.certainty.value}\s+{re.escape(number.source)}")
                assert any(row.search(line) for line in lines), name
    for text in ("1007.4 G", "87Rb F=1 mF=+1 + 133Cs F=3 mF=+3", "5s-5p3/2 (D2)", "from 990 to 1025 G"):
        assert text in out


@pytest.mark.parametrize("key", species_keys())
def test_every_species_can_be_shown(capsys: pytest.CaptureFixture[str], key: str) -> None:
    assert run(key) == 0
    assert capsys.readouterr().out.startswith(f"{key}: ")


def test_labels_cover_every_number() -> None:
    assert set(verb._LABELS) == {*ISOTOPE_NUMBERS, *STATE_NUMBERS}


@pytest.mark.parametrize("arguments", [(), ("4He*",), ("6Li",)])
def test_json_is_one_object_in_si_that_opens_with_the_contract(
    capsys: pytest.CaptureFixture[str], arguments: tuple[str, ...]
) -> None:
    assert run(*arguments, "--json") == 0
    out, err = capsys.readouterr()
    assert err == ""
    answer = json.loads(out, parse_constant=lambda word: pytest.fail(f"{word} in JSON"))
    assert list(answer)[:3] == ["coldward", "version", "input"]
    assert answer["coldward"] == 1
    assert answer["input"] == {"key": arguments[0] if arguments else None}
    for entry in answer["species"]:
        known = load_species(entry["key"])
        assert entry["quantities"]["mass"]["value"] == known.isotope.mass.value
        assert entry["quantities"]["mass"]["unit"] == "kg"
        assert [state["name"] for state in entry["states"]] == [state.name for state in known.states]
        for state in entry["states"]:
            for number in state["quantities"].values():
                assert math.isfinite(number["value"])
                assert number["certainty"] in ("seen", "memory", "computed")
                assert number["source"]


def test_json_of_one_species_holds_resonances_pairs_and_lines(capsys: pytest.CaptureFixture[str]) -> None:
    run("7Li", "--json")
    entry = json.loads(capsys.readouterr().out)["species"][0]
    assert [resonance["used"] for resonance in entry["resonances"]] == [False, True]
    assert entry["resonances"][1]["position"]["value"] == pytest.approx(0.073769)
    assert entry["resonances"][1]["position"]["unit"] == "T"
    assert entry["pairs"][0]["states"] == [["6Li", "F=3/2 mF=+3/2"], ["7Li", "F=2 mF=+2"]]
    assert len(entry["lines"]) == 5


@pytest.mark.parametrize("flags", [(), ("--json",)])
def test_an_unknown_key_is_one_sentence_on_stderr(capsys: pytest.CaptureFixture[str], flags: tuple[str, ...]) -> None:
    assert run("88Rb", *flags) == 1
    out, err = capsys.readouterr()
    assert out == ""
    assert err == 'coldward: no species "88Rb" in the data; the nearest are 85Rb, 87Rb\n'


def test_the_verb_loads_no_window_toolkit_and_no_plotting() -> None:
    code = (
        "import sys, argparse; from app.commands import species as verb; parser = argparse.ArgumentParser(); "
        "verb.add_parser(parser.add_subparsers()); args = parser.parse_args(['species', '40K']); args.run(args); "
        "print([name for name in ('PySide6', 'matplotlib', 'pint', 'scipy') if name in sys.modules])"
    )
    root = Path(verb.__file__).parents[2]
    answer = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=root)
    assert answer.stdout.splitlines()[-1] == "[]"


def test_columns_line_up_and_keep_every_text_whole() -> None:
    long = "x" * 300
    lines = columns([("a", "1", long), ("bbb", "22", "")], indent=2, right=(1,))
    assert lines == [f"  a     1  {long}", "  bbb  22"]
    assert columns([]) == []
    assert text_table(("h", "k"), [("1", "2")]).splitlines() == ["h  k", "----", "1  2"]


def test_rows_of_a_table_must_be_equally_long() -> None:
    with pytest.raises(ValueError, match=r"^rows must be equally long, got \[1, 2\] cells$"):
        columns([("a",), ("a", "b")])
