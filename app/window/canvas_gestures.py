"""What hands do on a live canvas: mouse, wheel and keys become wishes about marks and views.

Movements are gathered: of all that arrive before the event loop turns, only the newest counts.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum, auto
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QEvent, QObject, QPointF, QRectF, Qt, QTimer
from PySide6.QtGui import QColor, QHelpEvent, QKeyEvent, QMouseEvent, QPainter, QPen, QWheelEvent
from PySide6.QtWidgets import QToolTip

from app.figures.picture import Axis, Mark
from app.figures.ticks import span, to_data, to_drawing

if TYPE_CHECKING:
    from app.window.live_canvas import LiveCanvas

View = tuple[float, float, float, float]

REACH = 12.0  # of a mark, logical pixels
STIR = 4.0  # movement that makes a press a drag, logical pixels
ZOOM_STEP = 0.8  # of the width, for one notch of the wheel
PAN_STEP = 0.1  # of the width, for one key
SMALL_STEP, LARGE_STEP = 0.0025, 0.025  # of the width, for an arrow key and with Shift
LINEAR_STEPS_IN_LOG = 0.01  # decades for an arrow key along a logarithmic axis; ten times with Shift
HINT = "Drag to move, or use the arrow keys"

_ARROWS = {
    Qt.Key.Key_Left: (-1, 0),
    Qt.Key.Key_Right: (1, 0),
    Qt.Key.Key_Up: (0, 1),
    Qt.Key.Key_Down: (0, -1),
}


class _Act(Enum):
    MARK = auto()
    PAN = auto()
    BOX = auto()


@dataclass(kw_only=True)
class _Hold:
    """A pressed button: where it went down, what it does, and the view or mark it started from."""

    act: _Act
    start: QPointF
    view: View
    mark: int = -1
    mark_start: tuple[float, float] = (0.0, 0.0)
    grip: QPointF
    moved: bool = False


class CanvasGestures(QObject):
    """Watches one canvas and emits the canvas's signals."""

    def __init__(self, canvas: LiveCanvas) -> None:
        super().__init__(canvas)
        self._canvas = canvas
        self._box_zoom = False
        self._hold: _Hold | None = None
        self._pointer: QPointF | None = None
        self._wheel = 0.0
        self._chosen = 0  # among the draggable marks, for the keys
        self._keyed: int | None = None  # mark that keys are moving
        # what has been asked for since the last painted picture
        self._asked_view: View | None = None
        self._asked_mark: dict[int, tuple[float, float]] = {}
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._follow)
        canvas.installEventFilter(self)

    def set_box_zoom(self, on: bool) -> None:
        self._box_zoom = on
        self._set_cursor()

    def picture_changed(self) -> None:
        """A newer picture is shown: what was asked for before is in it."""
        self._asked_view = None
        self._asked_mark.clear()

    # ---------------------------------------------------------------- events

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        match event.type():
            case QEvent.Type.MouseMove:
                assert isinstance(event, QMouseEvent)
                self._pointer = event.position()
                self._soon.start()
            case QEvent.Type.MouseButtonPress:
                assert isinstance(event, QMouseEvent)
                self._press(event)
            case QEvent.Type.MouseButtonRelease:
                assert isinstance(event, QMouseEvent)
                self._release(event)
            case QEvent.Type.MouseButtonDblClick:
                assert isinstance(event, QMouseEvent)
                place = self._canvas.data_at(event.position().x(), event.position().y())
                if event.button() == Qt.MouseButton.LeftButton and place is not None:
                    self._canvas.double_clicked.emit(*place)
            case QEvent.Type.Wheel:
                assert isinstance(event, QWheelEvent)
                self._wheel += event.angleDelta().y() / 120.0
                self._pointer = event.position()
                self._soon.start()
                event.accept()
            case QEvent.Type.Enter:
                pass
            case QEvent.Type.Leave:
                self._pointer = None
                self._soon.stop()
                self._canvas.pointer_moved.emit(None)
            case QEvent.Type.KeyPress:
                assert isinstance(event, QKeyEvent)
                return self._press_key(event)
            case QEvent.Type.KeyRelease:
                assert isinstance(event, QKeyEvent)
                if not event.isAutoRepeat():
                    self._end_keyed()
                event.ignore()
            case QEvent.Type.FocusOut:
                self._end_keyed()
                return False
            case QEvent.Type.ToolTip:
                assert isinstance(event, QHelpEvent)
                if self._mark_near(QPointF(event.pos())) is None:
                    return False
                QToolTip.showText(event.globalPos(), HINT, self._canvas)
            case _:
                return False
        return True

    def _press(self, event: QMouseEvent) -> None:
        view = self._view()
        inside = self._canvas.data_at(event.position().x(), event.position().y()) is not None
        if event.button() != Qt.MouseButton.LeftButton or view is None:
            event.ignore()
            return
        at = event.position()
        near = self._mark_near(at)
        boxing = self._box_zoom or bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        if near is not None and not boxing:
            mark = self._marks()[near]
            place = self._canvas.place_of(mark.x, mark.y)
            assert place is not None
            self._chosen = [i for i, m in self._marks().items() if m.draggable].index(near)
            self._hold = _Hold(act=_Act.MARK, start=at, view=view, mark=near, mark_start=(mark.x, mark.y),
                               grip=QPointF(*place) - at)  # fmt: skip
        elif inside:
            self._hold = _Hold(act=_Act.BOX if boxing else _Act.PAN, start=at, view=view, grip=QPointF())
        self._pointer = at
        self._set_cursor()
        self._canvas.update()

    def _release(self, event: QMouseEvent) -> None:
        if event.button() != Qt.MouseButton.LeftButton or self._hold is None:
            return
        self._pointer = event.position()
        self._follow()
        hold, self._hold = self._hold, None
        if hold.moved and hold.act is _Act.MARK:
            self._canvas.mark_released.emit(hold.mark, *self._mark_place(hold.mark))
        elif hold.moved and hold.act is _Act.BOX:
            self._ask_box(hold.start, event.position())
        self._set_cursor()
        self._canvas.update()

    def _follow(self) -> None:
        """Does what the newest place of the pointer and the turns of the wheel since the last time ask for."""
        self._soon.stop()
        if self._pointer is None or self._canvas.picture is None:
            return
        at, hold = self._pointer, self._hold
        if self._wheel:
            self._zoom(ZOOM_STEP**self._wheel, at)
            self._wheel = 0.0
        if hold is not None:
            away = at - hold.start
            hold.moved = hold.moved or max(abs(away.x()), abs(away.y())) >= (1.0 if hold.act is _Act.MARK else STIR)
            if hold.moved:
                self._drag(hold, at)
        self._canvas.pointer_moved.emit(self._canvas.data_at(at.x(), at.y()))
        self._set_cursor()

    def _drag(self, hold: _Hold, at: QPointF) -> None:
        if hold.act is _Act.BOX:
            self._canvas.update()
            return
        left, top, width, height = self._box()
        if hold.act is _Act.PAN:
            away = at - hold.start
            self._ask_moved_view(hold.view, -away.x() / width, away.y() / height)
            return
        tip = at + hold.grip
        x0, x1, y0, y1 = self._drawing_view(self._shown_view())
        x = x0 + min(max((tip.x() - left) / width, 0.0), 1.0) * (x1 - x0)
        y = y1 - min(max((tip.y() - top) / height, 0.0), 1.0) * (y1 - y0)
        self._move_mark(hold.mark, *self._data((x, y)))

    # ---------------------------------------------------------------- keys

    def _press_key(self, event: QKeyEvent) -> bool:
        """True where the key was used, or goes on to the parent (ignored); False leaves it to Qt (Tab)."""
        key = Qt.Key(event.key())
        if key in (Qt.Key.Key_Tab, Qt.Key.Key_Backtab):
            return False
        movable = [i for i, mark in self._marks().items() if mark.draggable]
        control = bool(event.modifiers() & Qt.KeyboardModifier.ControlModifier)
        if self._view() is None:
            event.ignore()
        elif key in _ARROWS:
            right, up = _ARROWS[key]
            if movable and not control:
                large = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
                self._step_mark(movable[self._chosen % len(movable)], right, up, large)
            else:
                view = self._view()
                assert view is not None
                self._ask_moved_view(view, PAN_STEP * right, PAN_STEP * up)
        elif key in (Qt.Key.Key_Plus, Qt.Key.Key_Equal) and not control:
            self._zoom(ZOOM_STEP, self._centre())
        elif key in (Qt.Key.Key_Minus, Qt.Key.Key_Underscore) and not control:
            self._zoom(1.0 / ZOOM_STEP, self._centre())
        elif key == Qt.Key.Key_Home:
            self._canvas.home_requested.emit()
        elif key == Qt.Key.Key_M and len(movable) > 1:
            self._chosen = (self._chosen + 1) % len(movable)
            self._canvas.update()
        elif key == Qt.Key.Key_Escape and self._hold is not None:
            self._give_up()
        else:
            event.ignore()
        return True

    def _step_mark(self, index: int, right: int, up: int, large: bool) -> None:
        picture = self._canvas.picture
        assert picture is not None
        x, y = self._mark_place(index)
        self._keyed = index
        self._move_mark(index, _stepped(picture.x, x, right, large), _stepped(picture.y, y, up, large))

    def _end_keyed(self) -> None:
        index, self._keyed = self._keyed, None
        if index is not None and index in self._marks():
            self._canvas.mark_released.emit(index, *self._mark_place(index))

    def _give_up(self) -> None:
        hold, self._hold = self._hold, None
        assert hold is not None
        if hold.act is _Act.MARK and hold.moved:
            self._move_mark(hold.mark, *hold.mark_start)
            self._canvas.mark_released.emit(hold.mark, *hold.mark_start)
        elif hold.act is _Act.PAN and hold.moved:
            self._ask_view(hold.view)
        self._set_cursor()
        self._canvas.update()

    # ---------------------------------------------------------------- marks

    def _marks(self) -> dict[int, Mark]:
        picture = self._canvas.picture
        return {} if picture is None else dict(enumerate(picture.marks))

    def _mark_place(self, index: int) -> tuple[float, float]:
        mark = self._marks()[index]
        return self._asked_mark.get(index, (mark.x, mark.y))

    def _mark_near(self, at: QPointF) -> int | None:
        for index, mark in reversed(self._marks().items()):
            place = self._canvas.place_of(mark.x, mark.y) if mark.draggable else None
            if place is not None and np.hypot(place[0] - at.x(), place[1] - at.y()) <= REACH:
                return index
        return None

    def _move_mark(self, index: int, x: float, y: float) -> None:
        self._asked_mark[index] = (x, y)
        self._canvas.mark_dragged.emit(index, x, y)

    # ---------------------------------------------------------------- views

    def _shown_view(self) -> View:
        picture = self._canvas.picture
        assert picture is not None
        return picture.x.low, picture.x.high, picture.y.low, picture.y.high

    def _view(self) -> View | None:
        """The view that is shown, or already asked for."""
        if self._canvas.picture is None or self._canvas.axes_box() is None:
            return None
        return self._asked_view or self._shown_view()

    def _axes(self) -> tuple[Axis, Axis]:
        picture = self._canvas.picture
        assert picture is not None
        return picture.x, picture.y

    def _box(self) -> View:
        box = self._canvas.axes_box()
        assert box is not None
        return box

    def _drawing_view(self, view: View) -> View:
        x, y = self._axes()
        return to_drawing(x, view[0]), to_drawing(x, view[1]), to_drawing(y, view[2]), to_drawing(y, view[3])

    def _data(self, place: tuple[float, float]) -> tuple[float, float]:
        x, y = self._axes()
        return to_data(x, place[0]), to_data(y, place[1])

    def _centre(self) -> QPointF:
        return QRectF(*self._box()).center()

    def _zoom(self, factor: float, at: QPointF) -> None:
        """Zooms about a pixel; beside the axes along that axis alone."""
        view = self._view()
        if view is None:
            return
        left, top, width, height = self._box()
        x0, x1, y0, y1 = self._drawing_view(view)
        fx, fy = (at.x() - left) / width, 1.0 - (at.y() - top) / height
        x_factor = factor if fx >= 0.0 else 1.0
        y_factor = factor if fy >= 0.0 else 1.0
        x, y = x0 + fx * (x1 - x0), y0 + fy * (y1 - y0)
        self._ask_drawing_view(
            (x + (x0 - x) * x_factor, x + (x1 - x) * x_factor, y + (y0 - y) * y_factor, y + (y1 - y) * y_factor)
        )

    def _ask_box(self, one: QPointF, other: QPointF) -> None:
        rect = QRectF(one, other).normalized().intersected(QRectF(*self._box()))
        if min(rect.width(), rect.height()) < STIR:
            return
        left, top, width, height = self._box()
        x0, x1, y0, y1 = self._drawing_view(self._shown_view())
        sx, sy = (x1 - x0) / width, (y1 - y0) / height
        self._ask_drawing_view(
            (x0 + (rect.left() - left) * sx, x0 + (rect.right() - left) * sx,
             y1 - (rect.bottom() - top) * sy, y1 - (rect.top() - top) * sy)
        )  # fmt: skip

    def _ask_moved_view(self, view: View, right: float, up: float) -> None:
        x0, x1, y0, y1 = self._drawing_view(view)
        dx, dy = right * (x1 - x0), up * (y1 - y0)
        self._ask_drawing_view((x0 + dx, x1 + dx, y0 + dy, y1 + dy))

    def _ask_drawing_view(self, view: View) -> None:
        x, y = self._axes()
        if all(_shows_something(axis, *ends) for axis, ends in ((x, view[:2]), (y, view[2:]))):
            self._ask_view((to_data(x, view[0]), to_data(x, view[1]), to_data(y, view[2]), to_data(y, view[3])))

    def _ask_view(self, view: View) -> None:
        self._asked_view = view
        self._canvas.view_requested.emit(view)

    # ---------------------------------------------------------------- what is seen of it

    def paint(self, painter: QPainter) -> None:
        """Over the plot: the ring of the chosen mark while the canvas has the focus, the box of a zoom."""
        accent = QColor(self._canvas.theme.accent)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if self._canvas.hasFocus():
            movable = [mark for mark in self._marks().values() if mark.draggable]
            chosen = movable[self._chosen % len(movable)] if movable else None
            place = self._canvas.place_of(chosen.x, chosen.y) if chosen is not None else None
            if place is not None and self._canvas.data_at(*place) is not None:
                painter.setPen(QPen(accent, 2.0))
                painter.drawEllipse(QPointF(*place), REACH - 2.0, REACH - 2.0)
        if self._hold is not None and self._hold.act is _Act.BOX and self._pointer is not None:
            box = QRectF(self._hold.start, self._pointer).normalized().intersected(QRectF(*self._box()))
            painter.setPen(QPen(accent, 1.2, Qt.PenStyle.DashLine))
            accent.setAlpha(40)
            painter.fillRect(box, accent)
            painter.drawRect(box)

    def _set_cursor(self) -> None:
        hold = self._hold
        if hold is not None and hold.act is not _Act.BOX:
            shape = Qt.CursorShape.ClosedHandCursor if hold.act is _Act.MARK else Qt.CursorShape.SizeAllCursor
        elif self._box_zoom or hold is not None:
            shape = Qt.CursorShape.CrossCursor
        elif self._pointer is not None and self._mark_near(self._pointer) is not None:
            shape = Qt.CursorShape.OpenHandCursor
        else:
            shape = Qt.CursorShape.ArrowCursor
        if self._canvas.cursor().shape() != shape:
            self._canvas.setCursor(shape)


def _stepped(axis: Axis, value: float, direction: int, large: bool) -> float:
    """One key's step, kept on the axis."""
    if direction == 0:
        return value
    low, high = span(axis)
    step = LINEAR_STEPS_IN_LOG * (10.0 if large else 1.0) if axis.log else (LARGE_STEP if large else SMALL_STEP) * (high - low)
    return to_data(axis, min(max(to_drawing(axis, value) + direction * step, low), high))


def _shows_something(axis: Axis, low: float, high: float) -> bool:
    """Whether a view still tells values apart and stays within the range of numbers."""
    if axis.log:
        return -300.0 < low and high < 300.0 and high - low > 1e-6
    return high - low > 1e-9 * max(abs(low), abs(high)) and max(abs(low), abs(high)) < 1e300
