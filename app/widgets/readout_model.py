"""The table behind the readouts, and how a line of it is painted.

One line holds label, symbol, number and unit; it is painted as a whole, so that a long number may use the room that a
short label leaves, and that following a drag costs the repaint of changed lines and nothing else.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

from PySide6.QtCore import QAbstractItemModel, QModelIndex, QObject, QPersistentModelIndex, QRect, QSize, Qt
from PySide6.QtGui import QColor, QFont, QFontMetrics, QPainter, QPalette
from PySide6.QtWidgets import QStyle, QStyledItemDelegate, QStyleOptionViewItem

from app.quantities import QUANTITIES, Group, Row
from app.widgets.readings import Reading, printed_unit, tip_of

AnyIndex = QModelIndex | QPersistentModelIndex
NOTHING = Reading("", "–")


class ReadoutModel(QAbstractItemModel):
    """Headings, and under each its quantities. Rows change with the species only; values change in place."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._groups: tuple[tuple[Group, tuple[Row, ...]], ...] = ()
        self._readings: Mapping[str, Reading] = {}
        self._looked_at: set[str] = set()  # names of those that are on the screen, or were asked for otherwise
        self._interval: Callable[[str], str] = lambda name: ""
        self.stale = False

    def show_readings(self, readings: Mapping[str, Reading], interval: Callable[[str], str]) -> None:
        """Show these quantities, by name; headings without any are left out. `interval` tells, when a tip asks, how
        sure one is."""
        self._interval = interval
        rows = tuple(row for row in QUANTITIES.values() if row.name in readings)
        groups = tuple(
            (group, members) for group in Group if (members := tuple(row for row in rows if row.group is group))
        )
        was_stale, self.stale = self.stale, False
        if groups != self._groups:
            self.beginResetModel()
            self._groups, self._readings = groups, readings
            self._looked_at.clear()
            self.endResetModel()
            return
        before, self._readings = self._readings, readings
        # What nobody looked at is not worked out to be compared.
        looked_at, self._looked_at = self._looked_at, set()
        for place, (_, members) in enumerate(groups):
            changed = []
            for i, row in enumerate(members):
                if not was_stale and row.name in looked_at and before[row.name] == readings[row.name]:
                    self._looked_at.add(row.name)
                else:
                    changed.append(i)
            if changed:
                self._tell_changed(place, changed[0], changed[-1])

    def mark_stale(self) -> None:
        if not self.stale:
            self.stale = True
            for place, (_, members) in enumerate(self._groups):
                self._tell_changed(place, 0, len(members) - 1)

    def _tell_changed(self, place: int, first: int, last: int) -> None:
        parent = self.index(place, 0)
        self.dataChanged.emit(self.index(first, 0, parent), self.index(last, 0, parent))

    def row_at(self, index: AnyIndex) -> Row | None:
        """The quantity at an index; None for a heading."""
        if not index.isValid() or not index.internalId():
            return None
        return self._groups[index.internalId() - 1][1][index.row()]

    def group_at(self, index: AnyIndex) -> Group:
        """The heading at an index."""
        return self._groups[index.row()][0]

    def reading_of(self, row: Row) -> Reading:
        self._looked_at.add(row.name)
        return self._readings.get(row.name, NOTHING)

    def tip_at(self, index: AnyIndex) -> str:
        """All that can be said of the quantity at an index; empty for a heading."""
        row = self.row_at(index)
        return "" if row is None else tip_of(row, self.reading_of(row), self._interval(row.name))

    def table_text(self) -> str:
        """All readouts as tab-separated text: names of the columns, then a line for each quantity."""
        lines = ["quantity\tsymbol\tvalue\tunit"]
        for _, members in self._groups:
            for row in members:
                reading = self.reading_of(row)
                lines.append("\t".join((row.label, reading.symbol, reading.value, reading.unit)))
        return "\n".join(lines)

    def index(self, row: int, column: int, parent: AnyIndex = QModelIndex()) -> QModelIndex:  # noqa: B008
        return self.createIndex(row, column, parent.row() + 1 if parent.isValid() else 0)

    def parent(self, index: AnyIndex = QModelIndex()) -> QModelIndex:  # type: ignore[override]  # noqa: B008
        number = index.internalId() if index.isValid() else 0
        return self.createIndex(number - 1, 0, 0) if number else QModelIndex()

    def rowCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008
        if not parent.isValid():
            return len(self._groups)
        return 0 if parent.internalId() else len(self._groups[parent.row()][1])

    def columnCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008
        return 1

    def flags(self, index: AnyIndex) -> Qt.ItemFlag:
        if not index.isValid():
            return Qt.ItemFlag.NoItemFlags
        if self.row_at(index) is None:
            return Qt.ItemFlag.NoItemFlags  # a heading: the keyboard passes over it
        return Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable

    def data(self, index: AnyIndex, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        if not index.isValid():
            return None
        row = self.row_at(index)
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return self.group_at(index).value if row is None else row.label
            case Qt.ItemDataRole.ToolTipRole:
                return self.tip_at(index) or None
            case Qt.ItemDataRole.AccessibleTextRole if row is not None:
                reading = self.reading_of(row)
                return f"{row.label}: {reading.reason or reading.text}"
        return None


class ReadoutPainter(QStyledItemDelegate):
    """Paints a heading, or a line with its number in a column of its own."""

    LEFT, RIGHT = 16, 8
    GAP = 7
    WIDEST = 60  # digits: a number further from its label would be hard to follow

    def __init__(self, model: ReadoutModel, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._model = model
        self._widths: _Widths | None = None

    def sizeHint(self, option: QStyleOptionViewItem, index: AnyIndex) -> QSize:
        line = QFontMetrics(option.font).height()
        heading = self._model.row_at(index) is None
        above = 0.75 * line if heading and index.row() else 0.2 * line
        return QSize(100, round(line + 3 + above) if heading else line + 2)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        palette: QPalette = option.palette
        font: QFont = option.font
        if self._widths is None or font != self._widths.font:
            self._widths = _Widths(font)
        area: QRect = option.rect.adjusted(self.LEFT, 0, -self.RIGHT, 0)
        area.setWidth(min(area.width(), self.WIDEST * self._widths.of("0")))
        row = self._model.row_at(index)
        if row is None:
            bold = QFont(font)
            bold.setWeight(QFont.Weight.DemiBold)
            painter.setFont(bold)
            painter.setPen(palette.color(QPalette.ColorRole.PlaceholderText))
            line = QRect(area.left(), area.bottom() - painter.fontMetrics().height() - 1, area.width(), 0)
            line.setHeight(painter.fontMetrics().height())
            painter.drawText(line, Qt.AlignmentFlag.AlignLeft, self._model.group_at(index).value)
            return
        ink, quiet = palette.color(QPalette.ColorRole.Text), palette.color(QPalette.ColorRole.PlaceholderText)
        if option.state & QStyle.StateFlag.State_Selected:
            painter.fillRect(option.rect, palette.color(QPalette.ColorRole.Highlight))
            ink = quiet = palette.color(QPalette.ColorRole.HighlightedText)
        self._paint_line(painter, area, row, self._widths, ink, quiet)

    def _paint_line(
        self, painter: QPainter, area: QRect, row: Row, widths: _Widths, ink: QColor, quiet: QColor
    ) -> None:  # fmt: skip
        # Texts are set by their baseline, which takes a third of the time of a text that is to be fitted into a box.
        reading = self._model.reading_of(row)
        painter.setFont(widths.font)
        left, right = area.left(), area.left() + area.width() - 1
        baseline = area.top() + (area.height() - widths.height) // 2 + widths.ascent
        value_right = right - widths.of("cm⁶/s") - 4 - self.GAP
        value = reading.value.replace("-", "−")  # copied with a hyphen, which tables can read
        value_width = widths.of(value)
        painter.setPen(quiet)
        painter.drawText(value_right + self.GAP, baseline, printed_unit(reading.unit))
        # The label takes what the number leaves, the symbol what the label leaves.
        room = value_right - value_width - self.GAP - left
        wanted, symbol_width = widths.of(row.label), widths.of(reading.symbol)
        label_width = min(wanted, room)
        if label_width + 2 * self.GAP + symbol_width <= room:
            painter.drawText(left + label_width + self.GAP, baseline, reading.symbol)
        if not (reading.reason or self._model.stale):
            painter.setPen(ink)
        painter.drawText(value_right - value_width - 1, baseline, value)
        painter.setPen(quiet if reading.reason else ink)
        shown = row.label if label_width == wanted else widths.elided(row.label, label_width)
        painter.drawText(left, baseline, shown)


class _Widths:
    """How wide texts are in one font, each measured once."""

    MOST = 2048

    def __init__(self, font: QFont) -> None:
        self.font = QFont(font)
        self._metrics = QFontMetrics(font)
        self.height, self.ascent = self._metrics.height(), self._metrics.ascent()
        self._known: dict[str, int] = {}

    def of(self, text: str) -> int:
        width = self._known.get(text)
        if width is None:
            if len(self._known) > self.MOST:
                self._known.clear()
            width = self._known[text] = self._metrics.horizontalAdvance(text)
        return width

    def elided(self, text: str, width: int) -> str:
        return self._metrics.elidedText(text, Qt.TextElideMode.ElideRight, width + 1)
