"""One line across the top of the window that says what went wrong or what happened, and what can be done about it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QToolButton, QWidget


@dataclass(frozen=True)
class Offer:
    """A button on the banner; pressing it does `action` and, unless it stays, closes the banner."""

    text: str
    action: Callable[[], object]
    stays: bool = False


class Banner(QFrame):
    """Shows one notice at a time; a newer one takes its place. Never steals the focus, never blocks."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("banner")
        self.setAccessibleName("Notice")
        self._sign = QLabel("!")
        self._sign.setObjectName("bannerSign")
        self._text = QLabel()
        self._text.setObjectName("bannerText")
        self._text.setWordWrap(True)
        self._text.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self._offers = QHBoxLayout()
        self._offers.setSpacing(6)
        self._close = QToolButton()
        self._close.setText("✕")
        self._close.setAutoRaise(True)
        self._close.setToolTip("Put this notice away")
        self._close.setAccessibleName("Put this notice away")
        self._close.clicked.connect(self.hide)
        row = QHBoxLayout(self)
        row.setContentsMargins(14, 6, 8, 6)
        row.setSpacing(10)
        row.addWidget(self._sign)
        row.addWidget(self._text, 1)
        row.addLayout(self._offers)
        row.addWidget(self._close)
        self.hide()

    @property
    def text(self) -> str:
        """The notice on show; empty when there is none."""
        return self._text.text() if not self.isHidden() else ""

    def tell(self, text: str, *offers: Offer) -> None:
        """Show a notice with its buttons, in the place of whatever was shown."""
        while (item := self._offers.takeAt(0)) is not None:
            if (old := item.widget()) is not None:
                old.deleteLater()
        for offer in offers:
            button = QPushButton(offer.text)
            button.clicked.connect(lambda _=False, chosen=offer: self._take(chosen))
            self._offers.addWidget(button)
        self._text.setText(text)
        self._text.setAccessibleName(text)
        self.show()

    def offers(self) -> tuple[QPushButton, ...]:
        """The buttons on show."""
        items = (self._offers.itemAt(i) for i in range(self._offers.count()))
        widgets = (item.widget() for item in items if item is not None)
        return tuple(widget for widget in widgets if isinstance(widget, QPushButton))

    def _take(self, offer: Offer) -> None:
        if not offer.stays:
            self.hide()
        offer.action()
