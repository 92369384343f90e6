"""The menu of plans that were open lately."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtWidgets import QMenu, QWidget

from app.window.settings import Settings


class RecentMenu(QMenu):
    """Made anew whenever it opens; `open_path` is called with what is chosen."""

    def __init__(self, settings: Settings, open_path: Callable[[Path], object], parent: QWidget) -> None:
        super().__init__("Open &recent", parent)
        self._settings = settings
        self._open_path = open_path
        self.aboutToShow.connect(self._fill)

    def _fill(self) -> None:
        self.clear()
        recent = self._settings.recent
        for number, file in enumerate(recent, start=1):
            missing = "" if file.present else " (no longer there)"
            action = self.addAction(f"&{number % 10} {file.path.name}{missing}")
            action.setToolTip(str(file.path))
            action.setEnabled(file.present)
            action.triggered.connect(lambda _=False, path=file.path: self._open_path(path))
        if not recent:
            self.addAction("No plan opened yet").setEnabled(False)
