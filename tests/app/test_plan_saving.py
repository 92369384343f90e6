"""Saving plans: what did not change stays as it was written, and no file is ever half written."""

from __future__ import annotations

import dataclasses
import os
import stat
from collections.abc import Callable
from pathlib import Path

import pytest

import app.plan_saving
from app.plan import (
    DEFAULT_PLAN,
    FORMAT,
    LossesChoice,
    PlanError,
    parse_plan,
    plan_with,
    read_plan,
    save_plan,
    write_plan,
)
from app.plan_file import entries_of

DATA = Path(__file__).parent.parent / "data"
PLAIN = (DATA / "plan_plain.toml").read_text(encoding="utf-8")


def test_a_plan_that_did_not_change_is_written_byte_for_byte() -> None:
    text = (DATA / "plan_version_1.toml").read_text(encoding="utf-8")
    assert write_plan(parse_plan(text, "a.toml")) == text
    assert write_plan(DEFAULT_PLAN, text) != text
    crlf = PLAIN.replace("\n", "\r\n")
    assert write_plan(parse_plan(crlf, "a.toml")) == crlf


def test_saving_changes_only_the_lines_that_changed() -> None:
    text = (DATA / "plan_version_1.toml").read_text(encoding="utf-8")
    plan = plan_with(
        parse_plan(text, "a.toml"),
        {
            "cloud.atoms": "2e5",
            "trap.frequencies": "120(2) Hz,2π×120 Hz,25 Hz",
            "species.state": "F=2 mF=2",
            "trap.depth": "",
            "target.condensate_atoms": "1e4",
        },
    )
    written = write_plan(plan)
    before, after = text.splitlines(), written.splitlines()
    assert [line for line in before if line not in after] == [
        'state = "f=1 mf=-1"                   # case and spaces do not matter',
        'frequencies = ["120(2) Hz", "2π×120 Hz", "20.0(5) Hz"]   # ordinary frequencies',
        'depth = "5 uK"',
        'atoms = "1.0(1)e5"                    # per spin state',
        "reduced_temperature = 0.5",
    ]
    assert [line for line in after if line not in before] == [
        f'state = "{plan.species.state}"                   # case and spaces do not matter',
        'frequencies = ["120(2) Hz", "2π×120 Hz", "25 Hz"]   # ordinary frequencies',
        'atoms = "2e5"                    # per spin state',
        "condensate_atoms = 1e4",
    ]
    assert parse_plan(written, "b.toml") == plan


def test_comments_within_a_list_and_odd_layouts_are_kept() -> None:
    text = (
        "coldward=1\ncloud.atoms = '1e5' # single quotes\ncloud.temperature='200 nK'\nspecies={key='Rb87'}\n"
        "trap.frequencies = [\n  '120 Hz', # x\n  '120 Hz', # y\n  '20 Hz' # z\n]\n"
    )
    plan = plan_with(
        parse_plan(text, "a.toml"), {"trap.frequencies": "120 Hz,120 Hz,30 Hz", "species.state": "F=2 mF=2"}
    )
    written = write_plan(plan)
    assert "'120 Hz', # y\n" in written
    assert "# z" in written
    assert "cloud.atoms = '1e5' # single quotes\n" in written
    assert "Rb87" in written
    assert parse_plan(written, "b.toml") == plan


def test_a_copied_plan_takes_the_unused_sections_along() -> None:
    plan = plan_with(read_plan(DATA / "plan_version_1.toml"), {"cloud.atoms": "2e5"})
    again = parse_plan(write_plan(plan), "copy.toml")
    assert again == plan
    assert 'keys = ["87Rb", "41K", "133Cs"]' in again.source


def test_losses_are_saved_and_taken_back() -> None:
    plan = plan_with(
        parse_plan(PLAIN, "a.toml"), {"losses.background_lifetime": "60(5) s", "losses.heating": "20 nK/s"}
    )
    written = write_plan(plan)
    assert '[losses]\nbackground_lifetime = "60(5) s"\nheating = "20 nK/s"' in written
    assert parse_plan(written, "b.toml") == plan
    without = plan_with(plan, {"losses.background_lifetime": "", "losses.heating": ""})
    assert without.losses == LossesChoice()
    assert parse_plan(write_plan(without), "c.toml") == without


def test_another_species_drops_what_was_said_of_losses_by_collisions() -> None:
    texts = {
        "losses.background_lifetime": "60 s",
        "losses.two_body": "1e-14 cm^3/s",
        "losses.three_body": "1e-28 cm^6/s",
    }
    plan = plan_with(plan_with(parse_plan(PLAIN, "a.toml"), texts), {"species.key": "23Na"})
    assert plan.losses.background_lifetime is not None
    assert plan.losses.two_body is None
    assert plan.losses.three_body is None


APART = """\
coldward = 1
[trap]
frequencies = ["120 Hz", "120 Hz", "20 Hz"]
depth = "5 uK"
[species]
key = "87Rb"
[trap.coils]  # a part of the trap that stands apart
bias = "1.5 G"
[cloud]
atoms = "1e5"
temperature = "200 nK"
"""


@pytest.mark.parametrize(("path", "text"), [("trap.depth", ""), ("trap.depth", "6 µK"), ("losses.heating", "1 nK/s")])
def test_a_section_in_two_places_can_be_changed(path: str, text: str) -> None:
    after = plan_with(parse_plan(APART, "a.toml"), {path: text})
    written = write_plan(after)
    assert parse_plan(written, "b.toml") == after
    assert "# a part of the trap that stands apart" in written


def test_a_file_without_the_section_gets_it() -> None:
    plan = plan_with(parse_plan(PLAIN, "a.toml"), {"target.efficiency": "2.5", "title": "Mine"})
    written = write_plan(plan)
    assert parse_plan(written, "b.toml") == plan
    assert "efficiency = 2.5" in written


def test_every_entry_is_written() -> None:
    plan = read_plan(DATA / "plan_version_1.toml")
    fresh = write_plan(dataclasses.replace(plan, source="", unused=()))
    assert entries_of(parse_plan(fresh, "a.toml")) == entries_of(plan)
    assert f"coldward = {FORMAT}" in fresh


def test_saving_replaces_the_file_and_keeps_its_permissions(tmp_path: Path) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(PLAIN, encoding="utf-8")
    path.chmod(0o640)
    plan = plan_with(read_plan(path), {"cloud.atoms": "3e5"})
    text = save_plan(plan, path)
    assert path.read_text(encoding="utf-8") == text == PLAIN.replace('"1e5"', '"3e5"')
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert os.listdir(tmp_path) == ["plan.toml"]


def test_a_new_file_is_made_and_a_link_stays_a_link(tmp_path: Path) -> None:
    path = tmp_path / "new.toml"
    save_plan(DEFAULT_PLAN, path)
    assert read_plan(path) == DEFAULT_PLAN
    link = tmp_path / "link.toml"
    link.symlink_to(path)
    save_plan(plan_with(DEFAULT_PLAN, {"cloud.atoms": "3e5"}), link)
    assert link.is_symlink()
    assert read_plan(path).cloud.atoms.value == 3e5


def test_line_ends_are_not_touched(tmp_path: Path) -> None:
    path = tmp_path / "plan.toml"
    path.write_bytes(PLAIN.replace("\n", "\r\n").encode())
    save_plan(plan_with(read_plan(path), {"cloud.atoms": "3e5"}), path)
    assert path.read_bytes() == PLAIN.replace('"1e5"', '"3e5"').replace("\n", "\r\n").encode()


def _failing(*_: object, **__: object) -> None:
    raise OSError(28, "No space left on device")


@pytest.mark.parametrize("name", ["os.replace", "os.fsync", "os.chmod"])
def test_a_save_that_fails_leaves_the_old_file_and_no_litter(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str
) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(PLAIN, encoding="utf-8")
    plan = plan_with(read_plan(path), {"cloud.atoms": "3e5"})
    monkeypatch.setattr(app.plan_saving.os, name.removeprefix("os."), _failing)
    sentence = r"plan\.toml could not be written: No space left on device; what was there is unchanged$"
    with pytest.raises(PlanError, match=sentence):
        save_plan(plan, path)
    monkeypatch.undo()
    assert path.read_text(encoding="utf-8") == PLAIN
    assert os.listdir(tmp_path) == ["plan.toml"]


def test_a_folder_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(PlanError, match="could not be written: No such file or directory"):
        save_plan(DEFAULT_PLAN, tmp_path / "none" / "plan.toml")


def test_a_write_protected_file_is_not_replaced(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(PLAIN, encoding="utf-8")
    refuse: Callable[[object, int], bool] = lambda _path, _mode: False  # noqa: E731 (root may write everything)
    monkeypatch.setattr(app.plan_saving.os, "access", refuse)
    with pytest.raises(PlanError, match="could not be written: it is write-protected"):
        save_plan(DEFAULT_PLAN, path)
