"""A quiet line that shows how far long work is, with a button to stop it, or to begin it again."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QProgressBar, QToolButton, QWidget

PATIENCE_MS = 300  # work that is done sooner is not worth a word


class ProgressLine(QWidget):
    """Hidden while nothing is under way. stopped() and allowed() are sent by its button."""

    stopped = Signal()
    allowed = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._what, self._share = "", 0.0
        self._running = False
        self.label = QLabel()
        self.label.setObjectName("plotStatus")
        self.bar = QProgressBar()
        self.bar.setTextVisible(False)
        self.bar.setFixedSize(90, 5)
        self.button = QToolButton()
        self.button.setAutoRaise(True)
        self.button.clicked.connect(lambda: (self.stopped if self._running else self.allowed).emit())
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 12, 0)
        row.setSpacing(8)
        row.addWidget(self.label)
        row.addWidget(self.bar, 0, Qt.AlignmentFlag.AlignVCenter)
        row.addWidget(self.button)
        self._soon = QTimer(self, singleShot=True, interval=PATIENCE_MS)
        self._soon.timeout.connect(self._appear)
        self.hide()

    @property
    def running(self) -> bool:
        """Whether work is under way, shown or not yet."""
        return self._running

    def show_share(self, what: str, share: float) -> None:
        """Work is under way: in a few words what, and how much of it is done."""
        if not self._running:
            self._running = True
            self.bar.show()
            self._name_button("Cancel", f"Stop working out the {what}")
            self._soon.start()
            self._write(what, share)
        self._what, self._share = what, share
        # Not before the line is seen: most work is done by then, and each text costs the page a layout.
        if not self._soon.isActive():
            self._write(what, share)

    def _appear(self) -> None:
        self._write(self._what, self._share)
        self.show()

    def _write(self, what: str, share: float) -> None:
        percent = round(100.0 * share)
        self.label.setText(f"{what} {percent} %")
        self.bar.setValue(percent)
        self.bar.setAccessibleName(f"{what}, {percent} percent")

    def end(self, *, stopped: bool) -> None:
        """Nothing is under way any more: it is done, or the user stopped it and may want it after all."""
        self._running = False
        self._soon.stop()
        if stopped:
            self.bar.hide()
            self.label.setText(f"{self._what} stopped")
            self._name_button("Compute", f"Work out the {self._what} after all")
        self.setVisible(stopped)

    def _name_button(self, text: str, tip: str) -> None:
        self.button.setText(text)
        self.button.setToolTip(tip)
        self.button.setAccessibleName(tip)
