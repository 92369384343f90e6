"""The head of a foldable card of fields: its name, what it holds in a few words while folded, a switch and a menu."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QAction, QFont, QKeySequence, QPainter, QPaintEvent, QPalette
from PySide6.QtWidgets import QCheckBox, QGridLayout, QLabel, QMenu, QScrollArea, QSizePolicy, QToolButton, QWidget


class ElidedLabel(QLabel):
    """A quiet line of text that ends in dots where there is no room for it; the whole of it is in its tip."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("fieldNote")
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)

    def minimumSizeHint(self) -> QSize:
        return QSize(0, super().minimumSizeHint().height())

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setPen(self.palette().color(QPalette.ColorRole.WindowText))
        room = self.rect().adjusted(max(self.indent(), 0), 0, 0, 0)
        text = self.fontMetrics().elidedText(self.text(), Qt.TextElideMode.ElideRight, room.width())
        painter.drawText(room, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, text)


class CardHead(QWidget):
    """Signals: folded_changed(bool unfolded) when the user folds the card or unfolds it; switched(bool on).

    `kind` says in a word what it is the head of, for screen readers and tips.
    """

    folded_changed = Signal(bool)
    switched = Signal(bool)

    def __init__(self, kind: str, *, switch: bool = False, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._kind, self._title, self._unfolded = kind, "", False
        self.fold = QToolButton()
        self.fold.setObjectName("cardTitle")
        self.fold.setAutoRaise(True)
        self.fold.setToolButtonStyle(Qt.ToolButtonStyle.ToolButtonTextBesideIcon)
        font = QFont(self.fold.font())
        font.setWeight(QFont.Weight.DemiBold)
        self.fold.setFont(font)
        self.fold.clicked.connect(lambda: self._turn(not self._unfolded))
        self.summary = ElidedLabel()
        self.switch = QCheckBox("on")
        if not switch:  # showing what has no place yet would make a window of it
            self.switch.hide()
        self.switch.clicked.connect(self.switched)
        self.menu = QMenu(self)
        self.menu.setToolTipsVisible(True)
        self.button = QToolButton()
        self.button.setObjectName("cardMenu")
        self.button.setText("⋯")
        self.button.setAutoRaise(True)
        self.button.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self.button.setMenu(self.menu)
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(6)
        grid.setVerticalSpacing(0)
        grid.setColumnStretch(0, 1)
        grid.addWidget(self.fold, 0, 0, Qt.AlignmentFlag.AlignLeft)
        grid.addWidget(self.switch, 0, 1)
        grid.addWidget(self.button, 0, 2)
        grid.addWidget(self.summary, 1, 0, 1, 3)
        self.summary.setIndent(self.fontMetrics().horizontalAdvance("00"))
        self.set_title(kind)
        self.set_summary("")

    @property
    def unfolded(self) -> bool:
        return self._unfolded

    def set_title(self, title: str) -> None:
        """The name of what the card holds."""
        self._title = title
        self.fold.setText(title)
        self.button.setToolTip(f"What can be done with {self._spoken}")
        self.button.setAccessibleName(f"{self._spoken}, menu")
        self.switch.setToolTip(f"{self._spoken} is on")
        self.switch.setAccessibleName(f"{self._spoken} is on")
        self._describe()

    @property
    def _spoken(self) -> str:
        return self._title if self._title == self._kind else f"{self._kind} {self._title}"

    def set_summary(self, text: str) -> None:
        """What the card holds, in a few words; nothing takes no room."""
        self.summary.setText(text)
        self.summary.setToolTip(text)
        self.summary.setVisible(bool(text))

    def set_unfolded(self, unfolded: bool) -> None:
        """Show how the card is; nothing is emitted."""
        self._unfolded = unfolded
        self._describe()

    def _describe(self) -> None:
        self.fold.setArrowType(Qt.ArrowType.DownArrow if self._unfolded else Qt.ArrowType.RightArrow)
        self.fold.setToolTip(f"{'Fold away' if self._unfolded else 'Unfold'} {self._spoken}")
        self.fold.setAccessibleName(f"{self._spoken}, {'unfolded' if self._unfolded else 'folded'}")

    def _turn(self, unfolded: bool) -> None:
        self.set_unfolded(unfolded)
        self.folded_changed.emit(unfolded)

    def add_action(self, text: str, act: Callable[[], object], *, keys: str = "", card: QWidget) -> QAction:
        """An entry of the menu; its keys work while the keyboard is anywhere in the card."""
        action = self.menu.addAction(text)
        action.triggered.connect(lambda _=False: act())
        if keys:
            action.setShortcut(QKeySequence(keys))
            action.setShortcutContext(Qt.ShortcutContext.WidgetWithChildrenShortcut)
            card.addAction(action)
        return action


def bring_into_view(widget: QWidget) -> None:
    """Scroll the area that a widget is in, as far as it takes to see it."""
    area = widget.parentWidget()
    while area is not None and not isinstance(area, QScrollArea):
        area = area.parentWidget()
    if area is not None:
        area.ensureWidgetVisible(widget, 0, 24)
