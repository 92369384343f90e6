"""What the window remembers between sessions: look, size, recent files, chosen units.

One ini file in the user's settings folder, or in the folder given by `--settings-dir`, which then also holds the
recovery copies. A file that cannot be understood is set aside under another name, with a notice, and the defaults
are used: remembered state never stops a start.
"""

from __future__ import annotations

import contextlib
from collections.abc import Iterable
from dataclasses import dataclass
from enum import Enum
from pathlib import Path

import platformdirs
from PySide6.QtCore import QByteArray, QRect, QSettings

VERSION = 1
RECENT_LIMIT = 10
FILE_NAME = "coldward.ini"
# Qt writes groups in alphabetical order: this key comes last in the file, so a file cut short lacks it.
END_MARK = "written/whole"


class ThemeChoice(Enum):
    """Which look to use: the system's own, or always one of the two."""

    SYSTEM = "system"
    LIGHT = "light"
    DARK = "dark"


@dataclass(frozen=True)
class RecentFile:
    """A plan opened before, and whether its file is still there."""

    path: Path
    present: bool


class Settings:
    """Typed access to the settings file. `notice` is a sentence for the user if the file had to be set aside."""

    def __init__(self, folder: Path | None = None) -> None:
        self.folder = folder or Path(platformdirs.user_config_dir("coldward", appauthor=False))
        self.state_folder = folder or Path(platformdirs.user_state_dir("coldward", appauthor=False))
        self.notice: str | None = None
        # A folder that cannot be written only means that nothing is remembered.
        with contextlib.suppress(OSError):
            self.folder.mkdir(parents=True, exist_ok=True)
        path = self.folder / FILE_NAME
        if path.exists() and (trouble := _trouble_with(path)):
            self._set_aside(path, trouble)
        self._store = QSettings(str(path), QSettings.Format.IniFormat)

    def _set_aside(self, path: Path, trouble: str) -> None:
        aside = path.with_suffix(".unreadable.ini")
        try:
            path.replace(aside)
        except OSError as error:
            why = error.strerror or error
            self.notice = f"The settings file {path} {trouble}; defaults are used, and it cannot be moved: {why}."
        else:
            self.notice = f"The settings file {trouble}: it was set aside as {aside}, and the defaults are used."

    def flush(self) -> None:
        """Write what is still in memory; the toolkit does so atomically and under a lock."""
        self._store.setValue("version", VERSION)
        self._store.setValue(END_MARK, True)
        self._store.sync()

    def text(self, key: str, default: str = "") -> str:
        value = self._store.value(key, default)
        return value if isinstance(value, str) else default

    def texts(self, key: str) -> tuple[str, ...]:
        value = self._store.value(key)
        if isinstance(value, str):  # Qt gives a list of one back as a bare text
            return (value,) if value else ()
        return tuple(item for item in value if isinstance(item, str)) if isinstance(value, list) else ()

    def blob(self, key: str) -> QByteArray:
        value = self._store.value(key)
        return value if isinstance(value, QByteArray) else QByteArray()

    def put(self, key: str, value: str | QByteArray | Iterable[str]) -> None:
        self._store.setValue(key, value if isinstance(value, str | QByteArray) else list(value))

    @property
    def theme(self) -> ThemeChoice:
        try:
            return ThemeChoice(self.text("view/theme", ThemeChoice.SYSTEM.value))
        except ValueError:
            return ThemeChoice.SYSTEM

    @theme.setter
    def theme(self, choice: ThemeChoice) -> None:
        self.put("view/theme", choice.value)

    @property
    def last_folder(self) -> Path:
        """Where a file dialog starts: the folder used last, if it is still there."""
        folder = Path(self.text("files/last_folder") or Path.home())
        return folder if folder.is_dir() else Path.home()

    @last_folder.setter
    def last_folder(self, folder: Path) -> None:
        self.put("files/last_folder", str(folder))

    @property
    def recent(self) -> tuple[RecentFile, ...]:
        return tuple(RecentFile(Path(text), Path(text).is_file()) for text in self.texts("files/recent"))

    def remember_file(self, path: Path) -> None:
        """Put a file at the head of the recent ones."""
        path = path.resolve()
        others = [str(recent.path) for recent in self.recent if recent.path != path]
        self.put("files/recent", [str(path), *others][:RECENT_LIMIT])
        self.last_folder = path.parent

    @property
    def units(self) -> dict[str, str]:
        """Units chosen for readouts, by quantity name."""
        pairs = (text.split("=", 1) for text in self.texts("view/units"))
        return {pair[0]: pair[1] for pair in pairs if len(pair) == 2}

    @units.setter
    def units(self, chosen: dict[str, str]) -> None:
        self.put("view/units", [f"{name}={unit}" for name, unit in chosen.items()])


def _trouble_with(path: Path) -> str | None:
    """What is wrong with a settings file, as the rest of a sentence; None if nothing is."""
    try:
        raw = path.read_bytes()
    except OSError as error:
        return f"cannot be read ({error.strerror})"
    store = QSettings(str(path), QSettings.Format.IniFormat)
    if store.status() != QSettings.Status.NoError or b"\0" in raw:
        return "cannot be understood"
    version = str(store.value("version", ""))
    if not version.isdigit():
        return "cannot be understood"
    if int(version) > VERSION:
        return f"was written by a newer Coldward (settings version {version}, this one knows {VERSION})"
    return None if store.contains(END_MARK) else "is cut short"


def rectangle_on_screens(wanted: QRect, screens: Iterable[QRect]) -> QRect:
    """The rectangle, made to fit a screen: shrunk to the screen nearest to its centre and moved inside it."""
    areas = list(screens)
    if not areas:
        return wanted

    def distance(area: QRect) -> int:
        offset = area.center() - wanted.center()
        return 0 if area.contains(wanted.center()) else offset.x() ** 2 + offset.y() ** 2

    area = min(areas, key=distance)
    width, height = min(wanted.width(), area.width()), min(wanted.height(), area.height())
    left = min(max(wanted.left(), area.left()), area.right() + 1 - width)
    top = min(max(wanted.top(), area.top()), area.bottom() + 1 - height)
    return QRect(left, top, width, height)
