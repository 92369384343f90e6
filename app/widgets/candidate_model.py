"""The table of candidates as Qt reads it: one row a candidate, one column a quantity, tips and marks of certainty."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum, auto

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt
from PySide6.QtGui import QFont, QGuiApplication, QPalette
from PySide6.QtWidgets import QStyledItemDelegate, QStyleOptionViewItem

from app.answers.candidate_row import CandidateRow
from app.candidate_columns import COLUMNS
from app.candidate_order import SCORE, Score, Weight
from app.candidate_words import (
    cell_text,
    cell_tip,
    model_reason,
    model_text,
    row_tip_text,
    score_text,
    score_tip,
    short_name,
    status_text,
)
from app.language import translate as _
from app.words import row_tip, shown_unit

AnyIndex = QModelIndex | QPersistentModelIndex
_MOST_TEXTS = 20_000
_MOST_LINES = 3
LONGEST_LINE = 13  # characters of a heading


class Kind(Enum):
    """What a column of the table shows."""

    STATUS = auto()
    SCORE = auto()
    NUMBER = auto()
    MODEL = auto()


@dataclass(frozen=True)
class Head:
    """A column of the table; `name` is that of its quantity, empty for words."""

    kind: Kind
    name: str = ""


@dataclass(frozen=True, kw_only=True, eq=False)
class Shown:
    """What the table shows.

    rows, scores : in their order, equally many
    names : of the columns; units : by name
    own : key and state of the plan's own atoms
    """

    rows: tuple[CandidateRow, ...] = ()
    scores: tuple[Score, ...] = ()
    weights: tuple[Weight, ...] = ()
    names: tuple[str, ...] = ()
    units: dict[str, str] | None = None
    own: tuple[str, str] = ("", "")

    @property
    def heads(self) -> tuple[Head, ...]:
        score = (Head(Kind.SCORE, SCORE),) if self.weights else ()
        numbers = (Head(Kind.NUMBER, name) for name in self.names)
        return (Head(Kind.STATUS), *score, *numbers, Head(Kind.MODEL))

    def unit(self, name: str) -> str:
        return (self.units or {}).get(name, COLUMNS[name].row.units[0])


class CandidateModel(QAbstractTableModel):
    """Rows and columns as they are shown; ordering and sifting is done before."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.shown = Shown()
        self._heads: tuple[Head, ...] = ()
        self._texts: dict[tuple[CandidateRow, str, str], str] = {}
        self.stale = False

    def show(self, shown: Shown) -> None:
        """Show these rows. Where they are the same candidates in the same columns only their cells change."""
        if len(self._texts) > _MOST_TEXTS:
            self._texts.clear()
        same = [row.name for row in shown.rows] == [row.name for row in self.shown.rows]
        self.stale = False
        if same and shown.heads == self._heads and shown.rows:
            self.shown = shown
            last = self.index(len(shown.rows) - 1, len(self._heads) - 1)
            self.dataChanged.emit(self.index(0, 0), last)
            self.headerDataChanged.emit(Qt.Orientation.Horizontal, 0, len(self._heads) - 1)
            self.headerDataChanged.emit(Qt.Orientation.Vertical, 0, len(shown.rows) - 1)
            return
        self.beginResetModel()
        self.shown, self._heads = shown, shown.heads
        self.endResetModel()

    def mark_stale(self) -> None:
        if not self.stale and self.shown.rows:
            self.stale = True
            self.dataChanged.emit(self.index(0, 0), self.index(len(self.shown.rows) - 1, len(self._heads) - 1))

    def head(self, column: int) -> Head:
        return self._heads[column]

    def place_of(self, name: str) -> int:
        """The column of a quantity, or of the score; −1 where it is not on show."""
        return next((place for place, head in enumerate(self._heads) if head.name == name and name), -1)

    # ---------------------------------------------------------------- what Qt asks

    def rowCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.shown.rows)

    def columnCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self._heads)

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole
    ) -> object:  # fmt: skip
        if orientation is Qt.Orientation.Vertical:
            return self._row_head(section, role)
        if not 0 <= section < len(self._heads):
            return None
        head = self._heads[section]
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return self.heading(head, broken=True)
            case Qt.ItemDataRole.ToolTipRole:
                return self._head_tip(head)
            case Qt.ItemDataRole.TextAlignmentRole:
                side = Qt.AlignmentFlag.AlignRight if head.kind is Kind.NUMBER else Qt.AlignmentFlag.AlignLeft
                return side | Qt.AlignmentFlag.AlignBottom
        return None

    def _row_head(self, section: int, role: int) -> object:
        if not 0 <= section < len(self.shown.rows):
            return None
        row = self.shown.rows[section]
        own = (row.key, row.state.name) == self.shown.own
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return f"● {short_name(row)}" if own else f"    {short_name(row)}"
            case Qt.ItemDataRole.ToolTipRole:
                return row_tip_text(row)
            case Qt.ItemDataRole.FontRole if own:
                font = QFont()
                font.setBold(True)
                return font
            case Qt.ItemDataRole.TextAlignmentRole:
                return Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
        return None

    def heading(self, head: Head, *, broken: bool = False) -> str:
        """What stands over a column; broken into short lines where it is to be narrow."""
        match head.kind:
            case Kind.STATUS:
                return _("remarks")
            case Kind.MODEL:
                return _("model")
            case Kind.SCORE:
                return _("score")
        row, unit = COLUMNS[head.name].row, shown_unit(self.shown.unit(head.name))
        if not broken:
            return f"{row.label} [{unit}]" if unit else row.label
        lines = _lines(row.label)
        # A long label would make the heading higher than the rows are many; its tip has it.
        if len(lines) > _MOST_LINES:
            lines = [row.symbol]
        return "\n".join([*lines, f"[{unit}]"] if unit else lines)

    def _head_tip(self, head: Head) -> str:
        match head.kind:
            case Kind.STATUS:
                return _("Where a candidate fails: not trapped, no collisions, attractive, no data. Its tip says why.")
            case Kind.MODEL:
                return _("The model used; * where the one that was asked for cannot hold.")
            case Kind.SCORE:
                return _("Your weights, and what each of them adds. A click sorts.")
        row = COLUMNS[head.name].row
        return f"{row.label}, {row.symbol}\n{row_tip(row)}\n" + _("A click sorts, a right click chooses the unit.")

    def data(self, index: AnyIndex, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        if not index.isValid():
            return None
        row, head = self.shown.rows[index.row()], self._heads[index.column()]
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return self.text(index.row(), index.column())
            case Qt.ItemDataRole.ToolTipRole:
                return self._tip(index.row(), row, head)
            case Qt.ItemDataRole.TextAlignmentRole:
                side = Qt.AlignmentFlag.AlignRight if head.kind is Kind.NUMBER else Qt.AlignmentFlag.AlignLeft
                return side | Qt.AlignmentFlag.AlignVCenter
            case Qt.ItemDataRole.ForegroundRole:
                quiet = self.quiet(index.row(), index.column())
                return QGuiApplication.palette().color(QPalette.ColorRole.PlaceholderText) if quiet else None
            case Qt.ItemDataRole.AccessibleTextRole:
                return self._spoken(index.row(), row, head)
        return None

    def quiet(self, place: int, column: int) -> bool:
        """Whether a cell is set back: words, what is not known, and all that is not current."""
        head = self._heads[column]
        if self.stale or head.kind in (Kind.STATUS, Kind.MODEL):
            return True
        return head.kind is Kind.NUMBER and not self.shown.rows[place].cell(head.name).known

    def text(self, place: int, column: int) -> str:
        """A cell as it is read."""
        row, head = self.shown.rows[place], self._heads[column]
        match head.kind:
            case Kind.STATUS:
                return status_text(row)
            case Kind.MODEL:
                return model_text(row)
            case Kind.SCORE:
                return score_text(self.shown.scores[place])
        # Rows are kept as long as they do not change, and Qt asks again and again.
        key = (row, head.name, self.shown.unit(head.name))
        if key not in self._texts:
            self._texts[key] = cell_text(row.cell(head.name), head.name, key[2])
        return self._texts[key]

    def _tip(self, place: int, row: CandidateRow, head: Head) -> str:
        match head.kind:
            case Kind.STATUS:
                return row_tip_text(row)
            case Kind.MODEL:
                return model_reason(row) or row_tip_text(row)
            case Kind.SCORE:
                return score_tip(self.shown.scores[place], self.shown.weights)
        return cell_tip(row, head.name, self.shown.unit(head.name))

    def _spoken(self, place: int, row: CandidateRow, head: Head) -> str:
        said = f"{short_name(row)}, {self.heading(head)}: "
        if head.kind is Kind.NUMBER:
            cell = row.cell(head.name)
            text = self.text(place, self._heads.index(head)).rstrip(cell.sureness.mark)
            return said + (
                f"{text}, {cell.sureness.value}" if cell.known else _("unknown, {why}").format(why=cell.reason)
            )
        return said + (self.text(place, self._heads.index(head)) or _("nothing"))

    def tip_at(self, index: AnyIndex) -> str:
        """All that can be said of a cell; empty off the table."""
        if not index.isValid() or index.row() >= len(self.shown.rows):
            return ""
        return self._tip(index.row(), self.shown.rows[index.row()], self._heads[index.column()])

    def table_text(self, rows: Sequence[int] | None = None) -> str:
        """The rows, or all of them, as tab-separated text with headings."""
        lines = ["\t".join([_("species"), *(self.heading(head) for head in self._heads)])]
        for place in range(len(self.shown.rows)) if rows is None else rows:
            row = self.shown.rows[place]
            cells = (self.text(place, column) for column in range(len(self._heads)))
            lines.append("\t".join([f"{row.key} {row.state.name}", *cells]))
        return "\n".join(lines)


class CellPainter(QStyledItemDelegate):
    """Paints cells as Qt does, but asks for all that a cell needs at once, not role by role."""

    def __init__(self, model: CandidateModel, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._model = model

    def initStyleOption(self, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        place, column = index.row(), index.column()
        option.text = self._model.text(place, column)
        option.features |= QStyleOptionViewItem.ViewItemFeature.HasDisplay
        side = Qt.AlignmentFlag.AlignLeft
        if self._model.head(column).kind is Kind.NUMBER:
            side = Qt.AlignmentFlag.AlignRight
        option.displayAlignment = side | Qt.AlignmentFlag.AlignVCenter
        if self._model.quiet(place, column):
            palette: QPalette = option.palette
            palette.setColor(QPalette.ColorRole.Text, palette.color(QPalette.ColorRole.PlaceholderText))
            option.palette = palette


def _lines(label: str) -> list[str]:
    """The words of a label in lines of about equal length."""
    lines: list[str] = []
    for word in label.split():
        if lines and len(lines[-1]) + 1 + len(word) <= LONGEST_LINE:
            lines[-1] += f" {word}"
        else:
            lines.append(word)
    return lines
