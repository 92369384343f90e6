"""What the answer does not cover, as a list of sentences that can be selected and copied."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import QSize, Qt
from PySide6.QtWidgets import QFrame, QTextBrowser, QWidget

from app.caveat_words import CaveatLine


class Caveats(QTextBrowser):
    """Shows caveats; says so when there are none. Rewritten only when the texts change."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("caveats")
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setAccessibleName("Caveats")
        self.setToolTip("What the models behind these numbers leave out, for this cloud")
        self.setWhatsThis(self.toolTip())
        self.setTabChangesFocus(True)
        self.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self.setOpenLinks(False)
        self.document().setDocumentMargin(0)
        self._lines: tuple[CaveatLine, ...] | None = None

    @property
    def lines(self) -> tuple[CaveatLine, ...]:
        return self._lines or ()

    def show_lines(self, lines: tuple[CaveatLine, ...]) -> None:
        if lines == self._lines:
            return
        self._lines = lines
        if not lines:
            self.setPlainText("Nothing to add: the models hold for this cloud.")
            return
        place = self.verticalScrollBar().value()
        self.setHtml(
            "".join(
                f'<p style="margin:0 0 6px 0"><b>{escape(line.sign)} {escape(line.word)}</b>&nbsp; '
                f"{escape(line.sentence)}</p>"
                for line in lines
            )
        )
        self.verticalScrollBar().setValue(place)

    def sizeHint(self) -> QSize:
        return QSize(300, 150)
