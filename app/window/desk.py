"""The inside of the window: bench on the left, verdict on top, pages in the middle, readouts and caveats on the right.

In a window too narrow for all three, readouts and caveats become one more tab beside the pages. A page is imported and
built when it first comes to the front, so that a start waits for one page only.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cached_property
from typing import TYPE_CHECKING, TypeVar

from PySide6.QtCore import QByteArray, QSignalBlocker, Qt, Signal
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QApplication, QLabel, QSplitter, QTabWidget, QVBoxLayout, QWidget

from app.figures.theme import Theme
from app.widgets.caveats import Caveats
from app.widgets.detail import Detail
from app.widgets.page import Page
from app.widgets.readouts import Readouts
from app.widgets.verdict import Verdict
from app.window.bench import Bench
from app.window.settings import Settings

if TYPE_CHECKING:
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

_P = TypeVar("_P", bound=Page)

# In digits of the system's font, about 8 pixels each: larger type folds sooner.
FOLD_WIDTH = 150
READOUTS_WIDTH = 46


class Desk(QWidget):
    """Holds the parts and their places; knows nothing of what they show. page_changed() is sent when another page, or
    the folded readouts, come to the front; page_built(Page) when there is one more page, before it is put in."""

    page_changed = Signal()
    page_built = Signal(object)

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.verdict = Verdict()
        self.bench = Bench()
        self.built_pages: list[Page] = []
        self.tabs = QTabWidget()
        self.tabs.setDocumentMode(True)
        self.tabs.setAccessibleName("Pages")
        self.tabs.tabBar().setAccessibleName("Pages")
        for title in PAGES:
            self.tabs.addTab(QWidget(), title)
        self._last_place = 0  # of the page in front, or of the one before the readouts
        self.tabs.currentChanged.connect(self._bring)
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

    @cached_property
    def map(self) -> MapPage:
        from app.pages.map import MapPage

        return self._take_in(MapPage(self._theme))

    @cached_property
    def slices(self) -> SlicesPage:
        from app.pages.slices import SlicesPage

        return self._take_in(SlicesPage(self._theme))

    @cached_property
    def profile(self) -> ProfilePage:
        from app.pages.profile import ProfilePage

        return self._take_in(ProfilePage(self._theme))

    @cached_property
    def trap(self) -> TrapPage:
        from app.pages.trap import TrapPage

        return self._take_in(TrapPage(self._theme))

    @cached_property
    def ramp(self) -> RampPage:
        from app.pages.ramp import RampPage

        return self._take_in(RampPage(self._theme))

    @cached_property
    def field(self) -> FieldPage:
        from app.pages.field import FieldPage

        return self._take_in(FieldPage(self._theme))

    @cached_property
    def collisions(self) -> CollisionsPage:
        from app.pages.collisions import CollisionsPage

        return self._take_in(CollisionsPage(self._theme))

    @cached_property
    def models(self) -> ModelsPage:
        from app.pages.models import ModelsPage

        return self._take_in(ModelsPage(self._theme))

    @cached_property
    def mixture(self) -> MixturePage:
        from app.pages.mixture import MixturePage

        return self._take_in(MixturePage(self._theme))

    @cached_property
    def candidates(self) -> CandidatesPage:
        from app.pages.candidates import CandidatesPage

        return self._take_in(CandidatesPage(self._theme))

    def _take_in(self, page: _P) -> _P:
        """Put a page that has just been built in the place of the empty widget under its tab."""
        self.built_pages.append(page)
        self.page_built.emit(page)
        place = list(PAGES).index(page.title)
        stand_in, in_front = self.tabs.widget(place), self.tabs.currentIndex() == place
        assert stand_in is not None
        with QSignalBlocker(self.tabs):
            self.tabs.insertTab(place, page, page.title)
            if in_front:
                self.tabs.setCurrentIndex(place)
            self.tabs.removeTab(place + 1)
        stand_in.deleteLater()
        return page

    def _bring(self, place: int) -> None:
        """Another tab comes to the front."""
        if self.tabs.widget(place) is not self.side:
            self._last_place = place
            self._page_at(place)
        self.page_changed.emit()

    def _page_at(self, place: int) -> Page:
        return tuple(PAGES.values())[place](self)

    @property
    def pages(self) -> tuple[Page, ...]:
        """All pages; those that were not asked for yet are built now."""
        return tuple(page(self) for page in PAGES.values())

    @property
    def page(self) -> Page:
        """The page of plots in front, or the one that was before the readouts came to the front."""
        return self._page_at(self._last_place)

    @property
    def page_in_front(self) -> Page | None:
        """The page of plots that can be seen; None while the folded readouts cover it."""
        return None if self.tabs.currentWidget() is self.side else self.page

    @property
    def readouts_in_front(self) -> bool:
        """Whether the readouts can be seen: beside the pages, or as the tab in front."""
        return not self.folded or self.tabs.currentWidget() is self.side

    def show_page(self, number: int) -> None:
        self.tabs.setCurrentIndex(number)
        self.page.take_focus()

    def set_theme(self, theme: Theme) -> None:
        """Paint pages in this theme, those too that are built later."""
        self._theme = theme
        for page in self.built_pages:
            page.set_theme(theme)

    @property
    def problems(self) -> tuple[str, ...]:
        """What cannot be read, on the bench and on pages, as sentences."""
        return (*self.bench.problems, *(problem for page in self.built_pages for problem in page.problems))

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
            if self.tabs.currentWidget() is self.side:
                self.tabs.setCurrentIndex(self._last_place)
            self.tabs.removeTab(self.tabs.indexOf(self.side))
            self.columns.addWidget(self.side)
            self.side.show()
            self._share_out()

    def reset_layout(self) -> None:
        """Every part in its first size."""
        self._share_out()
        self.side.setSizes([560, 62, 184])

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
        settings.put("window/page", list(PAGES)[self._last_place])

    def restore_state(self, settings: Settings) -> None:
        """Take up remembered sizes, and build the page that was in front; what is missing or unreadable leaves the
        first sizes, and the first page."""
        for splitter, key in ((self.columns, "window/columns"), (self.side, "window/side")):
            state: QByteArray = settings.blob(key)
            if not state.isEmpty() and not splitter.restoreState(state):
                self.reset_layout()
            splitter.setHandleWidth(1)
            splitter.setChildrenCollapsible(False)
        title = settings.text("window/page")
        if title in PAGES:
            self.tabs.setCurrentIndex(list(PAGES).index(title))
        self._page_at(self._last_place)


PAGES: Mapping[str, Callable[[Desk], Page]] = {
    "Map": lambda desk: desk.map,
    "Slices": lambda desk: desk.slices,
    "Profile": lambda desk: desk.profile,
    "Trap": lambda desk: desk.trap,
    "Ramp": lambda desk: desk.ramp,
    "Field": lambda desk: desk.field,
    "Collisions": lambda desk: desk.collisions,
    "Models": lambda desk: desk.models,
    "Mixture": lambda desk: desk.mixture,
    "Candidates": lambda desk: desk.candidates,
}
"""The tabs in order: their titles, and the pages under them."""


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
