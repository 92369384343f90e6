"""Draws the data of a picture straight onto an Agg renderer, many times a second.

The same looks as `app.figures.draw`, by cheaper means: curves go to the renderer without artists, texts are stamped,
and Qt scales the colour field right into the renderer's buffer.
"""

from __future__ import annotations

import numpy as np
from matplotlib.backend_bases import GraphicsContextBase
from matplotlib.path import Path
from matplotlib.transforms import Affine2D, Bbox
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QImage, QPainter

from app.figures.draw import DRAGGABLE_SIZE, MARK_SIZE, field_colours, field_edges, text_size
from app.figures.labels import place_labels
from app.figures.layout import Layout, note_place
from app.figures.picture import Array, Axis, Curve, Field, Mark, Picture, Role
from app.figures.theme import Theme
from app.figures.ticks import span, to_drawing
from app.window.live_frame import buffer_of, draw_box, line_context, put_mark
from app.window.text_stamps import PAD, Pixels, Renderer, put_line, size_by_letters, stamp_of, text_in_halo


class LiveLayer:
    """The moving part of one canvas, for one layout and theme; made anew with every new frame around it."""

    def __init__(self, renderer: Renderer, layout: Layout, theme: Theme) -> None:
        self._renderer = renderer
        self._layout = layout
        self._theme = theme
        self._scale = float(renderer.dpi) / 72.0  # pixels per point
        self._frame_buffer = buffer_of(self._renderer).copy()
        self._ground: Pixels = self._frame_buffer
        self._ground_field: Field | None = None
        self._last_field: Field | None = None
        left, bottom = layout.left * self._scale, layout.bottom * self._scale
        self.box = Bbox.from_bounds(left, bottom, layout.width * self._scale, layout.height * self._scale)
        self._contexts: dict[tuple[Role, bool], GraphicsContextBase] = {}

    def draw(self, picture: Picture, note: str, note_colour: str) -> None:
        """Puts the kept frame back and draws the picture's data over it."""
        self._restore_ground(picture)
        to_pixels = self._to_pixels(picture)
        on_field = picture.field is not None
        for curve in picture.curves:
            self._draw_curve(picture, curve, to_pixels, on_field)
        for mark in picture.marks:
            if mark.outline is not None:
                self._draw_curve(picture, mark.outline, to_pixels, on_field)
        self._draw_labels(picture)
        for mark in picture.marks:
            self._draw_mark(picture, mark, to_pixels)
        draw_box(self._renderer, self._theme, self.box)
        if note:
            self._draw_note(picture, note, note_colour)

    def pixel_of(self, picture: Picture, x: float, y: float) -> tuple[float, float]:
        """Place of a point of data, in pixels from the lower left corner; NaN where it has none."""
        place = self._to_pixels(picture).transform((to_drawing(picture.x, x), to_drawing(picture.y, y)))
        return float(place[0]), float(place[1])

    def _restore_ground(self, picture: Picture) -> None:
        """Frame with colour field. A field that stays, as while the cloud is dragged, is kept from its second frame."""
        field, buffer = picture.field, buffer_of(self._renderer)
        if field is not None and field is self._ground_field:
            buffer[:] = self._ground
            return
        buffer[:] = self._frame_buffer
        if field is not None:
            self._fill(picture, field)
            if field is self._last_field:
                self._ground, self._ground_field = buffer.copy(), field
        self._last_field = field

    def _to_pixels(self, picture: Picture) -> Affine2D:
        (left, right), (bottom, top) = span(picture.x), span(picture.y)
        sx, sy = self.box.width / (right - left), self.box.height / (top - bottom)
        return Affine2D.from_values(sx, 0.0, 0.0, sy, self.box.x0 - left * sx, self.box.y0 - bottom * sy)

    def _fill(self, picture: Picture, field: Field) -> None:
        colours = np.ascontiguousarray(field_colours(field, self._theme)[::-1])
        rows, columns = field.shade.shape
        left, right, bottom, top = field_edges(picture, field)
        (x0, y0), (x1, y1) = self._to_pixels(picture).transform([(left, bottom), (right, top)])
        buffer = buffer_of(self._renderer)
        height, width = buffer.shape[:2]
        # Red and blue are swapped in both, which scaling does not mind, and Qt is quickest in this format.
        pixels = QImage(buffer.data, width, height, 4 * width, QImage.Format.Format_RGB32)
        cells = QImage(colours.data, columns, rows, 4 * columns, QImage.Format.Format_RGB32)
        painter = QPainter(pixels)
        painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
        painter.setCompositionMode(QPainter.CompositionMode.CompositionMode_Source)
        box_left, box_right = round(self.box.x0), round(self.box.x1)
        box_bottom, box_top = round(self.box.y0), round(self.box.y1)
        painter.setClipRect(
            box_left, height - box_top, box_right - box_left, box_top - box_bottom, Qt.ClipOperation.ReplaceClip
        )
        painter.drawImage(QRectF(x0, height - y1, x1 - x0, y1 - y0), cells)
        painter.end()

    def _context(self, role: Role, halo: bool) -> GraphicsContextBase:
        key = (role, halo)
        if key not in self._contexts:
            behind = self._theme.halo if halo else ""
            self._contexts[key] = line_context(self._renderer, self._theme.lines[role], self.box, behind)
        return self._contexts[key]

    def _draw_curve(self, picture: Picture, curve: Curve, to_pixels: Affine2D, on_field: bool) -> None:
        path = Path(_in_drawing(picture.x, picture.y, curve))
        if on_field and self._theme.needs_halo(curve.role):
            self._renderer.draw_path(self._context(curve.role, True), path, to_pixels)
        self._renderer.draw_path(self._context(curve.role, False), path, to_pixels)

    def _draw_mark(self, picture: Picture, mark: Mark, to_pixels: Affine2D) -> None:
        place = to_pixels.transform((to_drawing(picture.x, mark.x), to_drawing(picture.y, mark.y)))
        if not np.isfinite(place).all():
            return
        size = (DRAGGABLE_SIZE if mark.draggable else MARK_SIZE) * self._scale
        put_mark(self._renderer, self._theme, self._theme.lines[mark.role], place[0], place[1], size, self.box)

    def _draw_labels(self, picture: Picture) -> None:
        size = self._theme.small_size

        def measure(text: str) -> tuple[float, float]:
            return text_size(text, size)

        for label, x, y in place_labels(picture, self._layout.width, self._layout.height, measure):
            colour = self._theme.lines[label.role].colour
            stamp = text_in_halo(label.text, size, colour, self._theme.halo, float(self._renderer.dpi))
            self._stamp(stamp, self.box.x0 + x * self._scale, self.box.y0 + y * self._scale)

    def _draw_note(self, picture: Picture, note: str, colour: str) -> None:
        text, right, middle = note_place(picture, self._layout, self._theme, note, size_by_letters)
        if not text:
            return
        dpi, size = float(self._renderer.dpi), self._theme.small_size
        if self._layout.title_y is not None:
            # In the row of the title nothing lies under it; a halo would take longer than all curves.
            put_line(self._renderer, stamp_of(text, size, colour, dpi), right * self._scale, middle * self._scale, 1.0)
            return
        stamp = text_in_halo(text, size, colour, self._theme.halo, dpi)
        half = 0.5 * stamp.shape[1] - PAD
        self._stamp(stamp, right * self._scale - half, middle * self._scale)

    def _stamp(self, stamp: Pixels, x: float, y: float) -> None:
        height, width = stamp.shape[:2]
        context = self._renderer.new_gc()
        self._renderer.draw_image(context, round(x - 0.5 * width), round(y - 0.5 * height), stamp)


def _in_drawing(x: Axis, y: Axis, curve: Curve) -> Array:
    return np.column_stack([to_drawing(x, curve.x), to_drawing(y, curve.y)])
