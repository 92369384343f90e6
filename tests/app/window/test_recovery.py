"""Work survives errors: one notice with details, a copy of the plan, an offer at the next start."""

import sys
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import QTimer
from PySide6.QtGui import QGuiApplication
from pytestqt.qtbot import QtBot

from app.plan import DEFAULT_PLAN, read_plan
from app.window.main_window import MainWindow
from app.window.recovery import details, install_excepthook, summary

CHANGED = replace(DEFAULT_PLAN, title="not to be lost")


@pytest.mark.qt_no_exception_capture
def test_an_exception_nobody_caught_is_told_with_details_and_a_copy_of_the_plan(
    window: MainWindow, qtbot: QtBot, tmp_path: Path, troubles: list[str]
) -> None:
    window.document.edit(CHANGED, "title")

    def slot() -> None:
        raise RuntimeError("the slot broke")

    QTimer.singleShot(0, slot)
    qtbot.waitUntil(lambda: "the slot broke" in window.banner.text)
    assert "Traceback" not in window.banner.text
    assert window.isVisible()
    assert window.document.plan == CHANGED
    copy = window.recovery.copy_path
    assert copy.is_relative_to(tmp_path / "settings")
    assert str(copy) in window.banner.text
    assert read_plan(copy) == CHANGED
    button = window.banner.offers()[0]
    assert button.text() == "Copy details"
    button.click()
    copied = QGuiApplication.clipboard().text()
    assert copied.startswith("Coldward ")
    assert "Traceback" in copied
    assert "RuntimeError: the slot broke" in copied
    assert troubles == [copied]
    assert window.banner.text


def test_the_hook_leaves_interrupts_alone_and_goes_back(monkeypatch: pytest.MonkeyPatch) -> None:
    seen: list[type[BaseException]] = []
    monkeypatch.setattr(sys, "excepthook", lambda kind, _error, _trace: seen.append(kind))
    told: list[str] = []
    restore = install_excepthook(lambda sentence, _details: told.append(sentence), lambda: None)
    sys.excepthook(KeyboardInterrupt, KeyboardInterrupt(), None)
    assert seen == [KeyboardInterrupt]
    sys.excepthook(ValueError, ValueError("odd\nvalue"), None)
    assert told == ["Something went wrong inside Coldward: odd value (ValueError)."]
    restore()
    sys.excepthook(ValueError, ValueError(), None)
    assert seen == [KeyboardInterrupt, ValueError]


def test_unsaved_changes_are_copied_aside_after_a_rest_and_dropped_once_saved(window: MainWindow, qtbot: QtBot) -> None:
    window.recovery._timer.setInterval(10)
    window.document.edit(CHANGED, "title")
    qtbot.waitUntil(window.recovery.copy_path.exists)
    assert read_plan(window.recovery.copy_path) == CHANGED
    window.document.stack.undo()
    assert not window.recovery.copy_path.exists()


def test_further_edits_do_not_put_the_copy_off(window: MainWindow, qtbot: QtBot) -> None:
    timer = window.recovery._timer
    timer.setInterval(60_000)
    window.document.edit(replace(CHANGED, title="first"), "title", "drag")
    left = timer.remainingTime()
    qtbot.waitUntil(lambda: timer.remainingTime() < left)
    left = timer.remainingTime()
    window.document.edit(replace(CHANGED, title="second"), "title", "drag")
    assert timer.isActive()
    assert timer.remainingTime() <= left


def test_two_sessions_of_one_process_number_keep_two_copies(make_window) -> None:
    # The system gives a number again once its process is gone.
    first, second = make_window(), make_window()
    assert first.recovery.copy_path != second.recovery.copy_path


def leave_behind(folder: Path, content: str) -> Path:
    """What a session that was killed leaves: a copy whose lock nobody holds."""
    path = folder / "recovery" / "session-999999.toml"
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(content, encoding="utf-8")
    return path


def test_the_next_start_offers_the_copy_and_opens_it_unsaved(make_window, tmp_path: Path) -> None:
    from app.plan import write_plan

    copy = leave_behind(tmp_path / "settings", write_plan(CHANGED))
    window = make_window()
    assert "a copy of it was kept" in window.banner.text
    window.banner.offers()[0].click()
    assert window.document.plan == CHANGED
    assert window.isWindowModified()
    assert not copy.exists()


def test_a_copy_that_cannot_be_read_does_not_stop_the_start(make_window, tmp_path: Path) -> None:
    leave_behind(tmp_path / "settings", "\x00 garbage")
    window = make_window()
    window.banner.offers()[0].click()
    assert "cannot be read" in window.banner.text
    assert window.document.plan == DEFAULT_PLAN


def test_a_copy_of_a_session_that_is_alive_is_not_offered(make_window, tmp_path: Path) -> None:
    from PySide6.QtCore import QLockFile

    path = leave_behind(tmp_path / "settings", "")
    lock = QLockFile(str(path.with_suffix(".lock")))
    assert lock.tryLock(0)
    window = make_window()
    assert window.banner.text == ""
    lock.unlock()


def test_a_summary_is_one_line() -> None:
    assert summary(ValueError("two\nlines")) == "two lines (ValueError)"
    assert summary(KeyError()) == "KeyError"
    assert details(ValueError("x")).splitlines()[0].startswith("Coldward ")
