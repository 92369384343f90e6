"""Draws all of a picture but its data straight onto an Agg renderer: what `app.figures.draw.draw_frame` does with
Matplotlib's axes and artists, some twenty times as quick, so that a limit that moves does not stall a drag."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.backend_bases import GraphicsContextBase
from matplotlib.markers import MarkerStyle
from matplotlib.path import Path
from matplotlib.transforms import Affine2D, Bbox, IdentityTransform

from app.figures.draw import HALO_WIDTH, MARK_EDGE, MARK_SIZE, text_size
from app.figures.layout import (
    BAR_GAP,
    BAR_WIDTH,
    LINE,
    MINOR_TICK,
    PAD,
    SAMPLE_GAP,
    TICK,
    TICK_GAP,
    Layout,
    bar_room,
    bar_ticks,
    lay_out,
    shortened,
    title_size,
    widest,
)
from app.figures.picture import Field, Picture, Role
from app.figures.theme import LineStyle, Theme, colour_scale
from app.figures.ticks import frame_title, span
from app.window.text_stamps import Pixels, Renderer, put_line, put_upright, stamp_of

_DOWN, _LEFT, _RIGHT = (Path([(0.0, 0.0), end]) for end in ((0.0, -1.0), (-1.0, 0.0), (1.0, 0.0)))


def draw_live_frame(picture: Picture, renderer: Renderer, theme: Theme) -> Layout:
    """Fills the renderer's buffer with background, title, legend, ticks, axis labels and colour bar."""
    frame = _Frame(picture, renderer, theme)
    frame.draw()
    return frame.layout


class _Frame:
    """One frame; lengths in points are turned to pixels here."""

    def __init__(self, picture: Picture, renderer: Renderer, theme: Theme) -> None:
        self._picture, self._renderer, self._theme = picture, renderer, theme
        self._dpi = float(renderer.dpi)
        self._scale = self._dpi / 72.0
        room = 0.0, 0.0, renderer.width / self._scale, renderer.height / self._scale
        self.layout = lay_out(picture, theme, room, text_size)

    def draw(self) -> None:
        picture, theme, layout = self._picture, self._theme, self.layout
        ground = np.frombuffer(bytes.fromhex(theme.background[1:] + "ff"), dtype=np.uint32)
        buffer_of(self._renderer).view(np.uint32).fill(ground[0])
        self._draw_ticks(with_grid=picture.field is None)
        self._write_axis_titles()
        if layout.title_y is not None:
            size = title_size(picture, theme)
            room = self._renderer.width / self._scale - 2.0 * PAD
            self._write(PAD, layout.title_y, shortened(picture.title, size, room, text_size), size, weight="bold")
        for entry, x, y in layout.legend:
            style = theme.lines[entry.role]
            if entry.is_mark:
                self._mark(style, x + 0.5 * entry.sample, y)
            else:
                ends = Path([(x, y), (x + entry.sample, y)])
                self._renderer.draw_path(line_context(self._renderer, style), ends, self._points)
            self._write(x + entry.sample + SAMPLE_GAP, y, entry.name, theme.small_size)
        if picture.field is not None:
            self._draw_colour_bar(picture.field)

    @property
    def _points(self) -> Affine2D:
        return Affine2D.from_values(self._scale, 0.0, 0.0, self._scale, 0.0, 0.0)

    def _write(self, x: float, y: float, text: str, size: float, *, share: float = 0.0, weight: str = "normal") -> None:
        stamp = stamp_of(text, size, self._theme.foreground, self._dpi, weight)
        put_line(self._renderer, stamp, x * self._scale, y * self._scale, share)

    def _write_upright(self, x: float, y: float, text: str, size: float) -> None:
        stamps = [stamp_of(line, size, self._theme.foreground, self._dpi) for line in text.split("\n")]
        put_upright(self._renderer, stamps, x * self._scale, y * self._scale)

    def _mark(self, style: LineStyle, x: float, y: float) -> None:
        put_mark(self._renderer, self._theme, style, x * self._scale, y * self._scale, MARK_SIZE * self._scale)

    # ---------------------------------------------------------------- ticks

    def _draw_ticks(self, with_grid: bool) -> None:
        picture, theme, layout = self._picture, self._theme, self.layout
        xs, ys, left, bottom = layout.x_ticks, layout.y_ticks, layout.left, layout.bottom
        away, small = TICK + TICK_GAP, theme.small_size
        (x0, x1), (y0, y1) = span(picture.x), span(picture.y)

        def across(places: Sequence[float]) -> list[float]:
            return [left + layout.width * (place - x0) / (x1 - x0) for place in places]

        def up(places: Sequence[float]) -> list[float]:
            return [bottom + layout.height * (place - y0) / (y1 - y0) for place in places]

        if with_grid:
            ends = (bottom, bottom + layout.height), (left, left + layout.width)
            rules = [[(x, y) for y in ends[0]] for x in across(xs.places)]
            rules += [[(x, y) for x in ends[1]] for y in up(ys.places)]
            box = Bbox.from_bounds(*(self._scale * length for length in (left, bottom, layout.width, layout.height)))
            grid = line_context(self._renderer, LineStyle(colour=theme.grid, width=0.7), box)
            for rule in rules:
                self._renderer.draw_path(grid, Path(rule), self._points)
        for length, width, x_places, y_places in (
            (TICK, 0.8, xs.places, ys.places),
            (MINOR_TICK, 0.6, xs.minor, ys.minor),
        ):
            self._dash(_DOWN, length, width, [(x, bottom) for x in across(x_places)])
            self._dash(_LEFT, length, width, [(left, y) for y in up(y_places)])
        for x, text in zip(across(xs.places), xs.texts, strict=True):
            self._write(x, bottom - away - 0.5 * small * LINE, text, small, share=0.5)
        for y, text in zip(up(ys.places), ys.texts, strict=True):
            self._write(left - away, y, text, small, share=1.0)

    def _dash(self, way: Path, length: float, width: float, places: Sequence[tuple[float, float]]) -> None:
        """Ticks of a length and width [pt] at these places [pt]."""
        if not places:
            return
        context = line_context(self._renderer, LineStyle(colour=self._theme.muted, width=width))
        context.set_snap(True)
        size = Affine2D().scale(length * self._scale)
        self._renderer.draw_markers(context, way, size, Path(places), self._points)

    def _write_axis_titles(self) -> None:
        picture, theme, layout = self._picture, self._theme, self.layout
        line = theme.font_size * LINE
        below = TICK + TICK_GAP + theme.small_size * LINE + 0.5 * line + 1.0
        self._write(
            layout.left + 0.5 * layout.width, layout.bottom - below, frame_title(picture.x), theme.font_size, share=0.5
        )  # fmt: skip
        lines = 1 + layout.y_title.count("\n")
        beside = TICK + 2 * TICK_GAP + widest(layout.y_ticks.texts, theme.small_size, text_size) + 0.5 * lines * line
        self._write_upright(
            layout.left - beside, layout.bottom + 0.5 * layout.height, layout.y_title, theme.font_size
        )  # fmt: skip

    # ---------------------------------------------------------------- colour bar

    def _draw_colour_bar(self, field: Field) -> None:
        theme, layout, scale = self._theme, self.layout, self._scale
        left, right = (round(scale * x) for x in _ends_of_bar(layout))
        bottom, top = scale * layout.bottom, scale * (layout.bottom + layout.height)
        buffer = buffer_of(self._renderer)
        rows = np.arange(max(round(bottom), 0), min(round(top), buffer.shape[0]))
        places = np.clip((256.0 * (rows + 0.5 - bottom) / (top - bottom)).astype(int), 0, 255)
        buffer[buffer.shape[0] - 1 - rows, left:right] = colour_scale(theme, field.split)[places, np.newaxis]
        if 0.0 < field.split < 1.0:
            split = bottom + field.split * (top - bottom)
            style = LineStyle(colour=theme.lines[Role.THRESHOLD].colour, width=1.4)
            self._renderer.draw_path(
                line_context(self._renderer, style), Path([(left, split), (right, split)]), IdentityTransform()
            )  # fmt: skip
        draw_box(self._renderer, theme, Bbox([(scale * _ends_of_bar(layout)[0], bottom), (right, top)]))
        ticks = [
            (layout.bottom + place * layout.height, text) for place, text in bar_ticks(field, theme, layout.height)
        ]
        edge = _ends_of_bar(layout)[1]
        self._dash(_RIGHT, TICK, 0.8, [(edge, y) for y, _ in ticks])
        for y, text in ticks:
            self._write(edge + TICK + TICK_GAP, y, text, theme.small_size)
        label = shortened(field.bar_label, theme.font_size, layout.height + 0.5 * TICK, text_size)
        x = edge - BAR_WIDTH + bar_room(field, theme, text_size) - BAR_GAP - PAD - 0.5 * theme.font_size * LINE
        self._write_upright(x, layout.bottom + 0.5 * layout.height, label, theme.font_size)


def _ends_of_bar(layout: Layout) -> tuple[float, float]:
    left = layout.left + layout.width + BAR_GAP
    return left, left + BAR_WIDTH


# --------------------------------------------------------------------------- strokes


def buffer_of(renderer: Renderer) -> Pixels:
    """The renderer's pixels, top row first."""
    return np.asarray(renderer.buffer_rgba())


def line_context(
    renderer: Renderer, style: LineStyle, clip: Bbox | None = None, halo: str = ""
) -> GraphicsContextBase:  # fmt: skip
    """What the renderer wants to know of a line: of this style, or of the halo behind it."""
    context: GraphicsContextBase = renderer.new_gc()
    if clip is not None:
        context.set_clip_rectangle(clip)
    context.set_joinstyle("round")
    context.set_capstyle("butt")
    context.set_foreground(halo or style.colour)
    context.set_linewidth(style.width + (HALO_WIDTH if halo else 0.0))  # in points, as the renderer wants it
    if style.dash and not halo:
        context.set_dashes(0.0, list(style.dash))
    return context


def put_mark(
    renderer: Renderer, theme: Theme, style: LineStyle, x: float, y: float, size: float, clip: Bbox | None = None
) -> None:
    """A marker of this size at this place [pixels]."""
    shape = MarkerStyle(style.marker or "o")
    context = renderer.new_gc()
    if clip is not None:
        context.set_clip_rectangle(clip)
    face, edge = (theme.background, style.colour) if style.hollow else (style.colour, theme.halo)
    context.set_foreground(edge)
    context.set_linewidth(MARK_EDGE)
    where = Affine2D(shape.get_transform().get_matrix()).scale(size).translate(x, y)
    renderer.draw_path(context, shape.get_path(), where, _rgb(face))


def draw_box(renderer: Renderer, theme: Theme, box: Bbox) -> None:
    """The edges of axes."""
    context = renderer.new_gc()
    context.set_foreground(theme.muted)
    context.set_linewidth(0.8)
    context.set_joinstyle("miter")
    context.set_snap(True)
    corners = [(box.x0, box.y0), (box.x1, box.y0), (box.x1, box.y1), (box.x0, box.y1), (box.x0, box.y0)]
    renderer.draw_path(context, Path(corners, closed=True), IdentityTransform())


def _rgb(colour: str) -> tuple[float, float, float]:
    red, green, blue = bytes.fromhex(colour[1:])
    return red / 255.0, green / 255.0, blue / 255.0
