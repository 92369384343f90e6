"""The Trap page: cuts and sections of the potential, and what becomes of the trap while a control is turned."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, partial
from typing import Any

import numpy as np
from PySide6.QtWidgets import QGridLayout, QStackedWidget, QWidget

from app.answers.trap import TrapAnswer, trap_answer
from app.answers.trap_controls import Control, controls
from app.answers.trap_cuts import Cut, trap_cuts
from app.answers.trap_scan import TrapScan, trap_scan
from app.answers.trap_section import Section, Window, planes, trap_section
from app.answers.trap_shape import TrapShape, shape_scale
from app.engine import CloudAnswer
from app.figures.theme import Theme
from app.figures.trap_cuts import CloudLevels, cut_picture
from app.figures.trap_scan import scan_pictures
from app.figures.trap_section import section_picture
from app.language import translate as _
from app.newest import Job, Steps, Watch
from app.plan import Plan
from app.trap_sentences import NO_SCAN, NO_SCAN_REMEDY, control_name, trap_detail, trap_sentence
from app.units import factor
from app.widgets.empty_state import EmptyState
from app.widgets.page import Page
from app.widgets.plot import Plot
from app.widgets.plot_heading import PlotHeading
from app.widgets.trap_options import TrapOptions, TrapView
from physics.constants import boltzmann

HINT = "Wheel zooms, a drag moves; Whole shows all again"
_MOST_CUTS = 4
_SMALLEST_PLOT = 150
_DEGENERATE = 1.5
"""T/TF below which the Fermi energy is an energy of the cloud."""


@dataclass(frozen=True, kw_only=True, eq=False)
class _Ground:
    """What is drawn without the cloud; `depends_on` is all that it was made from."""

    depends_on: object
    answer: TrapAnswer
    shape: TrapShape | None = None
    cuts: tuple[Cut, ...] = ()
    section: Section | None = None
    scan: TrapScan | None = None

    @property
    def complete(self) -> bool:
        return self.scan is None or self.scan.complete


class TrapPage(Page):
    title = "Trap"
    needs_cloud = False

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self._ground: _Ground | None = None
        self._plan: Plan | None = None
        self._offered: tuple[Control, ...] = ()
        heading = PlotHeading()
        self.sentence, self.detail = heading.sentence, heading.detail
        self.options = TrapOptions()
        self.options.offer_planes(("xz", "yz", "xy"))
        self.options.changed.connect(self._choose)
        heading.addWidget(self.options)
        self.cuts = tuple(self.add_plot(f"Potential along line {place + 1}") for place in range(_MOST_CUTS))
        self.section = self.add_plot("Section of the potential")
        self.scans = tuple(self.add_plot(name) for name in ("Frequencies", "Depth", "Sag"))
        self._all = self.plots
        self._bodies = {
            TrapView.CUTS: _Rows(),
            TrapView.SECTION: _Rows(),
            TrapView.SCAN: _Rows(),
        }
        # All of them once, or those that are never needed would belong to nobody and outlive the window.
        self._bodies[TrapView.CUTS].arrange(self.cuts)
        self._bodies[TrapView.SECTION].arrange((self.section,))
        self._bodies[TrapView.SCAN].arrange(self.scans, wide_first=True)
        self.stack = QStackedWidget()
        for body in self._bodies.values():
            self.stack.addWidget(body)
        self.column.addLayout(heading)
        self.column.addWidget(self.stack, 1)
        self.column.addWidget(self.bar)
        for plot in self._all:
            plot.canvas.pointer_moved.connect(partial(self._read_pointer, plot))
        self.section.view_changed.connect(self.part_wanted)
        self.bar.status.say(HINT)
        self._put_in_front(())

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
    def view(self) -> TrapView:
        """What is chosen to be shown."""
        return self.options.view

    def choose(self, view: TrapView) -> None:
        """Show this view."""
        self.options.show_view(view)

    def _choose(self) -> None:
        for plot in self._all:
            plot.view = None
        self.part_wanted.emit()

    # ---------------------------------------------------------------- parts

    def part(self, plan: Plan) -> Job | None:
        self._plan = plan
        self._offered = controls(plan.trap)
        self.options.offer_controls([control_name(control) for control in self._offered])
        if self.view is TrapView.SCAN and not self._offered:
            self._show_empty(NO_SCAN, NO_SCAN_REMEDY)
            return None
        wanted = self._wanted(plan)
        if self._ground is not None and self._ground.depends_on == wanted and self._ground.complete:
            self._show()
            return None
        match self.view:
            case TrapView.CUTS:
                return lambda: _cuts(plan, wanted)
            case TrapView.SECTION:
                return partial(_section, plan, wanted, self.options.plane.currentText(), self._window())
            case TrapView.SCAN:
                return self._scan(plan, wanted, self._control)

    def _scan(self, plan: Plan, wanted: object, control: Control) -> Steps:
        factors = self.options.factors

        def run(watch: Watch) -> _Ground | None:
            answer = trap_answer(plan)

            def ground(scan: TrapScan) -> _Ground:
                return _Ground(depends_on=wanted, answer=answer, scan=scan)

            scan = trap_scan(plan, control, factors, lambda scan: watch.deliver(ground(scan)), watch.tell)
            return None if scan is None else ground(scan)

        what = _("scan of the {control}").format(control=control_name(control))
        return Steps(what=what, depends_on=(self.title, wanted), run=run)

    @property
    def _control(self) -> Control:
        return self._offered[max(self.options.control.currentIndex(), 0)]

    def _wanted(self, plan: Plan) -> object:
        trap = plan.species.key, plan.species.state, plan.trap
        match self.view:
            case TrapView.CUTS:
                return (*trap, self.view, shape_scale(plan))
            case TrapView.SECTION:
                return (*trap, self.view, shape_scale(plan), self.options.plane.currentText(), self._window())
            case TrapView.SCAN:
                return (*trap, self.view, self._control, self.options.factors)

    def _window(self) -> Window | None:
        """The part of the section that the user wants to see. [m]"""
        view, ground = self.section.view, self._ground
        if view is None or ground is None or ground.section is None:
            return None
        shown = self.section.canvas.picture
        if shown is None:
            return None
        x, y = factor(shown.x.unit), factor(shown.y.unit)
        return view[0] * x, view[1] * x, view[2] * y, view[3] * y

    def take_part(self, answer: Any) -> None:
        if self._plan is None or answer.depends_on != self._wanted(self._plan):
            return
        self._ground = answer
        self._show()

    def show_cloud(self, cloud: CloudAnswer) -> None:
        super().show_cloud(cloud)
        self._plan = cloud.plan

    # ---------------------------------------------------------------- showing

    def _show(self) -> None:
        ground, plan = self._ground, self._plan
        if ground is None or plan is None:
            return
        for plot in self._all:
            plot.canvas.set_stale(False)
        shape = ground.shape
        if ground.scan is None and shape is None:
            self._show_empty(
                trap_sentence(ground.answer, plan.cloud.temperature.value), _("There is no potential to draw.")
            )
            return
        self.sentence.setText(trap_sentence(ground.answer, plan.cloud.temperature.value))
        detail = trap_detail(ground.answer)
        self.detail.setText(detail)
        self.detail.setVisible(bool(detail))
        self.sentence.show()
        levels = self._levels(plan)
        if ground.scan is not None:
            self._show_scan(ground.scan)
        if shape is None:
            return
        self.options.offer_planes([plane.name for plane in planes(shape)])
        if ground.section is not None:
            self._put_in_front((self.section,), TrapView.SECTION)
            self.section.show(partial(section_picture, shape, ground.section, levels))
        else:
            plots = self.cuts[: len(ground.cuts)]
            self._bodies[TrapView.CUTS].arrange(plots)
            self._put_in_front(plots, TrapView.CUTS)
            for plot, cut in zip(plots, ground.cuts, strict=True):
                plot.show(partial(cut_picture, shape, cut, levels))

    def _show_scan(self, scan: TrapScan) -> None:
        """Three plots, or two of a trap that holds atoms without frequencies."""
        stiff = bool(np.any(np.isfinite(scan.frequencies))) or not np.any(scan.trapped)
        shown = self.scans if stiff else self.scans[1:]
        self._bodies[TrapView.SCAN].arrange(shown, wide_first=stiff)
        self._put_in_front(shown, TrapView.SCAN)
        made: list[Any] = []

        def picture(place: int) -> Any:
            if not made:
                made.append(scan_pictures(scan))
            return made[0][place]

        for place, plot in enumerate(self.scans):
            if plot in shown:
                plot.show(partial(picture, place))

    def _levels(self, plan: Plan) -> CloudLevels:
        """Energies of the plan's cloud; what fills its levels only where there is an answer for it."""
        thermal = boltzmann * plan.cloud.temperature.value
        cloud = self.cloud
        if cloud is None or (cloud.plan.trap, cloud.plan.cloud, cloud.plan.species) != (
            plan.trap, plan.cloud, plan.species,
        ):  # fmt: skip
            return CloudLevels(thermal=thermal)
        solved = cloud.equilibrium
        if not cloud.bosons:
            filled = float(solved.fermi_energy) if float(solved.reduced_temperature) < _DEGENERATE else None
            return CloudLevels(thermal=thermal, filled=filled, filled_name="EF")
        filled = float(solved.chemical_potential)
        condensed = float(solved.condensate_fraction) > 0.0 and np.isfinite(filled) and filled > 0.0
        return CloudLevels(thermal=thermal, filled=filled if condensed else None)

    def _show_empty(self, why: str, remedy: str) -> None:
        for plot in self._all:
            plot.clear()
        self._ground = None
        self.sentence.hide()
        self.detail.hide()
        self.empty.tell(why, remedy)
        self.stack.setCurrentWidget(self.empty)
        self._plots[:] = self._all[:1]

    def _put_in_front(self, plots: tuple[Plot, ...], view: TrapView = TrapView.CUTS) -> None:
        """These plots are the page: they are exported, and commands work on them."""
        self._plots[:] = plots or self.cuts[:1]
        self.stack.setCurrentWidget(self._bodies[view])
        if self._active is not None and self._active not in self._plots:
            self._active = None

    def take_focus(self) -> None:
        if self.is_empty:
            self.empty.take_focus()
        else:
            super().take_focus()

    def set_theme(self, theme: Theme) -> None:
        super().set_theme(theme)
        for plot in self._all:
            plot.canvas.set_theme(theme)

    def _read_pointer(self, plot: Plot, place: tuple[float, float] | None) -> None:
        self.bar.status.say(self.pointer_text(plot, place) or HINT)


class _Rows(QWidget):
    """Plots in two columns; an odd one has a row to itself, the last one or the first."""

    def __init__(self) -> None:
        super().__init__()
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setSpacing(0)
        self._shown: tuple[Plot, ...] = ()

    def arrange(self, plots: tuple[Plot, ...], *, wide_first: bool = False) -> None:
        if plots == self._shown:
            return
        for plot in self._shown:
            self._grid.removeWidget(plot.canvas)
            plot.canvas.hide()
        for row in range(self._grid.rowCount()):
            self._grid.setRowStretch(row, 0)
        self._shown = plots
        odd = len(plots) % 2
        place = 0
        for count, plot in enumerate(plots):
            alone = odd and (count == 0 if wide_first else count == len(plots) - 1)
            row, column = divmod(place, 2)
            self._grid.addWidget(plot.canvas, row, column, 1, 2 if alone else 1)
            self._grid.setRowStretch(row, 1)
            plot.canvas.setMinimumHeight(_SMALLEST_PLOT)
            plot.canvas.show()
            place += 2 if alone else 1
        for column in (0, 1):
            self._grid.setColumnStretch(column, 1)


def _cuts(plan: Plan, wanted: object) -> _Ground:
    found = trap_cuts(plan, shape_scale(plan))
    answer = trap_answer(plan)
    if found is None:
        return _Ground(depends_on=wanted, answer=answer)
    return _Ground(depends_on=wanted, answer=answer, shape=found[0], cuts=found[1])


def _section(plan: Plan, wanted: object, name: str, window: Window | None) -> _Ground:
    found = trap_section(plan, shape_scale(plan), name, window)
    answer = trap_answer(plan)
    if found is None:
        return _Ground(depends_on=wanted, answer=answer)
    return _Ground(depends_on=wanted, answer=answer, shape=found[0], section=found[1])
