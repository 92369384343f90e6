"""From nothing to a window: first an empty one on the screen, then everything that takes time to load."""

from __future__ import annotations

import gc
import os
import sys
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt, QTimer
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QApplication

from app.window.main_window import FIRST_SIZE, MainWindow
from app.window.settings import Settings, ThemeChoice

if TYPE_CHECKING:
    from app.plan import Plan


@dataclass(frozen=True, kw_only=True)
class Wishes:
    """What the command line asks of the window."""

    plan_path: Path | None = None
    settings_folder: Path | None = None
    theme: ThemeChoice | None = None
    size: QSize | None = None
    pictures: Path | None = None


def application() -> QApplication:
    """The one application object, made with our style and names."""
    present = QApplication.instance()
    if isinstance(present, QApplication):
        return present
    os.environ.setdefault("QT_API", "pyside6")  # the plotting library must use the same toolkit
    QGuiApplication.setHighDpiScaleFactorRoundingPolicy(Qt.HighDpiScaleFactorRoundingPolicy.PassThrough)
    made = QApplication(["coldward"])
    made.setApplicationName("Coldward")
    made.setDesktopFileName("coldward")
    made.setStyle("Fusion")
    return made


def open_window(wishes: Wishes) -> int:
    """Show the window and run it to its end, or write its pictures; the exit status.

    A plan that cannot be read is told of in the window; where only pictures are wanted, on stderr with status 1.
    """
    app = application()
    if wishes.pictures is None or wishes.settings_folder is not None:
        return _run(app, Settings(wishes.settings_folder), wishes)
    # Pictures show the program, not what one user has made of it, and leave that alone.
    with TemporaryDirectory(prefix="coldward-") as folder:
        return _run(app, Settings(Path(folder)), wishes)


def _run(app: QApplication, settings: Settings, wishes: Wishes) -> int:
    size = wishes.size or (FIRST_SIZE if wishes.pictures is not None else None)
    window = MainWindow(settings, size=size)
    status: list[int] = []

    def furnish() -> None:
        try:
            furnish_window(window, wishes)
            if wishes.pictures is not None:
                status.append(_take_pictures(window, wishes))
        except Exception as error:
            # Nobody could see a notice yet, or nobody is looking: the program ends with one sentence.
            print(f"coldward: the window cannot be built: {type(error).__name__}: {error}", file=sys.stderr)
            status.append(1)
        if status:
            window.end()
            app.quit()

    if wishes.pictures is not None and wishes.plan_path is not None and (problem := _problem_of(wishes.plan_path)):
        print(f"coldward: {problem}", file=sys.stderr)
        return 1
    window.first_painted.connect(lambda: QTimer.singleShot(0, furnish))
    window.show()
    app.exec()
    return status[0] if status else 0


def furnish_window(window: MainWindow, wishes: Wishes) -> None:
    """Load the rest and show the plan. What is made now lives as long as the window: the collector looks at it neither
    meanwhile, which takes a tenth of a start, nor ever after."""
    gc.disable()
    try:
        plan, problem = _first_plan(wishes.plan_path)
        window.furnish(plan, theme=wishes.theme)
        if wishes.plan_path is not None and not problem:
            window.files.read(wishes.plan_path)
        if problem:
            window.tell(problem)
    finally:
        gc.freeze()
        gc.enable()


def _first_plan(path: Path | None) -> tuple[Plan, str]:
    """The plan to start with, and what was wrong with the file asked for."""
    from app.plan import DEFAULT_PLAN, read_plan

    if path is None:
        return DEFAULT_PLAN, ""
    try:
        return read_plan(path), ""
    except OSError as error:
        return DEFAULT_PLAN, f"{path} cannot be read: {error.strerror or error}."
    except ValueError as error:
        return DEFAULT_PLAN, str(error)


def _problem_of(path: Path) -> str:
    return _first_plan(path)[1]


def _take_pictures(window: MainWindow, wishes: Wishes) -> int:
    from app.window.pictures import grab_all, settle

    assert wishes.pictures is not None
    settle(window)
    if window.answers.cloud is None:
        print(f"coldward: {window.answers.failure}", file=sys.stderr)
        return 1
    try:
        for path in grab_all(window, wishes.pictures):
            print(path)
    except OSError as error:
        print(f"coldward: {error}", file=sys.stderr)
        return 1
    return 0
