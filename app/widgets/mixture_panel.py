"""The inside of the page Mixture: what is said of the two clouds on top, then their profiles and numbers, or what
becomes of both along the ramp, and what that does not cover."""

from __future__ import annotations

from collections.abc import Sequence
from enum import Enum
from functools import cached_property
from typing import TYPE_CHECKING

from PySide6.QtCore import Signal
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QRadioButton,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from app.caveat_words import CaveatLine
from app.figures.mixture_courses import MIXTURE_COLUMNS
from app.mixture_sentences import MixtureFact
from app.widgets.banner import Offer
from app.widgets.caveats import Caveats
from app.widgets.empty_state import EmptyState
from app.widgets.fact_table import FactRow, FactTable
from app.widgets.plot_heading import PlotHeading
from app.widgets.ramp_plots import ColumnPlots
from app.widgets.scrolled import scrolled

if TYPE_CHECKING:
    from app.widgets.page import Page


class MixtureView(Enum):
    """Ways to look at a mixture; the value is the word on the button."""

    CLOUDS = "Clouds"
    RAMP = "Along the ramp"


_TIPS = {
    MixtureView.CLOUDS: "The two clouds as they are: profiles, overlap, collisions",
    MixtureView.RAMP: "Both while the first species evaporates and the passenger follows",
}
_LEAST_PLOT = 200
"""[logical pixels] Height that a plot keeps from the table under it."""

_CAVEAT_LINES = 4  # of text, before they scroll


class MixturePanel(QWidget):
    """view_changed() is sent when the user chooses another view."""

    view_changed = Signal()

    def __init__(self, page: Page) -> None:
        super().__init__()
        heading = PlotHeading()
        self.sentence, self.detail = heading.sentence, heading.detail
        self.views = QButtonGroup(self)
        self._choice = QWidget()
        heading.addWidget(self._choice)
        self._make_choice()
        self.profile = page.add_plot("The two clouds along the vertical")
        self.profile.canvas.setMinimumHeight(_LEAST_PLOT)
        self.table = FactTable("The two clouds in numbers")
        self._table_area = scrolled(self.table)
        self._table_area.setViewportMargins(8, 2, 4, 2)
        clouds = QWidget()
        column = QVBoxLayout(clouds)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(4)
        column.addWidget(self.profile.canvas, 5)
        column.addWidget(self._table_area, 4)
        self.courses = ColumnPlots(page.add_plot, MIXTURE_COLUMNS)
        self.stack = QStackedWidget()
        for widget in (clouds, self.courses):
            self.stack.addWidget(widget)
        self.caveats = Caveats()
        self.caveats.setToolTip("What the numbers of the two clouds leave out")
        self._caveats_box = QWidget()
        box = QVBoxLayout(self._caveats_box)
        box.setContentsMargins(16, 4, 8, 4)
        box.addWidget(self.caveats)
        self.body = QVBoxLayout(self)
        self.body.setContentsMargins(0, 0, 0, 0)
        self.body.setSpacing(0)
        self.body.addLayout(heading)
        self.body.addWidget(self.stack, 1)
        self.body.addWidget(self._caveats_box)

    def _make_choice(self) -> None:
        row = QHBoxLayout(self._choice)
        row.setContentsMargins(0, 2, 0, 2)
        row.setSpacing(12)
        for place, view in enumerate(MixtureView):
            button = QRadioButton(view.value)
            button.setToolTip(_TIPS[view])
            button.setAccessibleName(f"{view.value}: {_TIPS[view].lower()}")
            button.setChecked(place == 0)
            self.views.addButton(button, place)
            row.addWidget(button)
        row.addStretch(1)
        self.views.idToggled.connect(lambda _place, chosen: self.view_changed.emit() if chosen else None)

    @cached_property
    def empty(self) -> EmptyState:
        """Built when first needed."""
        empty = EmptyState()
        self.stack.addWidget(empty)
        return empty

    @property
    def is_empty(self) -> bool:
        """Whether there is nothing to plot."""
        return "empty" in vars(self) and self.stack.currentWidget() is self.empty

    @property
    def view(self) -> MixtureView:
        return tuple(MixtureView)[max(self.views.checkedId(), 0)]

    def choose(self, view: MixtureView) -> None:
        """Show a view, as its button does."""
        self.views.button(tuple(MixtureView).index(view)).setChecked(True)

    # ---------------------------------------------------------------- showing

    def tell(self, sentence: str, detail: str, caveats: tuple[CaveatLine, ...] = ()) -> None:
        """The texts over the view, and the caveats under it."""
        self.sentence.setText(sentence)
        self.detail.setText(detail)
        self.sentence.setVisible(bool(sentence))
        self.detail.setVisible(bool(detail))
        self.caveats.show_lines(caveats)
        self._caveats_box.setVisible(bool(caveats))
        self._size_caveats()

    def show_body(self) -> None:
        """The view that is chosen, and what there is in it."""
        self._choice.show()
        self.stack.setCurrentIndex(tuple(MixtureView).index(self.view))

    def show_facts(self, names: tuple[str, str], facts: Sequence[MixtureFact]) -> None:
        """The numbers, those of each species side by side."""
        rows = [FactRow(name=fact.label, cells=(fact.first, fact.second), tip=fact.tip) for fact in facts]
        self.table.show_rows(("", *names), rows)

    def show_empty(self, why: str, remedy: str, offers: Sequence[Offer] = (), *, views: bool = False) -> None:
        """Why there is nothing to plot. views : whether another view may have something"""
        self.empty.tell(why, remedy, offers)
        self._choice.setVisible(views)
        self.stack.setCurrentWidget(self.empty)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._size_caveats()

    def _size_caveats(self) -> None:
        """As high as the caveats are, up to a few lines."""
        document = self.caveats.document()
        document.setTextWidth(max(self.width() - 40, 100))
        most = _CAVEAT_LINES * self.fontMetrics().lineSpacing() + 6
        self.caveats.setFixedHeight(min(round(document.size().height()) + 2, most))

    def take_focus(self) -> None:
        if self.is_empty:
            self.empty.take_focus()
        elif self.view is MixtureView.RAMP:
            next(iter(self.courses.plots.values())).canvas.setFocus()
        else:
            self.profile.canvas.setFocus()
