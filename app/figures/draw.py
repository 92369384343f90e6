"""Puts a picture on Matplotlib axes, and pictures into files.

The axes are linear in drawing units: log10 of the data along a logarithmic axis, with plain-text ticks. Never
pyplot: figures are made directly, so that nothing is kept behind the caller's back. Lengths are in points (1/72 inch).
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from io import BytesIO
from typing import IO, Any

import numpy as np
from matplotlib import rc_context
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.image import AxesImage
from matplotlib.lines import Line2D
from matplotlib.markers import TICKDOWN, TICKLEFT, TICKRIGHT, MarkerStyle
from matplotlib.patheffects import withStroke
from matplotlib.text import Text
from matplotlib.textpath import TextToPath

from app.figures.labels import place_labels
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
    LegendEntry,
    bar_room,
    bar_ticks,
    lay_out,
    note_place,
    shortened,
    title_size,
    widest,
)
from app.figures.picture import Curve, Field, Picture, Role
from app.figures.theme import LIGHT, LineStyle, Theme, colour_scale
from app.figures.ticks import frame_title, span, to_drawing

HALO_WIDTH = 2.2
MARK_SIZE, DRAGGABLE_SIZE, MARK_EDGE = 6.0, 9.0, 1.2
MM_PER_INCH = 25.4
LEAST_PAGE = 40, 30  # of one picture [mm]

# nothing that changes from one writing to the next
_STAMPS: dict[str, dict[str, str | None]] = {
    "png": {"Software": "Coldward"},
    "svg": {"Date": None, "Creator": "Coldward"},
    "pdf": {"CreationDate": None, "Creator": "Coldward", "Producer": "Coldward"},
}


@lru_cache(maxsize=4096)
def text_size(text: str, size: float) -> tuple[float, float]:
    """Width and line height of a text [pt], the same for every output."""
    width, _, _ = TextToPath().get_text_width_height_descent(text, FontProperties(size=size), ismath=False)
    return float(width), size * LINE


# --------------------------------------------------------------------------- frame: all that is not data


def draw_frame(picture: Picture, axes: Axes, theme: Theme) -> Layout:
    """Draws all but the data: title, legend, ticks, axis labels, colour bar. The room is where the axes stood."""
    figure = axes.get_figure(root=True)
    assert isinstance(figure, Figure)
    page = np.array([*figure.get_size_inches(), *figure.get_size_inches()]) * 72.0
    room = axes.get_position(original=True).bounds * page
    layout = lay_out(picture, theme, (room[0], room[1], room[2], room[3]), text_size)
    axes.set_position(tuple(np.array([layout.left, layout.bottom, layout.width, layout.height]) / page))
    axes.set_facecolor(theme.background)
    axes.set_xlim(*span(picture.x))
    axes.set_ylim(*span(picture.y))
    axes.set_autoscale_on(False)
    for spine in axes.spines.values():
        spine.set(color=theme.muted, linewidth=0.8, zorder=6)
    _draw_ticks(axes, theme, layout, with_grid=picture.field is None)
    _write_axis_titles(picture, axes, theme, layout)
    if layout.title_y is not None:
        size = title_size(picture, theme)
        title = shortened(picture.title, size, room[2] - 2.0 * PAD, text_size)
        place = ((room[0] + PAD) / page[0], layout.title_y / page[1])
        figure.text(*place, title, size=size, weight="bold", color=theme.foreground, va="center_baseline")
    for entry, x, y in layout.legend:
        _draw_entry(figure, theme, entry, x, y)
    if picture.field is not None:
        _draw_colour_bar(picture.field, figure, theme, layout)
    return layout


def _draw_ticks(axes: Axes, theme: Theme, layout: Layout, with_grid: bool) -> None:
    """Ticks as a few artists of our own: Matplotlib's, five artists a tick, cost more than all the rest."""
    axes.xaxis.set_visible(False)
    axes.yaxis.set_visible(False)
    below, beside = axes.get_xaxis_transform(), axes.get_yaxis_transform()
    away = TICK + TICK_GAP
    for place, text in zip(layout.x_ticks.places, layout.x_ticks.texts, strict=True):
        _write(axes, place, -(away + 0.5 * theme.small_size * LINE) / layout.height, text, theme.small_size, theme,
               transform=below, ha="center")  # fmt: skip
    for place, text in zip(layout.y_ticks.places, layout.y_ticks.texts, strict=True):
        _write(axes, -away / layout.width, place, text, theme.small_size, theme, transform=beside, ha="right")
    for length, width, x_places, y_places in (
        (TICK, 0.8, layout.x_ticks.places, layout.y_ticks.places),
        (MINOR_TICK, 0.6, layout.x_ticks.minor, layout.y_ticks.minor),
    ):
        style: dict[str, Any] = {
            "linestyle": "",
            "markersize": length,
            "markeredgewidth": width,
            "color": theme.muted,
            "clip_on": False,
        }
        axes.add_artist(Line2D(x_places, [0.0] * len(x_places), marker=MarkerStyle(TICKDOWN), transform=below, **style))
        axes.add_artist(
            Line2D([0.0] * len(y_places), y_places, marker=MarkerStyle(TICKLEFT), transform=beside, **style)
        )
    if with_grid:
        grid: dict[str, Any] = {"color": theme.grid, "linewidth": 0.7, "zorder": 0.6, "solid_capstyle": "butt"}
        axes.add_artist(Line2D(*_rules(layout.x_ticks.places), transform=below, **grid))
        axes.add_artist(Line2D(*reversed(_rules(layout.y_ticks.places)), transform=beside, **grid))


def _rules(places: Sequence[float]) -> tuple[list[float], list[float]]:
    """Lines across the axes at these places, as one broken line: places, and 0 to 1 across."""
    along = [value for place in places for value in (place, place, np.nan)]
    return along, [0.0, 1.0, np.nan] * len(places)


def _write_axis_titles(picture: Picture, axes: Axes, theme: Theme, layout: Layout) -> None:
    line = theme.font_size * LINE
    x_offset = -(TICK + TICK_GAP + theme.small_size * LINE + 0.5 * line + 1.0)
    lines = 1 + layout.y_title.count("\n")
    y_offset = TICK + 2 * TICK_GAP + widest(layout.y_ticks.texts, theme.small_size, text_size) + 0.5 * lines * line
    _write(axes, 0.5, x_offset / layout.height, frame_title(picture.x), theme.font_size, theme, ha="center")
    _write(axes, -y_offset / layout.width, 0.5, layout.y_title, theme.font_size, theme, ha="center", va="center",
           rotation="vertical", multialignment="center")  # fmt: skip


def _write(axes: Axes, x: float, y: float, text: str, size: float, theme: Theme, **style: Any) -> Text:
    usual: dict[str, Any] = {"transform": axes.transAxes, "va": "center_baseline", "color": theme.foreground}
    return axes.text(x, y, text, size=size, **(usual | style))


def _draw_entry(figure: Figure, theme: Theme, entry: LegendEntry, x: float, y: float) -> None:
    width, height = figure.get_size_inches() * 72.0
    style = theme.lines[entry.role]
    ends = [x + 0.5 * entry.sample] if entry.is_mark else [x, x + entry.sample]
    sample = Line2D([end / width for end in ends], [y / height] * len(ends), transform=figure.transFigure)
    if entry.is_mark:
        _style_mark(sample, style, theme, MARK_SIZE)
    else:
        style_line(sample, style)
    figure.add_artist(sample)
    figure.text((x + entry.sample + SAMPLE_GAP) / width, y / height, entry.name, size=theme.small_size,
                color=theme.foreground, va="center_baseline")  # fmt: skip


def _draw_colour_bar(field: Field, figure: Figure, theme: Theme, layout: Layout) -> None:
    page = np.array([*figure.get_size_inches(), *figure.get_size_inches()]) * 72.0
    bar = figure.add_axes(
        tuple(np.array([layout.left + layout.width + BAR_GAP, layout.bottom, BAR_WIDTH, layout.height]) / page)
    )
    bar.imshow(
        colour_scale(theme, field.split)[:, np.newaxis], origin="lower", aspect="auto", extent=(0.0, 1.0, 0.0, 1.0),
        interpolation="nearest",
    )  # fmt: skip
    for spine in bar.spines.values():
        spine.set(color=theme.muted, linewidth=0.8)
    bar.xaxis.set_visible(False)
    bar.yaxis.set_visible(False)
    ticks = bar_ticks(field, theme, layout.height)
    places = [place for place, _ in ticks]
    bar.add_artist(
        Line2D([1.0] * len(places), places, linestyle="", marker=MarkerStyle(TICKRIGHT), markersize=TICK,
               markeredgewidth=0.8, color=theme.muted, clip_on=False)
    )  # fmt: skip
    for place, text in ticks:
        _write(bar, 1.0 + (TICK + TICK_GAP) / BAR_WIDTH, place, text, theme.small_size, theme, ha="left")
    if 0.0 < field.split < 1.0:
        bar.axhline(field.split, color=theme.lines[Role.THRESHOLD].colour, linewidth=1.4)
    room = bar_room(field, theme, text_size)
    x = (room - BAR_GAP - PAD - 0.5 * theme.font_size * LINE) / BAR_WIDTH
    label = shortened(field.bar_label, theme.font_size, layout.height + 0.5 * TICK, text_size)
    _write(bar, x, 0.5, label, theme.font_size, theme, rotation="vertical", ha="center", va="center")


# --------------------------------------------------------------------------- data


def draw_picture(picture: Picture, axes: Axes, theme: Theme = LIGHT) -> None:
    """Draws a picture on fresh axes. The place of the axes is taken as the room for the frame and all around it."""
    layout = draw_frame(picture, axes, theme)
    if picture.field is not None:
        _draw_field(picture, picture.field, axes, theme)
    on_field = picture.field is not None
    for curve in picture.curves:
        _draw_curve(picture, curve, axes, theme, on_field)
    for mark in picture.marks:
        if mark.outline is not None:
            _draw_curve(picture, mark.outline, axes, theme, on_field)
    for mark in picture.marks:
        point = Line2D([to_drawing(picture.x, mark.x)], [to_drawing(picture.y, mark.y)], zorder=5)
        _style_mark(point, theme.lines[mark.role], theme, DRAGGABLE_SIZE if mark.draggable else MARK_SIZE)
        axes.add_line(point)
    _draw_labels(picture, axes, theme, layout)
    note, right, middle = note_place(picture, layout, theme, drawing_note(picture), text_size)
    if note:
        figure = axes.get_figure(root=True)
        assert isinstance(figure, Figure)
        width, height = figure.get_size_inches() * 72.0
        text = figure.text(right / width, middle / height, note, size=theme.small_size, color=theme.muted, ha="right",
                           va="center_baseline", zorder=7)  # fmt: skip
        _give_halo(text, theme)


def field_edges(picture: Picture, field: Field) -> tuple[float, float, float, float]:
    """Outer edges of the field's cells in drawing units: left, right, bottom, top."""
    edges = []
    for axis, centres in ((picture.x, field.x), (picture.y, field.y)):
        first, last = to_drawing(axis, float(centres[0])), to_drawing(axis, float(centres[-1]))
        half = 0.5 * (last - first) / max(len(centres) - 1, 1)
        edges += [first - half, last + half]
    return edges[0], edges[1], edges[2], edges[3]


def field_colours(field: Field, theme: Theme) -> np.ndarray[tuple[int, ...], np.dtype[np.uint8]]:
    """RGBA of each cell, shape (rows, columns, 4); the background where the shade is NaN."""
    # a NaN stays behind as whatever the cast makes of it, and is painted over below
    with np.errstate(invalid="ignore"):
        row = np.clip(field.shade * 255.0 + 0.5, 0.0, 255.0).astype(np.uint8)
    colours = colour_scale(theme, field.split).view(np.uint32).ravel()[row]
    unknown = np.isnan(field.shade)
    if unknown.any():
        colours[unknown] = np.frombuffer(bytes.fromhex(theme.background[1:] + "ff"), dtype=np.uint32)
    return colours.view(np.uint8).reshape(*row.shape, 4)


def style_line(line: Line2D, style: LineStyle) -> None:
    """Colour, width and dash of a role."""
    line.set(color=style.colour, linewidth=style.width, solid_capstyle="butt", solid_joinstyle="round",
             dash_capstyle="butt", dash_joinstyle="round")  # fmt: skip
    if style.dash:
        line.set_linestyle((0.0, tuple(length / style.width for length in style.dash)))


def drawing_note(picture: Picture) -> str:
    """The picture's note, and what a logarithmic axis cannot show."""
    hidden = any(
        bool((values <= 0.0).any())
        for curve in picture.curves
        for axis, values in ((picture.x, curve.x), (picture.y, curve.y))
        if axis.log
    )
    missing = "values at or below zero have no place on a logarithmic axis" if hidden else ""
    return " · ".join(text for text in (picture.note, missing) if text)


def _style_mark(point: Line2D, style: LineStyle, theme: Theme, size: float) -> None:
    face, edge = (theme.background, style.colour) if style.hollow else (style.colour, theme.halo)
    point.set(linestyle="", marker=style.marker or "o", markersize=size, markerfacecolor=face, markeredgecolor=edge,
              markeredgewidth=MARK_EDGE)  # fmt: skip


def _draw_field(picture: Picture, field: Field, axes: Axes, theme: Theme) -> None:
    image = AxesImage(axes, extent=field_edges(picture, field), origin="lower", interpolation="bilinear",
                      interpolation_stage="rgba", zorder=0.5)  # fmt: skip
    image.set_data(field_colours(field, theme))
    image.set_clip_path(axes.patch)
    axes.add_image(image)


def _draw_curve(picture: Picture, curve: Curve, axes: Axes, theme: Theme, on_field: bool) -> None:
    line = Line2D(to_drawing(picture.x, curve.x), to_drawing(picture.y, curve.y), zorder=3)
    style = theme.lines[curve.role]
    style_line(line, style)
    if on_field and theme.needs_halo(curve.role):
        line.set_path_effects([withStroke(linewidth=style.width + HALO_WIDTH, foreground=theme.halo)])
    axes.add_line(line)


def _draw_labels(picture: Picture, axes: Axes, theme: Theme, layout: Layout) -> None:
    def measure(text: str) -> tuple[float, float]:
        return text_size(text, theme.small_size)

    for label, x, y in place_labels(picture, layout.width, layout.height, measure):
        text = _write(axes, x / layout.width, y / layout.height, label.text, theme.small_size, theme, ha="center",
                      color=theme.lines[label.role].colour, zorder=4)  # fmt: skip
        _give_halo(text, theme)


def _give_halo(text: Text, theme: Theme) -> None:
    text.set_path_effects([withStroke(linewidth=HALO_WIDTH, foreground=theme.halo, alpha=0.85)])


# --------------------------------------------------------------------------- files


def save_pictures(
    pictures: Sequence[Picture],
    target: str | IO[bytes],
    format: str,
    *,
    theme: Theme = LIGHT,
    size_mm: tuple[float, float] | None = None,
    dpi: float = 200.0,
) -> None:
    """Writes pictures, in rows, into one file: exact page size, text as text, the same bytes for the same input.

    `size_mm` is the page's width and height, by default 150 x 110 a picture; `dpi` counts for PNG and for colour
    fields. Raises ValueError for an empty list, an unknown format or a page that is too small.
    """
    if format not in _STAMPS:
        raise ValueError(f"pictures are written as png, svg or pdf, got {format!r}")
    if not pictures:
        raise ValueError("there is no picture to write")
    columns = int(np.ceil(np.sqrt(len(pictures))))
    rows = int(np.ceil(len(pictures) / columns))
    width, height = size_mm if size_mm is not None else (150.0 * columns, 110.0 * rows)
    least_width, least_height = LEAST_PAGE[0] * columns, LEAST_PAGE[1] * rows
    if width < least_width or height < least_height:
        needed = f"{len(pictures)} picture{'s need' if len(pictures) > 1 else ' needs'}"
        raise ValueError(
            f"{needed} a page of at least {least_width} x {least_height} mm, got {width:g} x {height:g} mm"
        )
    figure = Figure(figsize=(width / MM_PER_INCH, height / MM_PER_INCH), dpi=dpi, facecolor=theme.background)
    for i, picture in enumerate(pictures):
        row, column = divmod(i, columns)
        in_row = columns if row < rows - 1 else len(pictures) - row * columns  # the last row fills the width too
        place = (column / in_row, 1.0 - (row + 1) / rows, 1.0 / in_row, 1.0 / rows)
        draw_picture(picture, figure.add_axes(place), theme)
    with rc_context({"svg.fonttype": "none", "svg.hashsalt": "coldward", "pdf.fonttype": 42}):
        figure.savefig(target, format=format, dpi=dpi, facecolor=theme.background, metadata=_STAMPS[format])


def picture_bytes(
    pictures: Sequence[Picture],
    format: str,
    *,
    theme: Theme = LIGHT,
    size_mm: tuple[float, float] | None = None,
    dpi: float = 200.0,
) -> bytes:
    """What `save_pictures` would write."""
    target = BytesIO()
    save_pictures(pictures, target, format, theme=theme, size_mm=size_mm, dpi=dpi)
    return target.getvalue()
