"""The readouts: every quantity of the answer under its heading, in the unit the reader chose."""

from __future__ import annotations

from collections.abc import Mapping
from functools import partial

from PySide6.QtCore import QModelIndex, QPoint, Qt, Signal
from PySide6.QtGui import QContextMenuEvent, QGuiApplication, QKeyEvent, QKeySequence
from PySide6.QtWidgets import QAbstractItemView, QFrame, QMenu, QTreeView, QWidget

from app.engine import CloudAnswer
from app.quantities import QUANTITIES
from app.widgets.readings import Reading, Readings, interval_text
from app.widgets.readout_model import AnyIndex, ReadoutModel, ReadoutPainter


class Readouts(QTreeView):
    """The readouts pane. unit_chosen(name, unit) is sent when the reader picks another unit for a quantity;
    detail_changed(str) with formula, source and range when another quantity is selected; why_asked(name) when the
    reader wants to see how a number is worked out."""

    unit_chosen = Signal(str, str)
    detail_changed = Signal(str)
    why_asked = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("readouts")
        self.setAccessibleName("Readouts")
        self.setWhatsThis(
            "All quantities of the present cloud. Return chooses a unit, Ctrl+C copies a value, Ctrl+I shows how it is "
            "worked out."
        )
        self._model = ReadoutModel(self)
        self.setModel(self._model)
        self.setItemDelegate(ReadoutPainter(self._model, self))
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setRootIsDecorated(False)
        self.setIndentation(0)
        self.setItemsExpandable(False)
        self.setHeaderHidden(True)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setTabKeyNavigation(False)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self._model.modelReset.connect(self.expandAll)
        self.activated.connect(self._choose_at)
        self.selectionModel().currentChanged.connect(self._tell_detail)

    def _tell_detail(self, index: QModelIndex) -> None:
        self.detail_changed.emit(self._model.tip_at(index))

    def take_focus(self) -> None:
        """Give the keyboard to the readouts, on the quantity it was on, or on the first."""
        self.setFocus()
        if not self.currentIndex().isValid() and self._model.rowCount():
            self.setCurrentIndex(self._model.index(0, 0, self._model.index(0, 0)))

    @property
    def stale(self) -> bool:
        return self._model.stale

    def show_answer(self, answer: CloudAnswer, chosen_units: Mapping[str, str]) -> None:
        """Show a current answer in these units, or where none is chosen in the one that suits."""
        self._model.show_readings(Readings(answer, chosen_units), partial(interval_text, answer))

    def mark_stale(self) -> None:
        """Keep the numbers on show, marked as not current."""
        self._model.mark_stale()

    def reading(self, name: str) -> Reading:
        """What is on show for a quantity."""
        return self._model.reading_of(QUANTITIES[name])

    def copy(self) -> None:
        """The selected values with their units, one a line."""
        rows = sorted(self.selectionModel().selectedRows(), key=lambda index: (index.internalId(), index.row()))
        chosen = [row for index in rows if (row := self._model.row_at(index))]
        if chosen:
            QGuiApplication.clipboard().setText("\n".join(self._model.reading_of(row).text for row in chosen))

    def copy_all(self) -> None:
        """Every readout, as tab-separated text."""
        QGuiApplication.clipboard().setText(self._model.table_text())

    def menu_at(self, index: AnyIndex) -> QMenu | None:
        """The choices for the quantity at an index: its units, and copying."""
        row = self._model.row_at(index)
        if row is None:
            return None
        menu = QMenu(self)
        menu.addAction("Why this number…").triggered.connect(lambda: self.why_asked.emit(row.name))
        menu.addSeparator()
        present = self._model.reading_of(row).unit
        for unit in row.units if len(row.units) > 1 else ():
            action = menu.addAction(f"in {unit}" if unit != "1" else "as a plain number")
            action.setCheckable(True)
            action.setChecked(present == (unit if unit != "1" else ""))
            action.triggered.connect(lambda _=False, chosen=unit: self.unit_chosen.emit(row.name, chosen))
        if len(row.units) > 1:
            menu.addSeparator()
        menu.addAction("Copy value").triggered.connect(self.copy)
        menu.addAction("Copy all readouts").triggered.connect(self.copy_all)
        return menu

    def ask_why(self) -> None:
        """Ask how the current quantity is worked out; the first one where a heading or nothing is current.

        A plan that was never answered has none to ask of.
        """
        if not self._model.rowCount():
            return
        row = self._model.row_at(self.currentIndex())
        if row is None:
            group = self._model.index(max(self.currentIndex().row(), 0), 0)
            row = self._model.row_at(self._model.index(0, 0, group))
        if row is not None:
            self.why_asked.emit(row.name)

    def _choose_at(self, index: QModelIndex) -> None:
        self._open_menu(index, self.viewport().mapToGlobal(self.visualRect(index).bottomLeft()))

    def _open_menu(self, index: AnyIndex, place: QPoint) -> None:
        if (menu := self.menu_at(index)) is not None:
            menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
            menu.popup(place)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        index = self.indexAt(event.pos())
        if not self.selectionModel().isSelected(index):
            self.setCurrentIndex(index)
        self._open_menu(index, event.globalPos())

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self.currentIndex().isValid():
            self._choose_at(self.currentIndex())
        else:
            super().keyPressEvent(event)
