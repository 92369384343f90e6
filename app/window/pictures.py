"""Pictures of the window itself: every page and some dialogs, as PNG files named for what they show."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QDeadlineTimer, QEventLoop, QThread
from PySide6.QtWidgets import QApplication, QWidget

from app.widgets.limits_dialog import LimitsDialog
from app.window.dialogs import AboutDialog, shortcuts_dialog
from app.window.main_window import MainWindow

PATIENCE_MS = 120_000


def grab_all(window: MainWindow, folder: Path) -> tuple[Path, ...]:
    """Write a picture of every page and dialog; returns the files.

    Raises OSError where the folder cannot be written.
    """
    folder.mkdir(parents=True, exist_ok=True)
    written = []
    desk = window.desk
    for page in desk.pages:
        desk.tabs.setCurrentWidget(page)
        settle(window)
        written.append(_grab(window, folder / f"{page.title.lower()}.png"))
    if desk.folded:
        desk.show_readouts()
        settle(window)
        written.append(_grab(window, folder / "readouts.png"))
    desk.tabs.setCurrentWidget(desk.map)
    settle(window)
    dialogs: dict[str, Callable[[], QWidget]] = {
        "about": lambda: AboutDialog(window),
        "limits": lambda: LimitsDialog(desk.map.plot.picture(), window),
        "shortcuts": lambda: shortcuts_dialog(window),
    }
    for name, build in dialogs.items():
        dialog = build()
        dialog.show()
        settle(window)
        written.append(_grab(dialog, folder / f"{name}.png"))
        dialog.close()
        dialog.deleteLater()
    return tuple(written)


def settle(window: MainWindow) -> None:
    """Let everything that is under way arrive and be painted."""
    deadline = QDeadlineTimer(PATIENCE_MS)
    quiet = 0
    while quiet < 3 and not deadline.hasExpired():
        QApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
        QApplication.sendPostedEvents()
        quiet = quiet + 1 if window.answers.settled else 0
        QThread.msleep(2)


def _grab(widget: QWidget, path: Path) -> Path:
    if not widget.grab().save(str(path), "PNG"):
        raise OSError(f"cannot write {path}")
    return path
