"""Why a number is what it is, for reading: inputs, formulas, numbers put in, results; selectable and copyable."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import QEvent, QMimeData, QSize, Qt
from PySide6.QtGui import QGuiApplication, QPalette
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QFrame, QPushButton, QTextBrowser, QVBoxLayout, QWidget

from app.explanations import Explanation, Input, Step, StepKind, explanation_text
from app.explanations.text import NUMBERS_NOTE, facts, headline, input_cells, result_line, step_lines

TITLE = "Why this number"
NOT_CURRENT = "Not current: this explains the last good answer."
FIRST_SIZE = QSize(720, 620)


class ExplanationView(QTextBrowser):
    """An explanation as text. Rewritten only when it changes; the place of reading is kept."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("explanation")
        self.setAccessibleName(TITLE)
        self.setWhatsThis("What went into a number, and every step to it. Numbers are in SI units.")
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setTabChangesFocus(True)
        self.setOpenLinks(False)
        self.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self.document().setDocumentMargin(12)
        self._explanation: Explanation | None = None
        self._stale = False

    @property
    def explanation(self) -> Explanation | None:
        return self._explanation

    @property
    def stale(self) -> bool:
        return self._stale

    def show_explanation(self, explanation: Explanation) -> None:
        if explanation == self._explanation and not self._stale:
            return
        another = self._explanation is None or explanation.name != self._explanation.name
        self._explanation, self._stale = explanation, False
        self._write(keep_place=not another)

    def mark_stale(self) -> None:
        """Keep what is on show, marked as not current."""
        if self._explanation is not None and not self._stale:
            self._stale = True
            self._write(keep_place=True)

    def copy_all(self) -> None:
        """The whole explanation as plain text."""
        if self._explanation is not None:
            QGuiApplication.clipboard().setText(explanation_text(self._explanation))

    def _write(self, *, keep_place: bool) -> None:
        if self._explanation is None:
            return
        bar = self.verticalScrollBar()
        place = bar.value() if keep_place else 0
        muted = self.palette().color(QPalette.ColorRole.PlaceholderText).name()
        self.setHtml(_html(self._explanation, muted, stale=self._stale))
        bar.setValue(place)

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange:
            self._write(keep_place=True)

    def createMimeDataFromSelection(self) -> QMimeData:
        """What is selected is copied as text alone: it goes into notes and calculators."""
        data = QMimeData()
        data.setText(self.textCursor().selection().toPlainText())
        return data


class ExplanationDialog(QDialog):
    """A window of its own beside the main one, which stays at work."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setModal(False)
        self.setWindowTitle(TITLE)
        self.view = ExplanationView()
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        self.copy_button = buttons.addButton("&Copy as text", QDialogButtonBox.ButtonRole.ActionRole)
        self.copy_button.clicked.connect(self.view.copy_all)
        for button in buttons.buttons():
            if isinstance(button, QPushButton):
                button.setAutoDefault(False)  # Return belongs to the text, which does nothing with it
        buttons.rejected.connect(self.reject)
        column = QVBoxLayout(self)
        column.addWidget(self.view, 1)
        column.addWidget(buttons)
        self.resize(FIRST_SIZE)

    def show_explanation(self, explanation: Explanation) -> None:
        self.setWindowTitle(f"{TITLE}: {explanation.title}")
        self.view.show_explanation(explanation)


# ---------------------------------------------------------------- as rich text


def _html(explanation: Explanation, muted: str, *, stale: bool) -> str:
    parts = [f"<p><b>{escape(NOT_CURRENT)}</b></p>"] if stale else []
    parts.append(f'<p style="font-size:large">{escape(headline(explanation))}</p>')
    parts.append(_table([(_quiet(caption, muted), escape(text)) for caption, text in facts(explanation)]))
    parts.append(_heading("From", muted))
    parts.append(_table([_input_row(entry, muted) for entry in explanation.inputs]))
    if explanation.steps:
        parts.append(_heading("Step by step", muted))
        parts += [_step(number, step, muted) for number, step in enumerate(explanation.steps, start=1)]
        if explanation.value is not None:
            parts.append(f"<p><b>{escape(result_line(explanation))}</b></p>")
        parts.append(f"<p>{_quiet(NUMBERS_NOTE, muted)}</p>")
    return "".join(parts)


def _input_row(entry: Input, muted: str) -> tuple[str, ...]:
    symbol, text, meaning, origin = input_cells(entry)
    return escape(symbol), escape(text), f"{escape(meaning)} {_quiet(f'({origin})', muted)}"


def _step(number: int, step: Step, muted: str) -> str:
    lines = [escape(line) for line in step_lines(step)]
    if step.kind in (StepKind.FORMULA, StepKind.GIVEN, StepKind.INTEGRAL):
        lines[-1] = f"<b>{lines[-1]}</b>"
    elif step.kind is StepKind.EQUATION:
        lines[1] = f"<b>{lines[1]}</b>"
    if step.where:
        lines.append(_quiet(f"where {step.where}", muted))
    body = "".join(f'<p style="margin:0 0 2px 24px">{line}</p>' for line in lines)
    return f'<p style="margin:8px 0 2px 0">{number}. {escape(step.meaning)}</p>{body}'


def _heading(text: str, muted: str) -> str:
    return f'<p style="margin:14px 0 4px 0; color:{muted}; font-weight:600">{escape(text)}</p>'


def _quiet(text: str, muted: str) -> str:
    return f'<span style="color:{muted}">{escape(text)}</span>'


def _table(rows: list[tuple[str, ...]]) -> str:
    lines = ("".join(f'<td style="padding-right:14px">{cell}</td>' for cell in row) for row in rows)
    body = "".join(f"<tr>{line}</tr>" for line in lines)
    return f'<table cellspacing="0" cellpadding="1">{body}</table>'
