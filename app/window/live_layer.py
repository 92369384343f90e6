"""Draws the data of a picture straight onto an Agg renderer, many times a second.

The same looks as `app.figures.draw`, by cheaper means: curves go to the renderer without artists, texts are rendered
once and stamped, and Qt scales the colour field right into the renderer's buffer.
"""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np
from matplotlib.backend_bases import GraphicsContextBase
from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.figure import Figure
from matplotlib.markers import MarkerStyle
from matplotlib.path import Path
from matplotlib.patheffects import withStroke
from matplotlib.text import Text
from matplotlib.transforms import Affine2D, Bbox
from numpy.typing import NDArray
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QImage, QPainter

from app.figures.draw import (
    DRAGGABLE_SIZE,
    HALO_WIDTH,
    MARK_EDGE,
    MARK_SIZE,
    field_colours,
    field_edges,
    text_size,
)
from app.figures.labels import place_labels
from app.figures.layout import Layout, note_place
from app.figures.picture import Array, Axis, Curve, Field, Mark, Picture, Role
from app.figures.theme import LineStyle, Theme
from app.figures.ticks import span, to_drawing

Pixels = NDArray[np.uint8]
Renderer = Any  # an Agg renderer; Matplotlib ships no types for its backends

_SPRITE_PAD = 3  # pixels around a stamped text


class LiveLayer:
    """The moving part of one canvas, for one layout and theme; made anew with every new frame around it."""

    def __init__(self, renderer: Renderer, layout: Layout, theme: Theme) -> None:
        self._renderer = renderer
        self._layout = layout
        self._theme = theme
        self._scale = float(renderer.dpi) / 72.0  # pixels per point
        self._frame_buffer = self._buffer().copy()
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
        self._draw_spines()
        if note:
            self._draw_note(picture, note, note_colour)

    def pixel_of(self, picture: Picture, x: float, y: float) -> tuple[float, float]:
        """Place of a point of data, in pixels from the lower left corner; NaN where it has none."""
        place = self._to_pixels(picture).transform((to_drawing(picture.x, x), to_drawing(picture.y, y)))
        return float(place[0]), float(place[1])

    def _buffer(self) -> Pixels:
        return np.asarray(self._renderer.buffer_rgba())

    def _restore_ground(self, picture: Picture) -> None:
        """Frame with colour field. A field that stays, as while the cloud is dragged, is kept from its second frame."""
        field, buffer = picture.field, self._buffer()
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
        buffer = self._buffer()
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
            self._contexts[key] = self._line_context(self._theme.lines[role], halo)
        return self._contexts[key]

    def _line_context(self, style: LineStyle, halo: bool) -> GraphicsContextBase:
        context: GraphicsContextBase = self._renderer.new_gc()
        context.set_clip_rectangle(self.box)
        context.set_joinstyle("round")
        context.set_capstyle("butt")
        context.set_foreground(self._theme.halo if halo else style.colour)
        context.set_linewidth(style.width + (HALO_WIDTH if halo else 0.0))  # in points, as the renderer wants it
        if style.dash and not halo:
            context.set_dashes(0.0, list(style.dash))
        return context

    def _draw_curve(self, picture: Picture, curve: Curve, to_pixels: Affine2D, on_field: bool) -> None:
        path = Path(_in_drawing(picture.x, picture.y, curve))
        if on_field and self._theme.needs_halo(curve.role):
            self._renderer.draw_path(self._context(curve.role, True), path, to_pixels)
        self._renderer.draw_path(self._context(curve.role, False), path, to_pixels)

    def _draw_mark(self, picture: Picture, mark: Mark, to_pixels: Affine2D) -> None:
        place = to_pixels.transform((to_drawing(picture.x, mark.x), to_drawing(picture.y, mark.y)))
        if not np.isfinite(place).all():
            return
        style = self._theme.lines[mark.role]
        shape = MarkerStyle(style.marker or "o")
        size = (DRAGGABLE_SIZE if mark.draggable else MARK_SIZE) * self._scale
        context = self._renderer.new_gc()
        context.set_clip_rectangle(self.box)
        face, edge = (self._theme.background, style.colour) if style.hollow else (style.colour, self._theme.halo)
        context.set_foreground(edge)
        context.set_linewidth(MARK_EDGE)
        where = Affine2D(shape.get_transform().get_matrix()).scale(size).translate(*place)
        self._renderer.draw_path(context, shape.get_path(), where, _rgb(face))

    def _draw_labels(self, picture: Picture) -> None:
        size = self._theme.small_size

        def measure(text: str) -> tuple[float, float]:
            return text_size(text, size)

        for label, x, y in place_labels(picture, self._layout.width, self._layout.height, measure):
            colour = self._theme.lines[label.role].colour
            stamp = text_stamp(label.text, size, colour, self._theme.halo, float(self._renderer.dpi))
            self._stamp(stamp, self.box.x0 + x * self._scale, self.box.y0 + y * self._scale)

    def _draw_note(self, picture: Picture, note: str, colour: str) -> None:
        text, right, middle = note_place(picture, self._layout, self._theme, note, text_size)
        if not text:
            return
        # In the row of the title nothing lies under it; a halo would take longer than all curves.
        halo = self._theme.halo if self._layout.title_y is None else ""
        stamp = text_stamp(text, self._theme.small_size, colour, halo, float(self._renderer.dpi))
        half = 0.5 * stamp.shape[1] - _SPRITE_PAD
        self._stamp(stamp, right * self._scale - half, middle * self._scale)

    def _stamp(self, stamp: Pixels, x: float, y: float) -> None:
        height, width = stamp.shape[:2]
        context = self._renderer.new_gc()
        self._renderer.draw_image(context, round(x - 0.5 * width), round(y - 0.5 * height), stamp)

    def _draw_spines(self) -> None:
        context = self._renderer.new_gc()
        context.set_foreground(self._theme.muted)
        context.set_linewidth(0.8)
        context.set_joinstyle("miter")
        context.set_snap(True)
        b = self.box
        path = Path([(b.x0, b.y0), (b.x1, b.y0), (b.x1, b.y1), (b.x0, b.y1), (b.x0, b.y0)], closed=True)
        self._renderer.draw_path(context, path, Affine2D())


@lru_cache(maxsize=4)
def _figure_of(dpi: float) -> Figure:
    """What a text asks for the resolution."""
    return Figure(dpi=dpi)


@lru_cache(maxsize=512)
def text_stamp(text: str, size: float, colour: str, halo: str, dpi: float) -> Pixels:
    """A text as RGBA pixels, bottom row first, middle of the line in the middle; with a halo, or without where its
    colour is empty."""
    width, height = (int(np.ceil(length * dpi / 72.0)) + 2 * _SPRITE_PAD for length in text_size(text, size))
    renderer: Renderer = RendererAgg(width, height, dpi)  # type: ignore[no-untyped-call]
    drawn = Text(0.5 * width, 0.5 * height, text, size=size, color=colour, ha="center", va="center_baseline")
    drawn.set_figure(_figure_of(dpi))
    if halo:
        drawn.set_path_effects([withStroke(linewidth=HALO_WIDTH, foreground=halo, alpha=0.85)])
    drawn.draw(renderer)
    return np.ascontiguousarray(np.asarray(renderer.buffer_rgba())[::-1])


def _in_drawing(x: Axis, y: Axis, curve: Curve) -> Array:
    return np.column_stack([to_drawing(x, curve.x), to_drawing(y, curve.y)])


def _rgb(colour: str) -> tuple[float, float, float]:
    red, green, blue = bytes.fromhex(colour[1:])
    return red / 255.0, green / 255.0, blue / 255.0
