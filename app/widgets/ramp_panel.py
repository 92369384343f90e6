"""The inside of the page Ramp: the verdict on top, the views below, the controls under those that need them."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, Protocol

from PySide6.QtCore import Signal
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QStackedWidget,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.figures.theme import Theme
from app.newest import Steps
from app.plan import Plan
from app.widgets.banner import Offer
from app.widgets.card import ElidedLabel
from app.widgets.caveats import Caveats
from app.widgets.empty_state import EmptyState
from app.widgets.plot_heading import PlotHeading
from app.widgets.ramp_design import DesignView
from app.widgets.ramp_measured import MeasuredView
from app.widgets.ramp_plots import ColumnPlots, ControlPlots, Scene
from app.widgets.ramp_sensitivity import SensitivityView
from app.widgets.ramp_stages import StageEditor
from app.widgets.ramp_waypoints import WaypointsView
from app.widgets.scrolled import scrolled
from app.widgets.stage_table import StageTable

if TYPE_CHECKING:
    from app.caveat_words import CaveatLine
    from app.figures.ramp_controls import ControlCurve
    from app.widgets.page import Page


COURSE, STAGES, DESIGN, WAYPOINTS = "Course", "Stages", "Design", "Waypoints"
COUNTS, MEASURED, CAVEATS = "What counts", "Measured", "Caveats"
NEED_NO_RAMP = (DESIGN, WAYPOINTS)
"""Views that have something to say of a plan without stages."""

ROOM_FOR_GRAPH, ROOM_FOR_ALL = 610, 660
"""[logical pixels] Height from which the controls stand under the plots of the cloud, and from which these plots stand
under the table of stages too."""


class RampView(Protocol):
    """A view that asks for an answer of its own."""

    def set_plan(self, plan: Plan) -> None: ...

    def extra_job(self, plan: Plan) -> tuple[Steps | None, object]:
        """The work whose result it shows, and what that depends on; None where it has all it needs."""

    def take_extra(self, plan: Plan, extra: Any) -> None: ...

    def stopped(self) -> None: ...

    def set_theme(self, theme: Theme) -> None: ...

    def take_focus(self) -> None: ...


class RampPanel(QWidget):
    """Signals: view_changed() when another view comes to the front; arranged() when plots come or go."""

    view_changed = Signal()
    arranged = Signal()

    def __init__(self, page: Page) -> None:
        super().__init__()
        self.body = QVBoxLayout(self)
        self.body.setContentsMargins(0, 0, 0, 0)
        self.body.setSpacing(0)
        heading = PlotHeading(below=2)
        self.sentence, self.detail = heading.sentence, heading.detail
        self.body.addLayout(heading)
        self.columns = ColumnPlots(page.add_plot)
        self.controls = ControlPlots(page.add_plot, page.remove_plot)
        self.table = StageTable()
        self.stages = StageEditor()
        self.empty = EmptyState()
        self.stack = QStackedWidget()
        self.choice = QButtonGroup(self)
        self._switch = QHBoxLayout()
        self._switch.setContentsMargins(12, 2, 12, 4)
        self._switch.setSpacing(2)
        self.keep, self.drop = QToolButton(), QToolButton()
        self._make_reference_buttons()
        self.body.addLayout(self._switch)
        self._under = scrolled(self.table)
        self._under.setViewportMargins(14, 2, 4, 2)
        self.body.addWidget(self.stack, 2)
        self.body.addWidget(self.empty, 1)
        self.body.addWidget(self.columns, 3)
        self.body.addWidget(self.controls)
        self.body.addWidget(self._under)
        self.views: dict[str, QWidget] = {}
        self._extra: dict[str, RampView] = {}
        self.add_view(COURSE, "What becomes of the cloud along the ramp", QWidget())
        self.add_view(STAGES, "The stages, to be edited", self.stages)
        self.design = DesignView(page.add_plot)
        self.add_view(DESIGN, "The ramp that leaves most atoms at the target", self.design, self.design)
        self.waypoints, self.sensitivity, self.measured = WaypointsView(), SensitivityView(), MeasuredView()
        self.add_view(WAYPOINTS, "Clouds to aim at along the ramp", self.waypoints, self.waypoints)
        self.add_view(COUNTS, "Which input moves the atoms at the end most", self.sensitivity, self.sensitivity)
        self.add_view(MEASURED, "Clouds that were measured, and the rest from there", self.measured, self.measured)
        self.caveats = Caveats()
        self.caveats.setAccessibleName("Caveats of the ramp")
        self.caveats.setViewportMargins(14, 6, 10, 6)
        self.add_view(CAVEATS, "What the simulation leaves out", self.caveats)
        self._is_empty = False
        self.show_ramp()

    def _make_reference_buttons(self) -> None:
        # As much room as there is: a long name does not make the page wider.
        self.reference_label = ElidedLabel()
        self.reference_label.setObjectName("plotStatus")
        self.reference_label.setIndent(8)
        self._switch.addWidget(self.reference_label, 1)
        for button, text, tip in (
            (self.keep, "Keep as reference", "Keep this ramp, drawn thin beside those that follow"),
            (self.drop, "Drop", "Draw this ramp alone again"),
        ):
            button.setText(text)
            button.setToolTip(tip)
            button.setAccessibleName(tip)
            button.setAutoRaise(True)
            self._switch.addWidget(button)
        self.drop.hide()

    def add_view(self, name: str, tip: str, widget: QWidget, view: RampView | None = None) -> None:
        """One more view, with its button."""
        button = QToolButton()
        button.setText(name)
        button.setCheckable(True)
        button.setAutoRaise(True)
        button.setToolTip(tip)
        button.setAccessibleName(f"{name}: {tip}")
        number = len(self.views)
        self.choice.addButton(button, number)
        self._switch.insertWidget(number, button)
        self.stack.addWidget(widget)
        self.views[name] = widget
        if view is not None:
            self._extra[name] = view
        if number == 0:
            button.setChecked(True)
        button.clicked.connect(lambda: self.choose_view(name))

    # ---------------------------------------------------------------- views

    @property
    def view(self) -> str:
        """Name of the view in front."""
        return list(self.views)[max(self.choice.checkedId(), 0)]

    def choose_view(self, name: str) -> None:
        """Bring a view to the front."""
        number = list(self.views).index(name)
        self.choice.button(number).setChecked(True)
        self.stack.setCurrentIndex(number)
        self._arrange()
        self.view_changed.emit()

    def show_ramp(self) -> None:
        """There is a ramp."""
        self._is_empty = False
        self._arrange()

    def show_empty(self, why: str, remedy: str, offers: Sequence[Offer]) -> None:
        """There is no ramp: say so in the views that show one."""
        self._is_empty = True
        self.empty.tell(why, remedy, offers)
        self.sentence.setText("")
        self.detail.setText("")
        self._arrange()

    def show_controls(self, curves: tuple[ControlCurve, ...], scene: Scene, reading: float | None) -> None:
        """Show the controls that move, where there is room."""
        before = bool(self.controls.curves)
        self.controls.show_curves(curves, scene, reading)
        if bool(curves) != before:
            self._arrange()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._arrange()

    def _arrange(self) -> None:
        view, there = self.view, not self._is_empty
        own = view != COURSE and (there or view in NEED_NO_RAMP)
        self.empty.setVisible(not there and not own)
        self.stack.setVisible(own)
        beside = view in (STAGES, MEASURED) and self.height() >= ROOM_FOR_ALL
        self.columns.setVisible(there and (view == COURSE or beside))
        graph = view == STAGES or (view == COURSE and self.height() >= ROOM_FOR_GRAPH)
        self.controls.setVisible(there and graph and bool(self.controls.curves))
        self._under.setVisible(there and view == COURSE)
        self.keep.setVisible(there)
        self.sentence.setVisible(there)
        self.detail.setVisible(there and bool(self.detail.text()))
        if view == COURSE:
            most = max(self.table.sizeHint().height() + 10, 60)
            self._under.setFixedHeight(min(most, max(self.height() // 4, 84)))
        self.arranged.emit()

    @property
    def has_times(self) -> bool:
        """Whether there is a plot against time, on which values can be read."""
        return not (self.columns.isHidden() and self.controls.isHidden())

    def tell(self, sentence: str, detail: str) -> None:
        """The verdict, and what limits."""
        self.sentence.setText(sentence)
        self.detail.setText(detail)
        self._arrange()

    def show_caveats(self, lines: tuple[CaveatLine, ...]) -> None:
        """What the simulation does not cover; how much there is stands on the button."""
        self.caveats.show_lines(lines)
        # The gravest stands first, so that its sign says how much care to take.
        text = f"{CAVEATS} {lines[0].sign} {len(lines)}" if lines else CAVEATS
        self.choice.button(list(self.views).index(CAVEATS)).setText(text)

    def show_references(self, names: Sequence[str]) -> None:
        """Which ramps are kept."""
        self.reference_label.setText(f"beside {', '.join(names)}" if names else "")
        self.reference_label.setToolTip(self.reference_label.text())
        self.drop.setVisible(bool(names))

    def set_plan(self, plan: Plan) -> None:
        self.stages.set_plan(plan)
        view = self._extra.get(self.view)
        if view is not None:
            view.set_plan(plan)

    def set_theme(self, theme: Theme) -> None:
        self.table.set_theme(theme)
        for view in self._extra.values():
            view.set_theme(theme)

    # ---------------------------------------------------------------- answers of the views' own

    def extra_wanted(self, plan: Plan) -> bool:
        """Whether the view in front wants something worked out that needs no ramp."""
        return self.extra_job(plan)[0] is not None

    def has_extra(self, plan: Plan) -> bool:
        """Whether the view in front has all it needs."""
        return not self.extra_wanted(plan)

    def extra_job(self, plan: Plan) -> tuple[Steps | None, object]:
        view = self._extra.get(self.view)
        return (None, None) if view is None else view.extra_job(plan)

    def take_extra(self, plan: Plan, extra: Any) -> None:
        view = self._extra.get(self.view)
        if view is not None:
            view.take_extra(plan, extra)

    def stopped(self) -> None:
        """The user stopped what was under way."""
        view = self._extra.get(self.view)
        if view is not None:
            view.stopped()

    def take_focus(self) -> None:
        if self._is_empty and self.empty.isVisible():
            self.empty.take_focus()
        elif self.view == STAGES:
            self.stages.take_focus()
        elif self.view in self._extra:
            self._extra[self.view].take_focus()
        else:
            next(iter(self.columns.plots.values())).canvas.setFocus()
