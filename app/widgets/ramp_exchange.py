"""A ramp and its waypoints out of the window, as tables and on paper, and a ramp in again."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal
from PySide6.QtWidgets import QDialog, QFileDialog

from app.ramp_table import read_ramp_table
from app.widgets.ramp_table_dialog import RampTableDialog

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.plan import Plan
    from app.widgets.page import Page

_LONGEST_NAME = 80


class RampExchange(QObject):
    """Asks for files on behalf of a page. stage_read(StageChoice) is sent with the ramp of a table, as one stage."""

    stage_read = Signal(object)

    def __init__(self, page: Page) -> None:
        super().__init__(page)
        self._page = page

    def ask_save_table(self, plan: Plan, answer: RampAnswer | None) -> None:
        """Ask how the ramp is to be written as a table, and where to."""
        page = self._page
        try:
            dialog = RampTableDialog(plan, answer, page)
        except ValueError as error:
            page.told.emit(f"{error}.")
            return
        if dialog.exec() == QDialog.DialogCode.Accepted:
            self._save("Save the ramp", "ramp.csv", dialog.text)
        dialog.deleteLater()

    def ask_read_table(self) -> None:
        """Ask for a table."""
        page = self._page
        chosen, _ = QFileDialog.getOpenFileName(page, "Read a ramp", str(page.folder), "CSV (*.csv);;All files (*)")
        if chosen:
            self.read_table(Path(chosen))

    def read_table(self, path: Path) -> None:
        """Read the table of a file; one that cannot be read is told of in one sentence."""
        page = self._page
        try:
            stage = read_ramp_table(path.read_text(encoding="utf-8"), path.name).stage(label=path.stem[:_LONGEST_NAME])
        except UnicodeDecodeError:
            page.told.emit(f"{path.name} is not a text in UTF-8.")
        except OSError as error:
            page.told.emit(f"{path} cannot be read: {error.strerror or error}.")
        except ValueError as error:
            page.told.emit(f"{error}.")
        else:
            page.folder_used.emit(path.parent)
            self.stage_read.emit(stage)

    def save_waypoints(self, text: str) -> None:
        """Ask where to write a table of waypoints."""
        self._save("Save the waypoints", "waypoints.csv", text)

    def print_waypoints(self, html: str) -> None:
        """Ask for a printer."""
        from PySide6.QtGui import QTextDocument
        from PySide6.QtPrintSupport import QPrintDialog, QPrinter

        printer = QPrinter(QPrinter.PrinterMode.HighResolution)
        if QPrintDialog(printer, self._page).exec():
            document = QTextDocument()
            document.setHtml(html)
            document.print_(printer)

    def _save(self, title: str, name: str, text: str) -> None:
        page = self._page
        chosen, _ = QFileDialog.getSaveFileName(page, title, str(page.folder / name), "CSV (*.csv)")
        if chosen:
            path = Path(chosen)
            page.write(path if path.suffix else path.with_suffix(".csv"), text.encode("utf-8"))
