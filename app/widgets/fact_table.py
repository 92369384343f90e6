"""A small table of texts to read, as high as its rows, whose rows can be chosen and copied."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QFont, QGuiApplication
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHeaderView,
    QSizePolicy,
    QTableWidget,
    QTableWidgetItem,
    QWidget,
)


@dataclass(frozen=True)
class FactRow:
    """A row: its name, its cells, what its tip says, and whether it is the one in use. A row whose cells but the first
    are empty has one text across all of them."""

    name: str
    cells: tuple[str, ...]
    tip: str = ""
    in_use: bool = False


class FactTable(QTableWidget):
    """chosen(str) is sent with the name of a row that is double-clicked, or entered."""

    chosen = Signal(str)

    def __init__(self, name: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("factTable")
        self.setAccessibleName(name)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setShowGrid(False)
        self.setTabKeyNavigation(False)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.verticalHeader().hide()
        header = self.horizontalHeader()
        header.setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        header.setHighlightSections(False)
        header.setSectionsClickable(False)
        header.setStretchLastSection(True)
        self._rows: tuple[FactRow, ...] = ()
        self._headings: tuple[str, ...] = ()
        self._with_signs = False
        self.cellActivated.connect(lambda row, _column: self.chosen.emit(self._rows[row].name))

    def show_rows(self, headings: Sequence[str], rows: Sequence[FactRow]) -> None:
        """Show these rows; texts that stay are left alone."""
        before, self._rows = self._rows, tuple(rows)
        with_signs = any(row.in_use for row in rows)  # only then do names leave room for the sign of the one in use
        if tuple(headings) != self._headings or len(before) != len(rows) or with_signs is not self._with_signs:
            self._headings, self._with_signs, before = tuple(headings), with_signs, ()
            self._lay_out()
        for place, row in enumerate(rows):
            if place >= len(before) or before[place] != row:
                self._put_row(place, row)
        # Columns follow longer texts at once and never shrink, so that a value that moves does not shake them.
        for column in range(1, len(headings) - 1):
            if self._needed(column) > self.columnWidth(column):
                self.setColumnWidth(column, self._needed(column))

    def _lay_out(self) -> None:
        """Rows and columns anew, with empty cells."""
        self.setColumnCount(len(self._headings))
        self.setRowCount(len(self._rows))
        self.setHorizontalHeaderLabels(list(self._headings))
        self.clearSpans()
        for place, row in enumerate(self._rows):
            self.setRowHeight(place, self.fontMetrics().height() + 5)
            for column in range(len(self._headings)):
                self.setItem(place, column, QTableWidgetItem())
            self._put_row(place, row)
        self.horizontalHeader().resizeSections(QHeaderView.ResizeMode.ResizeToContents)
        for column in range(1, len(self._headings) - 1):
            self.setColumnWidth(column, self._needed(column))
        self.updateGeometry()

    def _needed(self, column: int) -> int:
        """Width of a column, to which a text across several does not add."""
        own = [place for place in range(self.rowCount()) if self.columnSpan(place, column) == 1]
        hints = [self.sizeHintForIndex(self.model().index(place, column)).width() for place in own]
        return max([*hints, self.horizontalHeader().sectionSizeHint(column)])

    def _put_row(self, place: int, row: FactRow) -> None:
        font = QFont(self.font())
        font.setBold(row.in_use)
        sign = "" if not self._with_signs else "● " if row.in_use else "    "
        for column, text in enumerate((sign + row.name, *row.cells)):
            item = self.item(place, column)
            assert item is not None
            item.setFont(font)
            item.setText(text)
            item.setToolTip(row.tip)
            if column == 0:
                said = f"{row.name}, in use" if row.in_use else row.name
                item.setData(Qt.ItemDataRole.AccessibleTextRole, said)
        across = len(row.cells) if len(row.cells) > 1 and not any(row.cells[1:]) else 1
        if self.columnSpan(place, 1) != across:
            self.setSpan(place, 1, 1, across)

    def fill_width(self) -> None:
        """Let the last column take the room that is left."""
        if self.columnCount():
            self.horizontalHeader().setSectionResizeMode(self.columnCount() - 1, QHeaderView.ResizeMode.Stretch)

    def row_texts(self) -> tuple[tuple[str, ...], ...]:
        """What is on show, row by row."""
        return tuple((row.name, *row.cells) for row in self._rows)

    def copy(self) -> None:
        """The selected rows, or all if none is, with headings, as tab-separated text."""
        chosen = sorted({index.row() for index in self.selectionModel().selectedRows()}) or range(len(self._rows))
        texts = (self.horizontalHeaderItem(column) for column in range(self.columnCount()))
        lines = ["\t".join(item.text() if item is not None else "" for item in texts)]
        lines += ["\t".join((self._rows[place].name, *self._rows[place].cells)) for place in chosen]
        QGuiApplication.clipboard().setText("\n".join(lines))

    def sizeHint(self) -> QSize:
        rows = sum(self.rowHeight(place) for place in range(self.rowCount()))
        bar = self.horizontalScrollBar().sizeHint().height() if self.horizontalScrollBar().isVisible() else 0
        return QSize(300, self.horizontalHeader().sizeHint().height() + rows + bar + 2)

    def minimumSizeHint(self) -> QSize:
        return QSize(200, self.sizeHint().height())
