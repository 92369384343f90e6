"""The readouts: every quantity of the answer under its heading, in the unit the reader chose.

The view asks a small model that keeps texts only and updates them in place, so that following a drag costs the
repaint of changed cells and nothing else.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from enum import IntEnum
from functools import partial

import numpy as np
from PySide6.QtCore import QAbstractItemModel, QModelIndex, QPersistentModelIndex, QPoint, Qt, Signal
from PySide6.QtGui import QContextMenuEvent, QFont, QFontMetrics, QGuiApplication, QKeyEvent, QKeySequence, QPalette
from PySide6.QtWidgets import QAbstractItemView, QFrame, QHeaderView, QMenu, QTreeView, QWidget

from app.engine import CloudAnswer
from app.quantities import QUANTITIES, Group, Need, Row
from app.units import best_unit
from app.words import display_factor, number, reason_missing, row_tip, shown_unit, value_text

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
        self._interval: Callable[[str], str] = lambda name: ""

    def show_readings(self, readings: Mapping[str, Reading], interval: Callable[[str], str]) -> None:
        """Show these quantities, by name; headings without any are left out. `interval` tells, when a tip asks, how
        sure one is."""
        self._interval = interval
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
                return tip_of(row, reading, self._interval(row.name))
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


def tip_of(row: Row, reading: Reading, interval: str) -> str:
    """What a reader wants to know of a number: how it is worked out, from where, how far it holds, how sure it is."""
    lines = [f"{row.label}, {row.symbol}", row_tip(row)]
    if reading.reason:
        lines.insert(1, f"no value: {reading.reason}")
    if interval:
        lines.insert(1, f"68 % of the draws: {interval}")
    if len(row.units) > 1:
        lines.append("Return or a right click chooses the unit")
    return "\n".join(lines)


def readings_of(answer: CloudAnswer, chosen_units: Mapping[str, str]) -> dict[str, Reading]:
    """What the readouts show of an answer: quantities of the other statistics are left out, and those that lack an
    input say so."""
    readings = {}
    for name, row in QUANTITIES.items():
        need = answer.missing(row)
        if need in (Need.BOSONS, Need.FERMIONS):
            continue
        if need is not None:
            readings[name] = Reading("–", reason=reason_missing(need))
            continue
        unit = chosen_units.get(name, "")
        if unit not in row.units:
            unit = unit_for(row, answer.value(name))
        readings[name] = Reading(value_text(answer, row, unit), shown_unit(unit))
    return readings


def interval_text(answer: CloudAnswer, name: str) -> str:
    """The interval of a quantity over the stated uncertainties, in the unit that suits it; empty where there is
    none."""
    row = QUANTITIES[name]
    interval = None if answer.missing(row) else answer.interval(name)
    if interval is None or row.axes:
        return ""
    unit = unit_for(row, answer.value(name))
    low, high = (number(float(bound) / display_factor(unit, row)) for bound in interval)
    return f"{low} to {high} {shown_unit(unit)}".strip()


def unit_for(row: Row, value: object) -> str:
    """The unit that suits a value, where the reader chose none."""
    if len(row.units) == 1 or "%" in row.units:
        return row.units[0]
    return best_unit(float(np.max(np.abs(np.asarray(value, dtype=float)))), row.units)


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

    def show_answer(self, answer: CloudAnswer, chosen_units: Mapping[str, str]) -> None:
        """Show a current answer in these units, or where none is chosen in the one that suits."""
        self._model.show_readings(readings_of(answer, chosen_units), partial(interval_text, answer))

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

