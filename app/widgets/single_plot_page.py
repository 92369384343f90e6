"""A page of one plot under a sentence that says what it shows; where there is nothing to plot, why, and what helps."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property

from PySide6.QtWidgets import QStackedWidget, QVBoxLayout, QWidget

from app.figures.theme import Theme
from app.widgets.banner import Offer
from app.widgets.empty_state import EmptyState
from app.widgets.page import Page
from app.widgets.plot import Source
from app.widgets.plot_heading import PlotHeading


class SinglePlotPage(Page):
    """Attributes: plot; sentence and detail, the texts over it; options, a column for choices under these."""

    plot_name = ""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self.plot = self.add_plot(self.plot_name)
        heading = PlotHeading()
        self.sentence, self.detail = heading.sentence, heading.detail
        self.options = QVBoxLayout()
        heading.addLayout(self.options)
        self._plotted = QWidget()
        column = QVBoxLayout(self._plotted)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addLayout(heading)
        column.addWidget(self.plot.canvas, 1)
        column.addWidget(self.bar)
        self.stack = QStackedWidget()
        self.stack.addWidget(self._plotted)
        self.column.addWidget(self.stack)

    @cached_property
    def empty(self) -> EmptyState:
        """Built when first needed: most pages have something to plot."""
        empty = EmptyState()
        self.stack.addWidget(empty)
        return empty

    @property
    def is_empty(self) -> bool:
        """Whether there is nothing to plot."""
        return self.stack.currentWidget() is not self._plotted

    def show_plot(self, source: Source, sentence: str, detail: str) -> None:
        """Show what `source` gives, and the texts over it."""
        self.stack.setCurrentWidget(self._plotted)
        self.sentence.setText(sentence)
        self.detail.setText(detail)
        self.detail.setVisible(bool(detail))
        self.plot.show(source)

    def show_empty(self, why: str, remedy: str, offers: Sequence[Offer] = ()) -> None:
        """Say why there is nothing to plot, and what can be done."""
        self.plot.clear()
        self.empty.tell(why, remedy, offers)
        self.stack.setCurrentWidget(self.empty)

    def take_focus(self) -> None:
        if self.is_empty:
            self.empty.take_focus()
        else:
            super().take_focus()
