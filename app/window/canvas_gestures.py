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

from app.figures.picture import Mark
from app.window.views import View, at_shares, boxed, moved, stepped, view_of, zoomed

if TYPE_CHECKING:
    from app.window.live_canvas import LiveCanvas

REACH = 12.0  # of a mark, logical pixels
STIR = 4.0  # movement that makes a press a drag, logical pixels
ZOOM_STEP = 0.8  # of the width, for one notch of the wheel
PAN_STEP = 0.1  # of the width, for one key
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
            self._cut_box(hold.start, event.position())
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
        if hold.act is _Act.PAN:
            away, box = at - hold.start, self._box()
            self._pan(hold.view, -away.x() / box.width(), away.y() / box.height())
            return
        picture = self._canvas.picture
        assert picture is not None
        self._move_mark(hold.mark, *at_shares(picture, *self._shares(at + hold.grip)))

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
                self._pan(view, PAN_STEP * right, PAN_STEP * up)
        elif key in (Qt.Key.Key_Plus, Qt.Key.Key_Equal) and not control:
            self._zoom(ZOOM_STEP, self._box().center())
        elif key in (Qt.Key.Key_Minus, Qt.Key.Key_Underscore) and not control:
            self._zoom(1.0 / ZOOM_STEP, self._box().center())
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
        self._move_mark(index, stepped(picture.x, x, right, large), stepped(picture.y, y, up, large))

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
            self._ask(hold.view)
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

    def _view(self) -> View | None:
        """The view that is shown, or already asked for."""
        picture = self._canvas.picture
        if picture is None or self._canvas.axes_box() is None:
            return None
        return self._asked_view or view_of(picture)

    def _shares(self, at: QPointF) -> tuple[float, float]:
        """Place of a logical pixel as shares of the axes."""
        box = self._box()
        return (at.x() - box.left()) / box.width(), (box.bottom() - at.y()) / box.height()

    def _box(self) -> QRectF:
        box = self._canvas.axes_box()
        return QRectF() if box is None else QRectF(*box)

    def _zoom(self, factor: float, at: QPointF) -> None:
        picture, view = self._canvas.picture, self._view()
        if picture is not None and view is not None:
            self._ask(zoomed(picture, view, factor, *self._shares(at)))

    def _pan(self, view: View, right: float, up: float) -> None:
        picture = self._canvas.picture
        if picture is not None:
            self._ask(moved(picture, view, right, up))

    def _cut_box(self, one: QPointF, other: QPointF) -> None:
        rect = QRectF(one, other).normalized().intersected(self._box())
        picture = self._canvas.picture
        if picture is None or min(rect.width(), rect.height()) < STIR:
            return
        (left, bottom), (right, top) = self._shares(rect.bottomLeft()), self._shares(rect.topRight())
        self._ask(boxed(picture, view_of(picture), (left, right), (bottom, top)))

    def _ask(self, view: View | None) -> None:
        if view is not None:
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
            box = QRectF(self._hold.start, self._pointer).normalized().intersected(self._box())
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
