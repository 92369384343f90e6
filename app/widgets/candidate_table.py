"""The table of candidates: sorted by a click or a key, units and columns the reader's choice, every cell explained."""

from __future__ import annotations

from collections.abc import Iterable

from PySide6.QtCore import QModelIndex, QPoint, Qt, QTimer, Signal
from PySide6.QtGui import QContextMenuEvent, QGuiApplication, QKeyEvent, QKeySequence
from PySide6.QtWidgets import QAbstractItemView, QFrame, QHeaderView, QMenu, QTableView, QWidget

from app.answers.candidate_row import CandidateRow
from app.candidate_columns import COLUMNS
from app.language import translate as _
from app.widgets.candidate_model import AnyIndex, CandidateModel, CellPainter, Kind, Shown

REST_MS = 200
NARROWEST = 6  # digits of a column of numbers


class CandidateTable(QTableView):
    """Signals: sort_asked(name) by the column of a quantity or the score; unit_chosen(name, unit); hide_asked(name);
    use_asked(row), the candidate that is to become the plan's; conditions_asked(row), to be compared in conditions of
    its own; detail_changed(str) with all that can be said of the cell the keyboard is on."""

    sort_asked = Signal(str)
    unit_chosen = Signal(str, str)
    hide_asked = Signal(str)
    use_asked = Signal(object)
    conditions_asked = Signal(object)
    detail_changed = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("candidateTable")
        self.setAccessibleName(_("Candidates"))
        self.setWhatsThis(
            _(
                "Species and states side by side. Return uses the one the keyboard is on; Ctrl+C copies the selected "
                "rows; the menu key offers units, sorting and columns."
            )
        )
        self.model_ = CandidateModel(self)
        self.setModel(self.model_)
        self.setItemDelegate(CellPainter(self.model_, self))
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setShowGrid(False)
        self.setTabKeyNavigation(False)
        self.setWordWrap(False)
        self.setCornerButtonEnabled(False)
        across, down = self.horizontalHeader(), self.verticalHeader()
        across.setSectionsClickable(True)
        across.setSortIndicatorShown(True)
        across.setSortIndicatorClearable(False)
        across.setHighlightSections(False)
        across.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        across.customContextMenuRequested.connect(self._open_head_menu)
        across.sectionClicked.connect(self._sort_by_section)
        down.setHighlightSections(False)
        down.setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        down.setDefaultSectionSize(self.fontMetrics().height() + 6)
        self.activated.connect(self._use)
        self.selectionModel().currentChanged.connect(lambda index: self.detail_changed.emit(self.model_.tip_at(index)))
        self._widths: dict[str, int] = {}
        # Lines out of view wait until nothing changes any more: to write all their texts takes longer than a frame.
        self._rest = QTimer(self, singleShot=True, interval=REST_MS)
        self._rest.timeout.connect(
            lambda: self._fit_columns(self.model_.shown, range(len(self.model_.shown.rows)))
        )  # fmt: skip

    # ---------------------------------------------------------------- showing

    def show_rows(self, shown: Shown, sorted_by: str, descending: bool) -> None:
        """Show these rows; what the keyboard was on, and what was in view, stay."""
        index, bars = self.currentIndex(), (self.horizontalScrollBar(), self.verticalScrollBar())
        places = [bar.value() for bar in bars]
        row = self.row_at(index)
        name, column = ("" if row is None else row.name), index.column()
        self.model_.show(shown)
        for bar, place in zip(bars, places, strict=True):
            bar.setValue(place)
        if name and self.row_at(self.currentIndex()) is None:
            again = next((place for place, row in enumerate(shown.rows) if row.name == name), None)
            if again is not None:
                # The view stays where it is, even where the candidate has moved out of it.
                self.selectionModel().setCurrentIndex(
                    self.model_.index(again, max(column, 0)),
                    self.selectionModel().SelectionFlag.ClearAndSelect | self.selectionModel().SelectionFlag.Rows,
                )
                for bar, place in zip(bars, places, strict=True):
                    bar.setValue(place)
        place = self.model_.place_of(sorted_by)
        order = Qt.SortOrder.DescendingOrder if descending else Qt.SortOrder.AscendingOrder
        header = self.horizontalHeader()
        header.blockSignals(True)
        header.setSortIndicator(place, order)
        header.blockSignals(False)
        first = max(self.rowAt(0), 0)
        last = self.rowAt(self.viewport().height() - 1)
        self._fit_columns(shown, range(first, len(shown.rows) if last < 0 else last + 1))
        self._rest.start()

    def _fit_columns(self, shown: Shown, lines: Iterable[int]) -> None:
        """Columns as wide as the texts in these lines; they grow at once and shrink only with another set of
        columns."""
        keys = [head.name or head.kind.name for head in shown.heads]
        if set(keys) != set(self._widths):
            self._widths = {}
        metrics = self.fontMetrics()
        digit = metrics.horizontalAdvance("0")
        for place, (key, head) in enumerate(zip(keys, shown.heads, strict=True)):
            texts = {self.model_.text(line, place) for line in lines}
            wanted = max(
                max((metrics.horizontalAdvance(text) for text in texts), default=0) + 3 * digit,
                max(metrics.horizontalAdvance(line) for line in self.model_.heading(head, broken=True).split("\n"))
                + 3 * digit,
                NARROWEST * digit,
            )
            self._widths[key] = max(wanted, self._widths.get(key, 0))
            if self.columnWidth(place) != self._widths[key]:
                self.setColumnWidth(place, self._widths[key])

    def mark_stale(self) -> None:
        self.model_.mark_stale()

    def row_at(self, index: AnyIndex) -> CandidateRow | None:
        """The candidate at an index; None off the table."""
        rows = self.model_.shown.rows
        return rows[index.row()] if index.isValid() and index.row() < len(rows) else None

    def take_focus(self) -> None:
        """Give the keyboard to the table, on the cell it was on, or on the first."""
        self.setFocus()
        if not self.currentIndex().isValid() and self.model_.rowCount():
            self.setCurrentIndex(self.model_.index(0, 0))

    # ---------------------------------------------------------------- what the user asks

    def copy(self) -> None:
        """The selected rows, or all if none is, with headings, as tab-separated text."""
        chosen = sorted({index.row() for index in self.selectionModel().selectedRows()})
        QGuiApplication.clipboard().setText(self.model_.table_text(chosen or None))

    def _use(self, index: QModelIndex) -> None:
        row = self.row_at(index)
        if row is not None:
            self.use_asked.emit(row)

    def _sort_by_section(self, section: int) -> None:
        name = self.model_.head(section).name
        if name:
            self.sort_asked.emit(name)

    def menu_at(self, index: AnyIndex) -> QMenu | None:
        """The choices for a cell: its candidate, and its column."""
        row = self.row_at(index)
        if row is None:
            return None
        menu = self.head_menu(index.column()) or QMenu(self)
        first = menu.actions()[0] if menu.actions() else None
        use, copy = menu.addAction(_("Use this species")), menu.addAction(_("Copy rows"))
        own = menu.addAction(_("Conditions of its own…"))
        own.setToolTip(_("Compare it with another atom number, temperature, field or scattering length"))
        own.triggered.connect(lambda: self.conditions_asked.emit(row))
        use.setToolTip(_("Put this species and state into the plan"))
        use.triggered.connect(lambda: self.use_asked.emit(row))
        copy.triggered.connect(self.copy)
        if first is not None:
            for action in (use, own, copy):
                menu.insertAction(first, action)
            menu.insertSeparator(first)
        return menu

    def head_menu(self, section: int) -> QMenu | None:
        """The choices for a column: order, units, and whether it is shown."""
        if not 0 <= section < self.model_.columnCount():
            return None
        head = self.model_.head(section)
        if not head.name:
            return None
        menu = QMenu(self)
        menu.addAction(_("Sort by {what}").format(what=self.model_.heading(head))).triggered.connect(
            lambda: self.sort_asked.emit(head.name)
        )
        if head.kind is Kind.NUMBER:
            units = COLUMNS[head.name].row.units
            for unit in units if len(units) > 1 else ():
                action = menu.addAction(_("in {unit}").format(unit=unit) if unit != "1" else _("as a plain number"))
                action.setCheckable(True)
                action.setChecked(unit == self.model_.shown.unit(head.name))
                action.triggered.connect(
                    lambda _checked=False, chosen=unit: self.unit_chosen.emit(head.name, chosen)
                )  # fmt: skip
            menu.addAction(_("Hide this column")).triggered.connect(lambda: self.hide_asked.emit(head.name))
        return menu

    def _open_head_menu(self, place: QPoint) -> None:
        menu = self.head_menu(self.horizontalHeader().logicalIndexAt(place))
        if menu is not None:
            menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
            menu.popup(self.horizontalHeader().viewport().mapToGlobal(place))

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        by_key = event.reason() is QContextMenuEvent.Reason.Keyboard
        index = self.currentIndex() if by_key else self.indexAt(event.pos())
        menu = self.menu_at(index)
        if menu is not None:
            menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
            place = self.viewport().mapToGlobal(self.visualRect(index).bottomLeft()) if by_key else event.globalPos()
            menu.popup(place)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self.currentIndex().isValid():
            self._use(self.currentIndex())
        else:
            super().keyPressEvent(event)
