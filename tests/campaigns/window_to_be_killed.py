"""A window that edits itself until it is killed, or that looks what a killed one left; run as a script.

    python window_to_be_killed.py edit PLAN SETTINGS SEED     edits, and saves now and then, until it is killed
    python window_to_be_killed.py look PLAN SETTINGS          opens the copy that is offered and says what it holds

Both print one JSON object a line. `edit` says which plan it is about to have or to save, and in `copied` when the last
edit is old enough to be in the copy.
"""

from __future__ import annotations

import json
import random
import sys
from dataclasses import replace
from pathlib import Path

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication

from app.plan import read_plan, write_plan
from app.window import recovery, start
from app.window.main_window import MainWindow
from app.window.start import Wishes, application, open_window

COPY_AFTER_MS = 150


def say(**facts: object) -> None:
    print(json.dumps(facts), flush=True)


def window_of() -> MainWindow | None:
    windows = [widget for widget in QApplication.topLevelWidgets() if isinstance(widget, MainWindow)]
    return windows[0] if windows and windows[0].furnished else None


class Editor:
    """Gives the plan of a window one title after another."""

    def __init__(self, seed: str) -> None:
        self.chance, self.number = random.Random(seed), 0
        self.timer = QTimer()
        self.timer.timeout.connect(self.act)
        self.timer.start(10)

    def act(self) -> None:
        window = window_of()
        if window is None:
            return
        if self.number and self.chance.random() < 0.03:
            say(saving=window.document.plan.title)
            window.files.save()
            say(saved=window.document.plan.title)
        else:
            self.number += 1
            title = f"edit {self.number} " + "x" * self.chance.randrange(120)
            say(edit=title)
            window.document.edit(replace(window.document.plan, title=title), "title")


class Looker:
    """Waits for the offer, takes it, and tells what is there."""

    def __init__(self) -> None:
        self.timer = QTimer()
        self.timer.timeout.connect(self.act)
        self.timer.start(50)

    def act(self) -> None:
        window = window_of()
        if window is None or not window.answers.settled:
            return
        self.timer.stop()
        offers = window.banner.offers() if window.banner.text else ()
        told = window.banner.text
        opened = window.document.plan.title
        if offers:
            offers[0].click()
        say(told=told, opened=opened, recovered=window.document.plan.title, unsaved=window.isWindowModified())
        window.document.stack.setClean()
        window.close()


def main() -> int:
    task, plan, settings = sys.argv[1], Path(sys.argv[2]), Path(sys.argv[3])
    recovery.COPY_AFTER_MS = COPY_AFTER_MS
    application()
    assert start is not None
    assert write_plan(read_plan(plan))
    actor = Editor(sys.argv[4]) if task == "edit" else Looker()
    status = open_window(Wishes(plan_path=plan, settings_folder=settings))
    actor.timer.stop()
    return status


if __name__ == "__main__":
    raise SystemExit(main())
