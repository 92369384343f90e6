"""The inside of the window: bench on the left, verdict on top, pages in the middle, readouts and caveats on the right.

In a window too narrow for all three, readouts and caveats become one more tab beside the pages.
"""

from __future__ import annotations

from PySide6.QtCore import QByteArray, Qt, Signal
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QApplication, QLabel, QSplitter, QTabWidget, QVBoxLayout, QWidget

from app.figures.theme import Theme
from app.pages.candidates import CandidatesPage
from app.pages.collisions import CollisionsPage
from app.pages.field import FieldPage
from app.pages.map import MapPage
from app.pages.mixture import MixturePage
from app.pages.models import ModelsPage
from app.pages.profile import ProfilePage
from app.pages.ramp import RampPage
from app.pages.slices import SlicesPage
from app.pages.trap import TrapPage
from app.widgets.caveats import Caveats
from app.widgets.detail import Detail
from app.widgets.page import Page
from app.widgets.readouts import Readouts
from app.widgets.verdict import Verdict
from app.window.bench import Bench
from app.window.settings import Settings

# In digits of the system's font, about 8 pixels each: larger type folds sooner.
FOLD_WIDTH = 150
READOUTS_WIDTH = 46


class Desk(QWidget):
    """Holds the parts and their places; knows nothing of what they show. page_changed() is sent when another page, or
    the folded readouts, come to the front."""

    page_changed = Signal()

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.verdict = Verdict()
        self.bench = Bench()
        self.map, self.slices, self.profile = MapPage(theme), SlicesPage(theme), ProfilePage(theme)
        self.trap, self.ramp = TrapPage(theme), RampPage(theme)
        self.field, self.collisions, self.models = FieldPage(theme), CollisionsPage(theme), ModelsPage(theme)
        self.mixture, self.candidates = MixturePage(theme), CandidatesPage(theme)
        self.pages: tuple[Page, ...] = (
            self.map,
            self.slices,
            self.profile,
            self.trap,
            self.ramp,
            self.field,
            self.collisions,
            self.models,
            self.mixture,
            self.candidates,
        )
        self.tabs = QTabWidget()
        self.tabs.setDocumentMode(True)
        self.tabs.setAccessibleName("Pages")
        self.tabs.tabBar().setAccessibleName("Pages")
        for page in self.pages:
            self.tabs.addTab(page, page.title)
        self.tabs.currentChanged.connect(self.page_changed)
        self._last_page: Page = self.map
        self.readouts, self.caveats = Readouts(), Caveats()
        self.detail = Detail()
        self.readouts.detail_changed.connect(self.detail.show_text)
        self.side = self._make_side()
        self.columns = QSplitter(Qt.Orientation.Horizontal)
        self.columns.setHandleWidth(1)
        self.columns.setChildrenCollapsible(False)
        for place, widget in enumerate((self.bench, self.tabs, self.side)):
            self.columns.addWidget(widget)
            self.columns.setStretchFactor(place, int(widget is self.tabs))
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addWidget(self.verdict)
        layout.addWidget(self.columns, 1)
        self._panes: tuple[QWidget, ...] = (self.bench, self.tabs, self.readouts, self.detail, self.caveats)
        self.reset_layout()

    def _make_side(self) -> QSplitter:
        side = QSplitter(Qt.Orientation.Vertical)
        side.setHandleWidth(1)
        side.setChildrenCollapsible(False)
        side.addWidget(self.readouts)
        side.addWidget(_titled("", self.detail, (16, 8, 8, 4)))
        side.addWidget(_titled("Caveats", self.caveats, (16, 8, 8, 8)))
        side.setStretchFactor(0, 3)
        side.setStretchFactor(2, 1)
        return side

    # ---------------------------------------------------------------- pages

    @property
    def page(self) -> Page:
        """The page of plots in front, or the one that was before the readouts came to the front."""
        widget = self.tabs.currentWidget()
        if isinstance(widget, Page):
            self._last_page = widget
        return self._last_page

    @property
    def page_in_front(self) -> Page | None:
        """The page of plots that can be seen; None while the folded readouts cover it."""
        widget = self.tabs.currentWidget()
        return widget if isinstance(widget, Page) else None

    @property
    def readouts_in_front(self) -> bool:
        """Whether the readouts can be seen: beside the pages, or as the tab in front."""
        return not self.folded or self.tabs.currentWidget() is self.side

    def show_page(self, number: int) -> None:
        self.tabs.setCurrentWidget(self.pages[number])
        self.pages[number].take_focus()

    def show_readouts(self) -> None:
        if self.folded:
            self.tabs.setCurrentWidget(self.side)
        self.readouts.take_focus()

    # ---------------------------------------------------------------- places

    @property
    def folded(self) -> bool:
        return self.tabs.indexOf(self.side) >= 0

    def resizeEvent(self, event: QResizeEvent) -> None:
        self._fold(self.width() < FOLD_WIDTH * self._digit())

    def _fold(self, fold: bool) -> None:
        if fold == self.folded:
            return
        if fold:
            self.tabs.addTab(self.side, "Readouts")
        else:
            in_front = self.tabs.currentWidget() is self.side
            self.tabs.removeTab(self.tabs.indexOf(self.side))
            self.columns.addWidget(self.side)
            self.side.show()
            if in_front:
                self.tabs.setCurrentWidget(self._last_page)
            self._share_out()

    def reset_layout(self) -> None:
        """Every part in its first size."""
        self._share_out()
        self.side.setSizes([640, 62, 104])

    def _share_out(self) -> None:
        left, right = self.bench.usual_width(), READOUTS_WIDTH * self._digit()
        self.columns.setSizes([left, max(self.width() - left - right, 400), right][: self.columns.count()])

    def _digit(self) -> int:
        return self.fontMetrics().horizontalAdvance("0")

    def next_pane(self, step: int) -> None:
        """Move the keyboard to the next visible part, or with -1 to the one before."""
        panes = [pane for pane in self._panes if pane.isVisible()]
        focus = QApplication.focusWidget()
        # Folded readouts live inside the tabs, so the last pane that holds the focus is the one it is in.
        holding = [i for i, pane in enumerate(panes) if focus and (focus is pane or pane.isAncestorOf(focus))]
        here = holding[-1] if holding else -1
        target = panes[(here + step) % len(panes)] if here >= 0 else panes[0]
        if target is self.bench:
            self.bench.take_focus()
        elif target is self.tabs:
            (self.page_in_front or self.readouts).setFocus()
            if self.page_in_front is not None:
                self.page_in_front.take_focus()
        elif target is self.readouts:
            self.show_readouts()
        else:
            target.setFocus()

    def save_state(self, settings: Settings) -> None:
        settings.put("window/columns", self.columns.saveState())
        settings.put("window/side", self.side.saveState())
        settings.put("window/page", self.page.title)

    def restore_state(self, settings: Settings) -> None:
        """Take up remembered sizes; what is missing or unreadable leaves the first sizes."""
        for splitter, key in ((self.columns, "window/columns"), (self.side, "window/side")):
            state: QByteArray = settings.blob(key)
            if not state.isEmpty() and not splitter.restoreState(state):
                self.reset_layout()
            splitter.setHandleWidth(1)
            splitter.setChildrenCollapsible(False)
        title = settings.text("window/page")
        for page in self.pages:
            if page.title == title:
                self.tabs.setCurrentWidget(page)


def _titled(title: str, widget: QWidget, margins: tuple[int, int, int, int]) -> QWidget:
    """A part with its quiet heading."""
    box = QWidget()
    column = QVBoxLayout(box)
    column.setContentsMargins(*margins)
    column.setSpacing(4)
    if title:
        heading = QLabel(title)
        heading.setObjectName("paneTitle")
        column.addWidget(heading)
    column.addWidget(widget, 1)
    return box
