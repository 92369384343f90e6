"""The two pictures of candidates, a map of thresholds and a ranking, with as much text as a canvas has room for."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from app.answers.candidate_thresholds import Thresholds, thresholds_of
from app.candidate_order import SCORE
from app.figures.candidates_chart import ranked_picture
from app.figures.candidates_map import line_near, line_text, thresholds_picture

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtWidgets import QWidget

    from app.answers.candidate_row import CandidateRow
    from app.figures.picture import Picture
    from app.plan import Plan
    from app.widgets.candidate_model import Shown

_AROUND_MAP = 6.0  # what is above and below the map of thresholds, in lines of text
_BESIDE_MAP = 7.0  # and beside it
_REASONS = 0.64  # share of a ranking's width that a reason may take, in letters of the window
_CHARACTER = 0.95  # width of a character of a label over that of the window's letters
_LINES_AROUND, _LINE = 7.5, 1.25  # of a ranking: what is above and below its rows, and a row, in lines of text


class CandidatePictures:
    """Makes them for one canvas; the thresholds stay while the rows do."""

    def __init__(self, canvas: QWidget) -> None:
        self._canvas = canvas
        self._thresholds: tuple[object, Thresholds] | None = None

    def thresholds(self, rows: Sequence[CandidateRow], plan: Plan) -> Picture:
        """Where each becomes degenerate."""
        key = (tuple(id(row.cloud) for row in rows), plan.cloud.atoms.value)
        if self._thresholds is None or self._thresholds[0] != key:
            self._thresholds = key, thresholds_of(rows, plan.cloud.atoms.value)
        letters = self._canvas.fontMetrics()
        text = 0.85 * letters.height()
        room = max(self._canvas.height() - _AROUND_MAP * text, 2.0 * text)
        across = max(self._canvas.width() - _BESIDE_MAP * text, 2.0 * text)
        # In coarse steps, so that labels do not wander while the window is resized.
        return thresholds_picture(
            self._thresholds[1],
            plan,
            rows,
            text_height=_step_above(text / room),
            character=_step_above(_CHARACTER * letters.averageCharWidth() / across),
        )

    def ranking(self, shown: Shown, name: str, descending: bool) -> Picture:
        """The rows by a column or the score."""
        letters = self._canvas.fontMetrics()
        return ranked_picture(
            shown.rows,
            name,
            "1" if name == SCORE else shown.unit(name),
            descending,
            shown.scores,
            shown.weights,
            room=max(4, int((self._canvas.height() / letters.height() - _LINES_AROUND) / _LINE)),
            longest=max(20, int(_REASONS * self._canvas.width() / letters.averageCharWidth())),
        )

    def threshold_text(self, place: tuple[float, float]) -> str:
        """The threshold at a place of the map of thresholds; empty where there is none."""
        if self._thresholds is None or min(place) <= 0.0:
            return ""
        near = line_near(self._thresholds[1], *place)
        return "" if near is None else line_text(near)


def _step_above(share: float) -> float:
    """The next of few numbers, each larger by the square root of two."""
    return float(2.0 ** (0.5 * math.ceil(2.0 * math.log2(share))))
