"""The Profile page: density along an axis of the trap, and what a camera would integrate."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial
from typing import Any

from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QLabel, QRadioButton, QToolButton, QWidget

from app.engine import ProfileAnswer, profile_answer
from app.figures.picture import Axis, Picture
from app.figures.profile import AXES, Depth, profile_picture
from app.figures.theme import Theme
from app.plan import Plan
from app.widgets.page import Page
from app.widgets.plot import Plot

FILLED = 0.35  # of the density axis: with less, a new axis is chosen


class ProfilePage(Page):
    title = "Profile"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self._axis = 0
        self._answer: ProfileAnswer | None = None
        self._held: dict[Depth, Axis] = {}
        self._shown = {depth: self.add_plot(f"Profile of the {depth.value}") for depth in Depth}
        options = QHBoxLayout()
        options.setContentsMargins(14, 6, 14, 2)
        options.setSpacing(12)
        options.addWidget(QLabel("Along axis"))
        self.choice = QButtonGroup(self)
        for place, name in enumerate(AXES):
            button = QRadioButton(name)
            button.setAccessibleName(f"Profile along {name}")
            button.setToolTip(f"Density along trap axis {name}, through the centre")
            button.setChecked(place == 0)
            self.choice.addButton(button, place)
            options.addWidget(button)
        self.choice.idToggled.connect(self._choose)
        self.log = QToolButton()
        self.log.setText("Logarithmic")
        self.log.setCheckable(True)
        self.log.setAccessibleName("Logarithmic density")
        self.log.setToolTip("Show five decades of density")
        self.log.toggled.connect(self._show)
        options.addSpacing(12)
        options.addWidget(self.log)
        options.addStretch(1)
        plots = QHBoxLayout()
        plots.setSpacing(0)
        for plot in self._shown.values():
            plots.addWidget(plot.canvas, 1)
            plot.canvas.pointer_moved.connect(partial(self._read_pointer, plot))
        self.column.addLayout(options)
        self.column.addLayout(plots, 1)
        self.column.addWidget(self.bar)

    def part(self, plan: Plan) -> Callable[[], ProfileAnswer] | None:
        return partial(profile_answer, plan, self._axis)

    def take_part(self, answer: Any) -> None:
        self._answer = answer
        self._show()

    def _choose(self, axis: int, chosen: bool) -> None:
        if chosen:
            self._axis = axis
            for plot in self._shown.values():
                plot.set_view(None)
            self.part_wanted.emit()

    def _show(self) -> None:
        if self._answer is None:
            return
        for depth, plot in self._shown.items():
            plot.show(partial(self._picture, self._answer, depth))

    def _picture(self, answer: ProfileAnswer, depth: Depth) -> Picture:
        """The profile, on the density axis shown before as long as the curves fill a fair part of it: a cloud that is
        dragged would otherwise change the axis all the time."""
        picture = profile_picture(answer, depth, log=self.log.isChecked())
        held = self._held.get(depth)
        alike = (
            held is not None
            and held.log == picture.y.log
            and replace(picture.y, low=held.low, high=held.high) == held
            and FILLED * held.high < picture.y.high <= held.high
        )
        if held is not None and alike:
            return replace(picture, y=held)
        self._held[depth] = picture.y
        return picture

    def _read_pointer(self, plot: Plot, place: tuple[float, float] | None) -> None:
        self.bar.status.say(self.pointer_text(plot, place))
