"""The plots of the page Ramp: small ones of the cloud over one time axis, and those of the controls below."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np
from PySide6.QtCore import Signal
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QWidget

from app.figures.picture import Axis, Picture
from app.figures.ramp_columns import COLUMNS, Column, Course, MeasuredPoint, column_picture
from app.figures.ramp_controls import ControlCurve, Handle, control_picture, value_axis
from app.widgets.plot import Plot

AddPlot = Callable[[str], Plot]

_THREE_FROM = 62
"""Digits of width from which three small plots stand in a row."""

SMALL_HEIGHT, CONTROL_HEIGHT = 108, 158
"""[logical pixels] Least of a plot of the cloud; of a control."""

_LETTERS = 90
"""That stand side by side in the whole width."""

_FILLED = 0.3  # of a held axis: with less, a new one is chosen


@dataclass(frozen=True, kw_only=True, eq=False)
class Scene:
    """What all plots share: the end of the time axis, the ends of the stages [s], their names."""

    end: float
    bounds: tuple[float, ...]
    labels: tuple[str, ...]


class ColumnPlots(QWidget):
    """Small plots of quantities along a ramp. time_read(float | None) is sent as the pointer moves over one."""

    time_read = Signal(object)

    def __init__(self, add_plot: AddPlot, columns: Sequence[Column] = COLUMNS, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setSpacing(0)
        self._in_row = 0
        self.plots = {column: add_plot(f"{column.label} against time") for column in columns}
        for plot in self.plots.values():
            plot.canvas.setMinimumHeight(SMALL_HEIGHT)
            plot.canvas.pointer_moved.connect(self._read)
        self._arrange(3)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._arrange(3 if self.width() >= _THREE_FROM * self.fontMetrics().horizontalAdvance("0") else 2)

    def _arrange(self, in_row: int) -> None:
        if in_row == self._in_row:
            return
        self._in_row = in_row
        for place, plot in enumerate(self.plots.values()):
            self._grid.addWidget(plot.canvas, place // in_row, place % in_row)
        for column in range(3):
            self._grid.setColumnStretch(column, int(column < in_row))
        for row in range(3):
            self._grid.setRowStretch(row, int(row < len(self.plots) // in_row))

    def show_courses(
        self, courses: Sequence[Course], scene: Scene, measured: Sequence[MeasuredPoint], cursor: float | None
    ) -> None:
        """Show simulated ramps, the one in question first."""
        for column, plot in self.plots.items():
            plot.show(
                partial(
                    column_picture, column, tuple(courses), scene.end, scene.bounds,
                    measured=tuple(measured), cursor=cursor,
                )
            )  # fmt: skip

    def _read(self, place: tuple[float, float] | None) -> None:
        self.time_read.emit(None if place is None else place[0])


class ControlPlots(QWidget):
    """A plot for each control that moves, the ends of its stages to be dragged.

    Signals: time_read(float | None); handle_dragged(Handle, time [s], value [SI]) while one is moved and
    handle_released() once it stays.
    """

    time_read = Signal(object)
    handle_dragged = Signal(object, float, float)
    handle_released = Signal()

    def __init__(self, add_plot: AddPlot, remove_plot: Callable[[Plot], None], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._add_plot, self._remove_plot = add_plot, remove_plot
        self._row = QHBoxLayout(self)
        self._row.setContentsMargins(0, 0, 0, 0)
        self._row.setSpacing(0)
        self.plots: list[Plot] = []
        self.curves: tuple[ControlCurve, ...] = ()
        self._around: object = None  # the curves: what all plots share, as it is on show
        self._axes: list[Axis | None] = []

    def show_curves(self, curves: tuple[ControlCurve, ...], scene: Scene, cursor: float | None) -> None:
        """Show controls along a ramp. Whether there is room for them is not decided here."""
        while len(self.plots) > len(curves):
            self._remove_plot(self.plots.pop())
            self._axes.pop()
        while len(self.plots) < len(curves):
            place = len(self.plots)
            plot = self._add_plot("a control against time")
            plot.canvas.setFixedHeight(CONTROL_HEIGHT)
            plot.canvas.pointer_moved.connect(self._read)
            plot.canvas.mark_dragged.connect(partial(self._drag, place))
            plot.canvas.mark_released.connect(partial(self._release, place))
            self._row.addWidget(plot.canvas, 1)
            self.plots.append(plot)
            self._axes.append(None)
        around = scene.end, scene.bounds, scene.labels, cursor, len(curves)
        before = self.curves if around == self._around else (None,) * len(curves)
        self.curves, self._around = curves, around
        for place, (plot, curve, old) in enumerate(zip(self.plots, curves, before, strict=True)):
            if old is not None and _look_alike(curve, old):
                continue  # as where only the cloud changes
            axis = self._axes[place] = _held(self._axes[place], curve)
            plot.show(partial(_picture, curve, scene, cursor, axis, _LETTERS // len(curves)))

    def _drag(self, place: int, index: int, time: float, value: float) -> None:
        curve = self.curves[place]
        if index < len(curve.handles):
            self.handle_dragged.emit(curve.handles[index], time, value * curve.scale)

    def _release(self, place: int, index: int, time: float, value: float) -> None:
        self._drag(place, index, time, value)
        self.handle_released.emit()

    def _read(self, place: tuple[float, float] | None) -> None:
        self.time_read.emit(None if place is None else place[0])


def _look_alike(one: ControlCurve, other: ControlCurve) -> bool:
    plain = (one.control, one.scale, one.handles, one.places) == (
        other.control, other.scale, other.handles, other.places,
    )  # fmt: skip
    return plain and np.array_equal(one.times, other.times) and np.array_equal(one.values, other.values)


def _picture(curve: ControlCurve, scene: Scene, cursor: float | None, axis: Axis, letters: int) -> Picture:
    return control_picture(curve, scene.end, scene.bounds, scene.labels, cursor=cursor, axis=axis, letters=letters)


def _held(axis: Axis | None, curve: ControlCurve) -> Axis:
    """The axis on show as long as the curve fills a fair part of it: one that is dragged would shake it."""
    new = value_axis(curve)
    if axis is None or (axis.label, axis.unit, axis.log) != (new.label, new.unit, new.log):
        return new
    finite = curve.values[np.isfinite(curve.values)]
    if not finite.size or finite.min() < axis.low or finite.max() > axis.high:
        return new
    if axis.log:
        share = np.log(new.high / new.low) / np.log(axis.high / axis.low)
    else:
        share = (new.high - new.low) / (axis.high - axis.low)
    return axis if share > _FILLED else new


__all__ = ["ColumnPlots", "ControlPlots", "Handle", "Scene"]
