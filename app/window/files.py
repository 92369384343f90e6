"""Reading and writing plan files, and never losing one: New, Open, Save, Save as, recent files, dropped files."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path

from PySide6.QtCore import QMimeData, QObject
from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget

from app.plan import DEFAULT_PLAN, read_plan, save_plan
from app.window.settings import Settings
from app.window.undo import Document

FILTER = "Coldward plans (*.toml);;All files (*)"
UNTITLED = "untitled plan"
Tell = Callable[[str], None]


class Files(QObject):
    """The file commands of one window. `tell` shows one sentence to the user; `problems` are those of the fields."""

    def __init__(
        self, document: Document, settings: Settings, window: QWidget, tell: Tell, problems: Callable[[], Sequence[str]]
    ) -> None:
        super().__init__(window)
        self._document, self._settings, self._window, self._tell = document, settings, window, tell
        self._problems = problems

    @property
    def name(self) -> str:
        """What the plan is called on the screen."""
        return self._document.path.name if self._document.path else UNTITLED

    def new(self) -> None:
        if self.may_leave():
            self._document.load(DEFAULT_PLAN, None, None)

    def open(self) -> None:
        """Ask for a file and read it."""
        if not self.may_leave():
            return
        chosen, _ = QFileDialog.getOpenFileName(self._window, "Open a plan", str(self._settings.last_folder), FILTER)
        if chosen:
            self.read(Path(chosen))

    def open_path(self, path: Path) -> None:
        """Read a file that was named some other way (recent, dropped), after asking about unsaved changes."""
        if self.may_leave():
            self.read(path)

    def read(self, path: Path) -> bool:
        """Show the plan of a file. A file that cannot be read changes nothing and is told of in one sentence."""
        try:
            plan = read_plan(path)
        except OSError as error:
            self._tell(f"{path} cannot be read: {error.strerror or error}.")
        except ValueError as error:
            self._tell(str(error))
        else:
            self._document.load(plan, path, plan.source)
            self._settings.remember_file(path)
            return True
        return False

    def recover(self, copy: Path) -> None:
        """Show the copy of a lost session as an unsaved plan; the copy goes once it is on show."""
        if not self.may_leave():
            return
        try:
            plan = read_plan(copy)
        except (OSError, ValueError) as error:
            self._tell(f"The copy cannot be read: {error}")
        else:
            self._document.load(plan, None, None)
            self._document.stack.resetClean()
            copy.unlink(missing_ok=True)

    def save(self) -> bool:
        """Write the plan to its file, or ask for one; True if it was written."""
        return self._write(self._document.path) if self._document.path else self.save_as()

    def save_as(self) -> bool:
        start = self._document.path or self._settings.last_folder / "plan.toml"
        chosen, _ = QFileDialog.getSaveFileName(self._window, "Save the plan", str(start), FILTER)
        if not chosen:
            return False
        path = Path(chosen)
        return self._write(path if path.suffix else path.with_suffix(".toml"))

    def _write(self, path: Path) -> bool:
        try:
            text = save_plan(self._document.plan, path, self._document.file_text)
        except ValueError as error:
            self._tell(f"{error}; the plan is still here, unsaved.")
            return False
        self._document.saved(path, text)
        if self._problems():
            self._tell(f"{path.name} was saved with the last good value of the field that cannot be read.")
        self._settings.remember_file(path)
        return True

    def may_leave(self) -> bool:
        """Whether the present plan may be replaced: it is saved, or the user says what to do with the changes."""
        if self._document.clean:
            return True
        buttons = QMessageBox.StandardButton
        answer = QMessageBox.warning(
            self._window,
            "Unsaved changes",
            f"Save the changes to {self.name}?",
            buttons.Save | buttons.Discard | buttons.Cancel,
            buttons.Save,
        )
        if answer == buttons.Save:
            return self.save()
        return bool(answer == buttons.Discard)

    def droppable(self, data: QMimeData) -> Path | None:
        """The one local file that is being dragged; None if it is something else."""
        urls = data.urls() if data.hasUrls() else []
        return Path(urls[0].toLocalFile()) if len(urls) == 1 and urls[0].isLocalFile() else None

    def drop(self, path: Path) -> None:
        """Open a dropped plan; say so when it is no plan."""
        if path.suffix.lower() == ".toml":
            self.open_path(path)
        else:
            self._tell(f"{path.name} is not a plan: drop a plan file, which ends in .toml.")
