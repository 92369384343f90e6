"""A window that is closed and deleted takes all that it was made of with it, however much of it was used."""

import gc
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from weakref import ref

from PySide6.QtCore import QEvent, QSize
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot
from shiboken6 import delete

from app.passenger_edits import with_usual_passenger
from app.plan import DEFAULT_PLAN, plan_with
from app.ramp_edits import usual_ramp
from app.window.desk import PAGES
from app.window.dialogs import AboutDialog
from app.window.main_window import MainWindow
from app.window.settings import Settings, ThemeChoice


def used_window(folder: Path, settle: Callable[[MainWindow], None]) -> MainWindow:
    """A window all of whose pages were looked at, and that was worked with."""
    window = MainWindow(Settings(folder), size=QSize(1400, 900))
    window.show()
    plan = with_usual_passenger(replace(DEFAULT_PLAN, ramp=usual_ramp(DEFAULT_PLAN)))
    window.furnish(plan, theme=ThemeChoice.LIGHT)
    for place in range(len(PAGES)):
        window.desk.show_page(place)
        settle(window)
    window.desk.show_page(list(PAGES).index("Ramp"))
    window.desk.ramp.panel.choose_view("Stages")
    settle(window)
    window.document.edit(plan_with(plan, {"cloud.temperature": "300 nK"}), "temperature")
    settle(window)
    window.document.stack.undo()
    window.looks.choose(ThemeChoice.DARK)
    window.resize(900, 700)
    window.desk.show_readouts()
    window.desk.readouts.why_asked.emit("critical_temperature")
    dialog = AboutDialog(window)
    dialog.show()
    dialog.close()
    dialog.deleteLater()
    settle(window)
    return window


def test_nothing_of_a_window_stays(qtbot: QtBot, tmp_path: Path, settle: Callable[[MainWindow], None]) -> None:
    before = QApplication.topLevelWidgets()
    window = used_window(tmp_path, settle)
    pages = window.desk.built_pages
    assert len(pages) == len(PAGES)
    parts = [window, window.desk, window.answers, window.document, window.files, window.why, window.why.dialog, *pages]
    plots = [plot for page in pages for plot in page.plots]
    kept = [ref(part) for part in (*parts, *plots, *(plot.canvas.figure for plot in plots))]
    window.document.stack.setClean()
    window.close()
    delete(window)
    del window, parts, pages, plots
    QApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
    gc.collect()
    assert [left() for left in kept if left() is not None] == []
    assert [widget for widget in QApplication.topLevelWidgets() if widget not in before] == []
