"""The top of the window: where the cloud stands, in one sentence and the few numbers that decide.

Sentence and numbers change many times a second while the cloud is dragged, so nothing here takes part in a layout:
the sentence is placed by hand and the numbers are painted.
"""

from __future__ import annotations

from PySide6.QtCore import QRect, QSize, Qt
from PySide6.QtGui import QFont, QFontMetrics, QGuiApplication, QPainter, QPaintEvent, QPalette, QResizeEvent
from PySide6.QtWidgets import QLabel, QSizePolicy, QWidget

from app.words import Figure

SENTENCE_SCALE = 1.55
SENTENCE_SCALE_SMALL = 1.2
VALUE_SCALE = 1.75
CAPTION_SCALE = 0.86
MARGIN = 16
GAP = 18


def spoken(figure: Figure) -> str:
    """A number that decides, as text."""
    return f"{figure.caption}: {figure.value}" + (f" ({figure.detail})" if figure.detail else "")


def scaled(font: QFont, scale: float, *, weight: QFont.Weight | None = None) -> QFont:
    """The same face in another size: every size in the window is a multiple of the system's."""
    other = QFont(font)
    if font.pointSizeF() > 0:
        other.setPointSizeF(font.pointSizeF() * scale)
    else:
        other.setPixelSize(round(font.pixelSize() * scale))
    if weight is not None:
        other.setWeight(weight)
    return other


class FigureRow(QWidget):
    """Numbers side by side, each under its caption; painted, so that a change costs one repaint of this strip."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._figures: tuple[Figure, ...] = ()
        self._stale = False

    def set_figures(self, figures: tuple[Figure, ...], *, stale: bool) -> None:
        if (figures, stale) != (self._figures, self._stale):
            self._figures, self._stale = figures, stale
            self.update()

    @property
    def figures(self) -> tuple[Figure, ...]:
        return self._figures

    def sizeHint(self) -> QSize:
        return QSize(400, self._lines()[-1])

    def _lines(self) -> tuple[int, int, int, int]:
        """Top of caption, value and detail, and the height of all."""
        small = QFontMetrics(scaled(self.font(), CAPTION_SCALE)).height()
        large = QFontMetrics(scaled(self.font(), VALUE_SCALE)).height()
        return 0, small, small + large, 2 * small + large

    def paintEvent(self, event: QPaintEvent) -> None:
        if not self._figures:
            return
        painter = QPainter(self)
        palette = self.palette()
        ink = palette.color(QPalette.ColorRole.WindowText)
        quiet = palette.color(QPalette.ColorRole.PlaceholderText)
        caption_font = scaled(self.font(), CAPTION_SCALE)
        value_font = scaled(self.font(), VALUE_SCALE)
        tops = self._lines()
        small, large = tops[1], tops[2] - tops[1]
        caption_metrics, value_metrics = QFontMetrics(caption_font), QFontMetrics(value_font)
        # A column is as wide as its longest text needs; what is left over is shared out.
        wanted = [
            max(
                caption_metrics.horizontalAdvance(figure.caption),
                value_metrics.horizontalAdvance(figure.value),
                caption_metrics.horizontalAdvance(figure.detail),
            )
            + GAP
            for figure in self._figures
        ]
        equal = self.width() / len(wanted)
        if sum(wanted) <= self.width() and max(wanted) > equal:
            spare = (self.width() - sum(wanted)) / len(wanted)
            columns = [want + spare for want in wanted]
        else:
            columns = [equal] * len(wanted)
        x = 0.0
        alignment = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
        for figure, column in zip(self._figures, columns, strict=True):
            left, width = round(x), round(column - GAP)
            painter.setFont(caption_font)
            painter.setPen(quiet)
            caption = caption_metrics.elidedText(figure.caption, Qt.TextElideMode.ElideRight, width)
            painter.drawText(QRect(left, tops[0], width, small), alignment, caption)
            # A number cut short would be another number: a detail is shown whole or not at all.
            if caption_metrics.horizontalAdvance(figure.detail) <= width:
                painter.drawText(QRect(left, tops[2], width, small), alignment, figure.detail)
            painter.setFont(value_font)
            painter.setPen(quiet if self._stale else ink)
            painter.drawText(QRect(left, tops[1], width + GAP, large), alignment, figure.value)
            x += column


class Verdict(QWidget):
    """The verdict: a sentence (selectable) over the numbers that decide. While stale, all of it is quiet and the
    reason stands in front."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Verdict")
        self._text, self._stale_reason = "", ""
        self._sentence = QLabel(self)
        self._sentence.setObjectName("verdictSentence")
        self._sentence.setWordWrap(True)
        self._sentence.setAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop)
        self._sentence.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self._sentence.setAccessibleName("Verdict")
        self._row = FigureRow(self)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)

    @property
    def sentence(self) -> str:
        """The sentence as it stands on the screen."""
        return self._sentence.text()

    @property
    def figures(self) -> tuple[Figure, ...]:
        return self._row.figures

    @property
    def stale(self) -> bool:
        return bool(self._stale_reason)

    def show_answer(self, sentence: str, figures: tuple[Figure, ...]) -> None:
        """Show a current answer."""
        self._text, self._stale_reason = sentence, ""
        self._row.set_figures(figures, stale=False)
        self._put()

    def mark_stale(self, reason: str) -> None:
        """Keep the last answer on show, marked as not current, with the reason why."""
        self._stale_reason = reason
        self._row.set_figures(self._row.figures, stale=True)
        self._put()

    def copy(self) -> None:
        """Put sentence and numbers on the clipboard as text."""
        lines = [self.sentence, *(spoken(figure) for figure in self.figures)]
        QGuiApplication.clipboard().setText("\n".join(lines))

    def _put(self) -> None:
        text = f"Not current: {self._stale_reason}" if self._stale_reason else self._text
        if text == self._sentence.text():
            return
        self._sentence.setText(text)
        self._fit()
        self.setAccessibleDescription("; ".join([text, *(spoken(figure) for figure in self.figures)]))

    def _sentence_height(self) -> int:
        """Room for one line in a wide window, for two of the smaller size in a narrow one."""
        one_large = QFontMetrics(scaled(self.font(), SENTENCE_SCALE)).height()
        two_small = 2 * QFontMetrics(scaled(self.font(), SENTENCE_SCALE_SMALL)).height()
        return max(one_large, two_small)

    def sizeHint(self) -> QSize:
        return QSize(600, MARGIN + self._sentence_height() + 6 + self._row.sizeHint().height() + MARGIN // 2)

    def minimumSizeHint(self) -> QSize:
        return QSize(300, self.sizeHint().height())

    def _fit(self) -> None:
        """The sentence in the large size if it fits on a line, else smaller, over two lines."""
        width = self._sentence.width()
        for scale in (SENTENCE_SCALE, (SENTENCE_SCALE + SENTENCE_SCALE_SMALL) / 2, SENTENCE_SCALE_SMALL):
            font = scaled(self.font(), scale, weight=QFont.Weight.DemiBold)
            if QFontMetrics(font).horizontalAdvance(self._sentence.text()) <= width:
                break
        if font != self._sentence.font():
            self._sentence.setFont(font)

    def resizeEvent(self, event: QResizeEvent) -> None:
        width = self.width() - 2 * MARGIN
        height = self._sentence_height()
        self._sentence.setGeometry(MARGIN, MARGIN - 4, width, height + 4)
        row_height = self._row.sizeHint().height()
        self._row.setGeometry(MARGIN, self.height() - row_height - MARGIN // 2, width, row_height)
        self._fit()
