"""The canvas on which every page shows its pictures: state in, paint later, newest wins.

`show_picture` only keeps where the newest picture comes from. It is asked for while Qt paints, so a hidden canvas
costs nothing and many changes cost one drawing. Frame, ticks, texts and colour bar are drawn again only where they
differ; data are drawn over them by a `LiveLayer`.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from matplotlib.backends.backend_qtagg import FigureCanvasQTAgg
from matplotlib.figure import Figure
from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QColor, QImage, QPainter, QPaintEvent, QPen, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.figures.draw import drawing_note
from app.figures.layout import legend_entries
from app.figures.picture import Picture
from app.figures.theme import LIGHT, Theme
from app.figures.ticks import span, to_data
from app.window.canvas_gestures import CanvasGestures
from app.window.live_frame import draw_live_frame
from app.window.live_layer import LiveLayer

DPI = 96.0  # of one logical pixel, so that type sizes are those of the widgets around
SMALLEST_SIDE = 8  # logical pixels; nothing is drawn on less


class LiveCanvas(FigureCanvasQTAgg):
    """Shows one picture at a time, live, and tells what the user's hands want."""

    mark_dragged = Signal(int, float, float)
    """A draggable mark (index in `Picture.marks`) is being moved to (x, y) in data."""
    mark_released = Signal(int, float, float)
    """The move has ended here: one step for undo."""
    pointer_moved = Signal(object)
    """(x, y) in data under the pointer, None once it has left the axes."""
    double_clicked = Signal(float, float)
    view_requested = Signal(object)
    """(x_low, x_high, y_low, y_high) wished for by wheel, box, pan or keys."""
    home_requested = Signal()

    def __init__(self, parent: QWidget | None = None, *, theme: Theme = LIGHT) -> None:
        self._source: Callable[[], Picture] | None = None
        self._source_is_new = False
        self._picture: Picture | None = None
        self._layer: LiveLayer | None = None
        self._frame_key: tuple[object, ...] | None = None
        self._needs_live = False
        self._stale_text: str | None = None
        self._theme = theme
        self.full_draws = 0
        self.live_frames = 0
        self.renders_hidden = 0
        super().__init__(Figure(dpi=DPI))  # type: ignore[no-untyped-call]
        if parent is not None:
            self.setParent(parent)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setMinimumSize(0, 0)
        self._gestures = CanvasGestures(self)

    # ---------------------------------------------------------------- what is shown

    def show_picture(self, source: Callable[[], Picture]) -> None:
        """Keeps the newest source of pictures; it is called when, and only if, this canvas is painted."""
        self._source = source
        self._source_is_new = True
        self.update()

    def set_theme(self, theme: Theme) -> None:
        if theme is not self._theme:
            self._theme = theme
            self.update()

    def set_stale(self, stale: bool, text: str = "last good answer") -> None:
        """Marks the plot as not following the present input, with a quiet line; the plot stays."""
        new = text if stale else None
        if new != self._stale_text:
            self._stale_text = new
            self._needs_live = True
            self.update()

    @property
    def theme(self) -> Theme:
        return self._theme

    @property
    def picture(self) -> Picture | None:
        """The picture that was painted last."""
        return self._picture

    @property
    def stale_text(self) -> str | None:
        return self._stale_text

    def set_box_zoom(self, on: bool) -> None:
        """Whether a plain drag draws a box to zoom into, as a drag with Shift always does."""
        self._gestures.set_box_zoom(on)

    # ---------------------------------------------------------------- places

    def data_at(self, x: float, y: float) -> tuple[float, float] | None:
        """Data under a logical pixel of the widget, None outside the axes."""
        place = self._drawing_at(x, y)
        if place is None or self._picture is None:
            return None
        (left, right), (bottom, top) = span(self._picture.x), span(self._picture.y)
        if not (left <= place[0] <= right and bottom <= place[1] <= top):
            return None
        return to_data(self._picture.x, place[0]), to_data(self._picture.y, place[1])

    def place_of(self, x: float, y: float) -> tuple[float, float] | None:
        """Logical pixel of a point of data, None while nothing is shown or where it has no place."""
        if self._layer is None or self._picture is None:
            return None
        px, py = self._layer.pixel_of(self._picture, x, y)
        ratio = self.device_pixel_ratio
        place = (px / ratio, self.height() - py / ratio)
        return place if np.isfinite(place).all() else None

    def axes_box(self) -> tuple[float, float, float, float] | None:
        """Left, top, width and height of the axes in logical pixels."""
        if self._layer is None:
            return None
        box, ratio = self._layer.box, self.device_pixel_ratio
        left, top = float(box.x0) / ratio, self.height() - float(box.y1) / ratio
        return left, top, float(box.width) / ratio, float(box.height) / ratio

    def _drawing_at(self, x: float, y: float) -> tuple[float, float] | None:
        box = self.axes_box()
        if box is None or self._picture is None:
            return None
        left, top, width, height = box
        (x0, x1), (y0, y1) = span(self._picture.x), span(self._picture.y)
        return x0 + (x - left) / width * (x1 - x0), y1 - (y - top) / height * (y1 - y0)

    # ---------------------------------------------------------------- painting

    def paintEvent(self, event: QPaintEvent) -> None:
        if min(self.width(), self.height()) < SMALLEST_SIDE:
            return
        self._render()
        painter = QPainter(self)
        if self._layer is None:
            painter.fillRect(self.rect(), QColor(self._theme.background))
        else:
            buffer = self.buffer_rgba()  # type: ignore[no-untyped-call]
            height, width = buffer.shape[:2]
            image = QImage(buffer, width, height, 4 * width, QImage.Format.Format_RGBX8888)
            image.setDevicePixelRatio(self.device_pixel_ratio)
            painter.setCompositionMode(QPainter.CompositionMode.CompositionMode_Source)
            painter.drawImage(0, 0, image)
            painter.setCompositionMode(QPainter.CompositionMode.CompositionMode_SourceOver)
            self._gestures.paint(painter)
        if self.hasFocus():
            painter.setPen(QPen(QColor(self._theme.accent), 2.0))
            painter.drawRect(self.rect().adjusted(1, 1, -1, -1))
        painter.end()

    def _render(self) -> None:
        """Brings the buffer up to date: at most one call of the source, the frame only where it differs."""
        if self._source_is_new and self._source is not None:
            self._source_is_new = False
            if not self.isVisible():
                self.renders_hidden += 1
            self._take(self._source())
        if self._picture is None:
            return
        key = self._key_of(self._picture)
        if key != self._frame_key or self._layer is None:
            self._layer = self._draw_frame(self._picture)
            self._frame_key = key
            self._needs_live = True
        if self._needs_live:
            self._needs_live = False
            self.live_frames += 1
            note, colour = drawing_note(self._picture), self._theme.muted
            if self._stale_text is not None:
                note, colour = self._stale_text, self._theme.warning
            self._layer.draw(self._picture, note, colour)

    def _take(self, picture: Picture) -> None:
        self._picture = picture
        self._needs_live = True
        self._gestures.picture_changed()
        if self.accessibleName() != picture.title:
            self.setAccessibleName(picture.title)
        if self.accessibleDescription() != picture.summary:
            self.setAccessibleDescription(picture.summary)

    def _key_of(self, picture: Picture) -> tuple[object, ...]:
        """All that the frame depends on."""
        field = picture.field
        return (
            picture.title, picture.x, picture.y, legend_entries(picture),
            None if field is None else (field.split, field.bar_label, field.ticks),
            self._theme, self.width(), self.height(), self.devicePixelRatioF(),
        )  # fmt: skip

    def _draw_frame(self, picture: Picture) -> LiveLayer:
        self.full_draws += 1
        ratio = self.devicePixelRatioF() or 1.0  # rarely 0 before the first show
        self._set_device_pixel_ratio(ratio)
        figure = self.figure
        # whole pixels also at fractional ratios
        width, height = (float(np.ceil(side * ratio)) / figure.dpi for side in (self.width(), self.height()))
        figure.set_size_inches(width, height, forward=False)
        renderer = self.get_renderer()  # type: ignore[no-untyped-call]
        return LiveLayer(renderer, draw_live_frame(picture, renderer, self._theme), self._theme)

    def draw_idle(self) -> None:
        """Draws all again at the next paint (Matplotlib's own changes, such as another pixel ratio, end here)."""
        self._frame_key = None
        self.update()

    def resizeEvent(self, event: QResizeEvent) -> None:
        QWidget.resizeEvent(self, event)

    def showEvent(self, event: QShowEvent) -> None:
        QWidget.showEvent(self, event)
