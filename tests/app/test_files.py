"""Files are written whole or not at all."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from app.files import write_atomically


def test_a_new_file_holds_what_was_written(tmp_path: Path) -> None:
    write_atomically(tmp_path / "a.csv", b"1,2\n")
    assert (tmp_path / "a.csv").read_bytes() == b"1,2\n"
    assert [path.name for path in tmp_path.iterdir()] == ["a.csv"]


@pytest.mark.parametrize("fails", ["replace", "fsync"])
def test_when_writing_fails_the_old_file_stands_and_nothing_is_left(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, fails: str
) -> None:
    path = tmp_path / "a.csv"
    path.write_bytes(b"old")

    def broken(*_args: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, fails, broken)
    with pytest.raises(
        OSError, match=r"a\.csv could not be written: No space left on device; what was there is unchanged"
    ):
        write_atomically(path, b"new")
    assert path.read_bytes() == b"old"
    assert [entry.name for entry in tmp_path.iterdir()] == ["a.csv"]


def test_a_missing_folder_is_named(tmp_path: Path) -> None:
    with pytest.raises(OSError, match=r"none.a\.csv could not be written: No such file or directory"):
        write_atomically(tmp_path / "none" / "a.csv", b"")
