"""The readouts: every quantity of the answer under its heading, in the unit the reader chose.

The view asks a small model that keeps texts only and updates them in place, so that following a drag costs the
repaint of changed cells and nothing else.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import IntEnum

from PySide6.QtCore import QAbstractItemModel, QModelIndex, QPersistentModelIndex, QPoint, Qt, Signal
from PySide6.QtGui import QContextMenuEvent, QFont, QFontMetrics, QGuiApplication, QKeyEvent, QKeySequence, QPalette
from PySide6.QtWidgets import QAbstractItemView, QFrame, QHeaderView, QMenu, QTreeView, QWidget

from app.quantities import QUANTITIES, Group, Row

AnyIndex = QModelIndex | QPersistentModelIndex


class Column(IntEnum):
    LABEL = 0
    SYMBOL = 1
    VALUE = 2
    UNIT = 3


@dataclass(frozen=True)
class Reading:
    """A quantity as it is read: its number and unit as text; `reason` says why there is none."""

    value: str
    unit: str = ""
    reason: str = ""

    @property
    def text(self) -> str:
        return f"{self.value} {self.unit}".strip()


EMPTY = Reading("–")


class ReadoutModel(QAbstractItemModel):
    """Headings, and under each its quantities. The set of rows changes with the species only; values change in place."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._groups: tuple[tuple[Group, tuple[Row, ...]], ...] = ()
        self._readings: dict[str, Reading] = {}
        self._stale = False

    def show_readings(self, readings: Mapping[str, Reading]) -> None:
        """Show these quantities, by name; headings without any are left out."""
        rows = tuple(row for row in QUANTITIES.values() if row.name in readings)
        groups = tuple(
            (group, members) for group in Group if (members := tuple(row for row in rows if row.group is group))
        )
        was_stale, self._stale = self._stale, False
        if groups != self._groups:
            self.beginResetModel()
            self._groups, self._readings = groups, dict(readings)
            self.endResetModel()
            return
        before, self._readings = self._readings, dict(readings)
        for number, (_, members) in enumerate(groups):
            changed = [i for i, row in enumerate(members) if was_stale or before[row.name] != readings[row.name]]
            if changed:
                parent = self.index(number, 0)
                self.dataChanged.emit(
                    self.index(changed[0], Column.VALUE, parent), self.index(changed[-1], Column.UNIT, parent)
                )

    def mark_stale(self) -> None:
        if self._stale:
            return
        self._stale = True
        for number, (_, members) in enumerate(self._groups):
            parent = self.index(number, 0)
            self.dataChanged.emit(
                self.index(0, Column.VALUE, parent), self.index(len(members) - 1, Column.UNIT, parent)
            )

    @property
    def stale(self) -> bool:
        return self._stale

    def row_at(self, index: AnyIndex) -> Row | None:
        """The quantity at an index; None for a heading."""
        if not index.isValid() or not index.internalId():
            return None
        return self._groups[index.internalId() - 1][1][index.row()]

    def reading_of(self, row: Row) -> Reading:
        return self._readings.get(row.name, EMPTY)

    def table_text(self) -> str:
        """All readouts as tab-separated text: heading line, then name, symbol, value, unit."""
        lines = ["quantity\tsymbol\tvalue\tunit"]
        for _, members in self._groups:
            for row in members:
                reading = self.reading_of(row)
                lines.append("\t".join((row.label, row.symbol, reading.value, reading.unit)))
        return "\n".join(lines)

    def index(self, row: int, column: int, parent: AnyIndex = QModelIndex()) -> QModelIndex:  # noqa: B008
        if not parent.isValid():
            return self.createIndex(row, column, 0)
        return self.createIndex(row, column, parent.row() + 1)

    def parent(self, index: AnyIndex = QModelIndex()) -> QModelIndex:  # type: ignore[override]  # noqa: B008
        number = index.internalId() if index.isValid() else 0
        return self.createIndex(number - 1, 0, 0) if number else QModelIndex()

    def rowCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: N802, B008
        if not parent.isValid():
            return len(self._groups)
        return 0 if parent.internalId() or parent.column() > 0 else len(self._groups[parent.row()][1])

    def columnCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: N802, B008
        return len(Column)

    def flags(self, index: AnyIndex) -> Qt.ItemFlag:
        if not index.isValid():
            return Qt.ItemFlag.NoItemFlags
        return Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable

    def data(self, index: AnyIndex, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        if not index.isValid():
            return None
        row = self.row_at(index)
        if row is None:
            return self._heading_data(self._groups[index.row()][0], index.column(), role)
        reading = self.reading_of(row)
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return (row.label, row.symbol, reading.value, reading.unit)[index.column()]
            case Qt.ItemDataRole.TextAlignmentRole:
                right = index.column() == Column.VALUE
                side = Qt.AlignmentFlag.AlignRight if right else Qt.AlignmentFlag.AlignLeft
                return side | Qt.AlignmentFlag.AlignVCenter
            case Qt.ItemDataRole.ToolTipRole:
                return tip_of(row, reading)
            case Qt.ItemDataRole.AccessibleTextRole:
                return f"{row.label}: {reading.text or reading.reason}" if index.column() == Column.LABEL else None
            case Qt.ItemDataRole.ForegroundRole:
                quiet = index.column() in (Column.SYMBOL, Column.UNIT) or reading.reason or self._stale
                return QGuiApplication.palette().color(QPalette.ColorRole.PlaceholderText) if quiet else None
        return None

    def _heading_data(self, group: Group, column: int, role: int) -> object:
        if column != Column.LABEL:
            return None
        match role:
            case Qt.ItemDataRole.DisplayRole | Qt.ItemDataRole.AccessibleTextRole:
                return group.value
            case Qt.ItemDataRole.FontRole:
                font = QFont(QGuiApplication.font())
                font.setWeight(QFont.Weight.DemiBold)
                return font
        return None


def tip_of(row: Row, reading: Reading) -> str:
    """What a reader wants to know of a number: how it is worked out, from where, and how far it holds."""
    lines = [f"{row.label}, {row.symbol}", row.formula, f"Source: {row.source}", f"Holds for: {row.validity}"]
    if reading.reason:
        lines.insert(1, f"No value: {reading.reason}")
    if len(row.units) > 1:
        lines.append("Return or a right click chooses the unit")
    return "\n".join(lines)


class Readouts(QTreeView):
    """The readouts pane. unit_chosen(name, unit) is sent when the reader picks another unit for a quantity."""

    unit_chosen = Signal(str, str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("readouts")
        self.setAccessibleName("Readouts")
        self.setWhatsThis("All quantities of the present cloud. Return chooses a unit, Ctrl+C copies a value.")
        self._model = ReadoutModel(self)
        self.setModel(self._model)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setRootIsDecorated(False)
        self.setIndentation(0)
        self.setItemsExpandable(True)
        self.setUniformRowHeights(True)
        self.setHeaderHidden(True)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setTabKeyNavigation(False)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        header = self.header()
        header.setMinimumSectionSize(20)
        header.setStretchLastSection(False)
        header.setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        header.setSectionResizeMode(Column.LABEL, QHeaderView.ResizeMode.Stretch)
        self._size_columns()
        self._model.modelReset.connect(self._after_reset)
        self.activated.connect(self._choose_at)

    def _size_columns(self) -> None:
        metrics = QFontMetrics(self.font())
        for column, sample in ((Column.SYMBOL, "T/Tc or TF"), (Column.VALUE, "00.0(00)e+000"), (Column.UNIT, "1/cm^3")):
            self.setColumnWidth(column, metrics.horizontalAdvance(sample) + 14)

    def _after_reset(self) -> None:
        self.expandAll()
        for number in range(self._model.rowCount()):
            self.setFirstColumnSpanned(number, QModelIndex(), True)

    @property
    def stale(self) -> bool:
        return self._model.stale

    def show_readings(self, readings: Mapping[str, Reading]) -> None:
        self._model.show_readings(readings)

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

    def _choose_at(self, index: QModelIndex) -> None:
        self._open_menu(index, self.viewport().mapToGlobal(self.visualRect(index).bottomLeft()))

    def _open_menu(self, index: AnyIndex, place: QPoint) -> None:
        if (menu := self.menu_at(index)) is not None:
            menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
            menu.popup(place)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:  # noqa: N802 (the toolkit's name)
        index = self.indexAt(event.pos())
        if not self.selectionModel().isSelected(index):
            self.setCurrentIndex(index)
        self._open_menu(index, event.globalPos())

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802 (the toolkit's name)
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self.currentIndex().isValid():
            self._choose_at(self.currentIndex())
        else:
            super().keyPressEvent(event)

