"""Plan files: nothing is lost without a question, and no file can stop the window."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QUrl
from PySide6.QtWidgets import QFileDialog, QMessageBox

from app.plan import DEFAULT_PLAN, read_plan, save_plan
from app.window.main_window import MainWindow

Button = QMessageBox.StandardButton
Answer = Callable[[QMessageBox.StandardButton], list[str]]
CAESIUM = replace(DEFAULT_PLAN, title="caesium", species=replace(DEFAULT_PLAN.species, key="133Cs", state=None))


def change(window: MainWindow) -> None:
    window.document.edit(CAESIUM, "species")


@pytest.fixture
def plan_file(tmp_path: Path) -> Path:
    path = tmp_path / "caesium.toml"
    save_plan(CAESIUM, path)
    return path


def test_nothing_is_asked_while_nothing_changed(window: MainWindow, answer_question: Answer) -> None:
    asked = answer_question(Button.Cancel)
    window.files.new()
    assert asked == []


@pytest.mark.parametrize("leave", ["new", "open", "close"])
def test_cancel_keeps_the_plan_and_the_window(
    window: MainWindow, answer_question: Answer, leave: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_args: pytest.fail("asked for a file all the same"))
    asked = answer_question(Button.Cancel)
    change(window)
    assert window.isWindowModified()
    {"new": window.files.new, "open": window.files.open, "close": window.close}[leave]()
    assert len(asked) == 1
    assert "untitled plan" in asked[0]
    assert window.isVisible()
    assert window.document.plan == CAESIUM


def test_discard_leaves_without_saving(window: MainWindow, answer_question: Answer) -> None:
    answer_question(Button.Discard)
    change(window)
    window.files.new()
    assert window.document.plan == DEFAULT_PLAN
    assert not window.isWindowModified()


def test_save_writes_first_and_a_cancelled_save_stays(
    window: MainWindow, answer_question: Answer, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    answer_question(Button.Save)
    change(window)
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_args: ("", ""))
    window.files.new()
    assert window.document.plan == CAESIUM
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_args: (str(tmp_path / "kept"), ""))
    window.files.new()
    assert window.document.plan == DEFAULT_PLAN
    assert read_plan(tmp_path / "kept.toml") == CAESIUM


def test_title_and_mark_follow_the_file_and_the_clean_state(window: MainWindow, plan_file: Path) -> None:
    window.files.read(plan_file)
    assert window.windowTitle() == "caesium.toml[*] – Coldward"
    assert not window.isWindowModified()
    window.document.edit(DEFAULT_PLAN, "everything")
    assert window.isWindowModified()
    window.document.stack.undo()
    assert not window.isWindowModified()


def test_comments_of_the_file_survive_a_save(window: MainWindow, plan_file: Path) -> None:
    plan_file.write_text("# measured on a Friday\n" + plan_file.read_text())
    window.files.read(plan_file)
    window.document.edit(replace(window.document.plan, title="other"), "title")
    assert window.files.save()
    assert plan_file.read_text().startswith("# measured on a Friday\n")
    assert read_plan(plan_file).title == "other"


@pytest.mark.parametrize(
    "content",
    [b"\x00\xff\xfe binary", b"coldward = 99\n", b"[species\n", b"coldward = 1\n[cloud]\natoms = 'many'\n", None],
    ids=["binary", "newer", "not TOML", "bad value", "missing"],
)
def test_a_file_that_cannot_be_read_gives_one_sentence_and_changes_nothing(
    window: MainWindow, tmp_path: Path, content: bytes | None
) -> None:
    path = tmp_path / "bad.toml"
    if content is not None:
        path.write_bytes(content)
    before = window.document.plan
    assert not window.files.read(path)
    assert window.document.plan == before
    assert "bad.toml" in window.banner.text
    assert "Traceback" not in window.banner.text
    assert "\n" not in window.banner.text


def test_a_folder_that_cannot_be_written_keeps_the_plan_unsaved(
    window: MainWindow, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    change(window)
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_args: (str(tmp_path / "none" / "a.toml"), ""))
    assert not window.files.save()
    assert window.isWindowModified()
    assert "could not be written" in window.banner.text
    assert "still here, unsaved" in window.banner.text


def test_recent_files_open_again_and_missing_ones_are_greyed(window: MainWindow, plan_file: Path) -> None:
    other = plan_file.with_name("other.toml")
    save_plan(DEFAULT_PLAN, other)
    for path in (plan_file, other):
        window.files.read(path)
    other.unlink()
    window._recent.aboutToShow.emit()
    present = {action.text(): action.isEnabled() for action in window._recent.actions()}
    assert present == {"&1 other.toml (no longer there)": False, "&2 caesium.toml": True}
    window._recent.actions()[1].trigger()
    assert window.document.path == plan_file


def test_recent_files_and_the_last_folder_come_back_in_the_next_session(make_window, plan_file: Path) -> None:
    first = make_window()
    first.files.read(plan_file)
    first.close()
    second = make_window()
    assert [file.path for file in second.settings.recent] == [plan_file]
    assert second.settings.last_folder == plan_file.parent
    assert second.desk.map.folder == plan_file.parent


def dragged(path: Path) -> QMimeData:
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(path))])
    return data


def test_a_dropped_plan_opens(window: MainWindow, plan_file: Path) -> None:
    path = window.files.droppable(dragged(plan_file))
    assert path is not None
    window.files.drop(path)
    assert window.document.plan == CAESIUM


def test_another_dropped_file_is_refused_in_words(window: MainWindow, tmp_path: Path) -> None:
    before = window.document.plan
    window.files.drop(tmp_path / "photo.png")
    assert window.document.plan == before
    assert "photo.png is not a plan" in window.banner.text
