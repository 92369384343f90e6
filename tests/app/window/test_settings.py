"""What is remembered between sessions, and what happens to a file that cannot be understood."""

from pathlib import Path

import pytest
from PySide6.QtCore import QByteArray, QRect

from app.window.settings import FILE_NAME, RECENT_LIMIT, Settings, ThemeChoice, rectangle_on_screens


def test_settings_come_back(tmp_path: Path) -> None:
    one = Settings(tmp_path)
    one.theme = ThemeChoice.DARK
    one.units = {"chemical_potential": "kHz"}
    one.put("window/geometry", QByteArray(b"\x01\xd9\x00;=]"))
    one.flush()
    other = Settings(tmp_path)
    assert other.notice is None
    assert other.theme is ThemeChoice.DARK
    assert other.units == {"chemical_potential": "kHz"}
    assert other.blob("window/geometry") == QByteArray(b"\x01\xd9\x00;=]")


def test_nothing_is_written_outside_the_given_folder(tmp_path: Path) -> None:
    settings = Settings(tmp_path / "own")
    settings.flush()
    assert settings.state_folder == tmp_path / "own"
    assert {path.name for path in tmp_path.rglob("*") if path.is_file()} == {FILE_NAME}


def good_text(tmp_path: Path) -> bytes:
    settings = Settings(tmp_path)
    settings.theme = ThemeChoice.DARK
    settings.remember_file(tmp_path / "plan.toml")
    settings.put("window/geometry", QByteArray(bytes(range(60))))
    settings.flush()
    return (tmp_path / FILE_NAME).read_bytes()


@pytest.mark.parametrize(
    "spoil",
    [
        lambda good: b"\x89PNG\r\n\x1a\n" + bytes(range(256)),
        lambda good: b"not a settings file at all [[[",
        lambda good: good[: len(good) // 2],
        lambda good: good[:-30],
        lambda good: good.replace(b"version=1", b"version=99"),
    ],
    ids=["binary", "garbage", "half", "end lost", "newer"],
)
def test_a_bad_file_is_set_aside_with_a_notice_and_defaults_are_used(tmp_path: Path, spoil) -> None:
    bad = spoil(good_text(tmp_path))
    (tmp_path / FILE_NAME).write_bytes(bad)
    settings = Settings(tmp_path)
    assert settings.notice is not None
    assert "set aside" in settings.notice
    assert settings.theme is ThemeChoice.SYSTEM
    assert (tmp_path / "coldward.unreadable.ini").read_bytes() == bad


def test_recent_files_are_newest_first_without_repeats_and_missing_ones_known(tmp_path: Path) -> None:
    settings = Settings(tmp_path)
    names = [tmp_path / f"{number}.toml" for number in range(RECENT_LIMIT + 2)]
    for name in names:
        name.touch()
        settings.remember_file(name)
    settings.remember_file(names[5])
    names[4].unlink()
    recent = settings.recent
    assert len(recent) == RECENT_LIMIT
    assert recent[0].path == names[5]
    assert [file.path for file in recent].count(names[5]) == 1
    assert [file.path for file in recent if not file.present] == [names[4]]


def test_the_last_folder_is_remembered_while_it_exists(tmp_path: Path) -> None:
    settings = Settings(tmp_path)
    folder = tmp_path / "plans"
    folder.mkdir()
    settings.remember_file(folder / "a.toml")
    assert settings.last_folder == folder
    folder.rmdir()
    assert settings.last_folder == Path.home()


SCREENS = [QRect(0, 0, 1920, 1080), QRect(1920, 0, 1280, 1024)]


@pytest.mark.parametrize(
    "wanted",
    [(-5000, -5000, 800, 600), (9000, 200, 800, 600), (100, 100, 5000, 4000), (1800, 900, 900, 700)],
)
def test_a_window_is_brought_back_onto_a_screen(wanted: tuple[int, int, int, int]) -> None:
    got = rectangle_on_screens(QRect(*wanted), SCREENS)
    assert any(screen.contains(got) for screen in SCREENS)


def test_a_window_that_is_on_a_screen_stays_where_it_is() -> None:
    wanted = QRect(2000, 100, 800, 600)
    assert rectangle_on_screens(wanted, SCREENS) == wanted
