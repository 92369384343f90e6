"""Pictures on axes and in files: right places, nothing cut or covered, exact pages, the same bytes each time."""

from __future__ import annotations

import io
import re
import subprocess
import sys
from dataclasses import replace
from itertools import combinations

import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.text import Text
from PIL import Image

from app.figures.draw import draw_picture, drawing_note, field_colours, picture_bytes, save_pictures
from app.figures.layout import legend_entries
from app.figures.picture import Axis, Curve, Field, Label, Mark, Picture, Role
from app.figures.theme import DARK, LIGHT, colour_scale

SIZES = [(786, 603), (604, 285), (380, 260)]


def drawn(picture: Picture, size=(604, 400), theme=LIGHT) -> tuple[Figure, np.ndarray]:
    figure = Figure(figsize=(size[0] / 96, size[1] / 96), dpi=96, facecolor=theme.background)
    canvas = FigureCanvasAgg(figure)
    draw_picture(picture, figure.add_axes((0, 0, 1, 1)), theme)
    canvas.draw()
    return figure, np.asarray(canvas.buffer_rgba())[..., :3].astype(int)


def pixel_at(figure: Figure, picture: Picture, x: float, y: float) -> tuple[int, int]:
    """Row and column of a point of data, found without the drawing code: the axes box, and logarithms."""
    box = figure.axes[0].get_position()
    shares = []
    for axis, value in ((picture.x, x), (picture.y, y)):
        low, high, value = np.log10([axis.low, axis.high, value]) if axis.log else (axis.low, axis.high, value)
        shares.append((value - low) / (high - low))
    width, height = figure.bbox.size
    across, up = box.x0 + shares[0] * box.width, box.y0 + shares[1] * box.height
    return int((1.0 - up) * height), int(across * width)


def rgb(colour: str) -> list[int]:
    return list(bytes.fromhex(colour[1:]))


# ------------------------------------------------------------------ places


def test_a_mark_is_drawn_at_its_place_on_logarithmic_axes(a_map):
    picture = replace(a_map(1.0), labels=())
    figure, pixels = drawn(picture)
    row, column = pixel_at(figure, picture, 1e5, 2e-6)
    assert pixels[row, column].tolist() == rgb(LIGHT.lines[Role.CLOUD].colour)


def test_a_curve_runs_through_its_points_and_breaks_at_nan():
    x = np.array([0.0, 4.0, np.nan, 6.0, 10.0])
    picture = Picture(
        title="", x=Axis(label="x", unit="", low=0.0, high=10.0), y=Axis(label="y", unit="", low=0.0, high=1.0),
        curves=(Curve(name="", role=Role.TOTAL, x=x, y=np.full(5, 0.53)),),
    )  # fmt: skip
    figure, pixels = drawn(picture)
    ink = rgb(LIGHT.lines[Role.TOTAL].colour)
    assert pixels[pixel_at(figure, picture, 2.2, 0.53)].tolist() == ink
    assert pixels[pixel_at(figure, picture, 7.9, 0.53)].tolist() == ink
    assert pixels[pixel_at(figure, picture, 5.2, 0.53)].tolist() == [255, 255, 255]


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_a_field_has_its_colours_at_their_places(theme):
    x, y = np.geomspace(1.0, 1e4, 41), np.linspace(0.0, 1.0, 21)
    shade = np.where((x > 100.0)[np.newaxis] & (y > 0.5)[:, np.newaxis], 1.0, 0.0)
    picture = Picture(
        title="", x=Axis(label="x", unit="", low=1.0, high=1e4, log=True),
        y=Axis(label="y", unit="", low=0.0, high=1.0),
        field=Field(x=x, y=y, shade=shade, split=0.5, bar_label="", ticks=()),
    )  # fmt: skip
    figure, pixels = drawn(picture, theme=theme)
    scale = colour_scale(theme, 0.5)[:, :3].astype(int)
    for place, colour in (((2e3, 0.8), scale[255]), ((2e3, 0.2), scale[0]), ((5.0, 0.8), scale[0])):
        assert np.abs(pixels[pixel_at(figure, picture, *place)] - colour).max() <= 1


def test_cells_of_unknown_shade_show_the_background():
    shade = np.array([[0.0, np.nan], [1.0, 0.5]])
    field = Field(x=np.arange(2.0), y=np.arange(2.0), shade=shade, split=0.5, bar_label="", ticks=())
    colours = field_colours(field, DARK)
    assert colours[0, 1].tolist() == [*rgb(DARK.background), 255]
    assert colours[0, 0].tolist() == colour_scale(DARK, 0.5)[0].tolist()


# ------------------------------------------------------------------ nothing cut, nothing covered


def texts_of(figure: Figure) -> list[Text]:
    everything = [text for axes in figure.axes for text in axes.texts] + list(figure.texts)
    return [text for text in everything if text.get_text()]


@pytest.mark.parametrize("size", SIZES, ids=str)
@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_no_text_is_cut_off_or_covers_another(any_picture, size, theme):
    figure, _ = drawn(any_picture(1.0), size, theme)
    renderer = figure.canvas.get_renderer()
    boxes = [(text.get_text(), text.get_window_extent(renderer)) for text in texts_of(figure)]
    assert len(boxes) > 8
    for text, box in boxes:
        assert box.x0 >= 0 and box.y0 >= 0, text  # noqa: PT018
        assert box.x1 <= size[0] and box.y1 <= size[1], text  # noqa: PT018
    for (one, a), (other, b) in combinations(boxes, 2):
        assert not (a.x0 + 1 < b.x1 and b.x0 + 1 < a.x1 and a.y0 + 2 < b.y1 and b.y0 + 2 < a.y1), (one, other)


@pytest.mark.parametrize("size", SIZES, ids=str)
def test_the_legend_stands_above_the_axes_and_names_each_thing_once(any_picture, size):
    picture = any_picture(1.0)
    figure, _ = drawn(picture, size)
    top = figure.axes[0].get_position().y1
    written = {text.get_text(): text for text in figure.texts}
    names = [entry.name for entry in legend_entries(picture)]
    assert len(names) == len(set(names)) >= 4
    for name in names:
        assert written[name].get_position()[1] > top


def test_ticks_of_a_colour_bar_give_way_to_that_of_the_threshold(a_map):
    picture = a_map(1.0)
    crowded = replace(picture.field, ticks=((0.58, "near"), (0.6, "threshold"), (0.61, "nearer"), (0.9, "far")))
    figure, _ = drawn(replace(picture, field=crowded))
    shown = {text.get_text() for text in figure.axes[1].texts}
    assert {"threshold", "far"} <= shown
    assert not {"near", "nearer"} & shown


def test_axes_too_small_for_their_surroundings_are_still_drawn(any_picture):
    for size in ((90, 60), (30, 200), (200, 30), (9, 9)):
        drawn(any_picture(1.0), size)


def test_a_long_title_ends_in_an_ellipsis(a_profile):
    figure, _ = drawn(replace(a_profile(1.0), title="a very long title " * 9), (380, 260))
    assert any(text.get_text().startswith("a very") and text.get_text().endswith("…") for text in figure.texts)


def test_labels_keep_inside_the_frame_and_off_the_mark(a_map):
    picture = a_map(1.0)
    labels = (
        Label(text="at the edge", role=Role.DECADE, x=1.01e3, y=1e-4),
        Label(text="outside", role=Role.DECADE, x=1e2, y=1e-4),
        Label(text="upon the mark", role=Role.DECADE, x=1e5, y=2.2e-6),
        Label(text="first", role=Role.DECADE, x=1e7, y=1e-8),
        Label(text="second", role=Role.DECADE, x=1.05e7, y=1.05e-8),
    )
    figure, _ = drawn(replace(picture, labels=labels))
    axes = figure.axes[0]
    shown = {text.get_text(): text for text in axes.texts}
    assert {"at the edge", "first"} <= set(shown)
    assert not {"outside", "upon the mark", "second"} & set(shown)
    assert shown["at the edge"].get_window_extent().x0 >= axes.bbox.x0


def test_values_that_a_logarithmic_axis_cannot_show_are_mentioned():
    x = np.linspace(1.0, 10.0, 50)
    curve = Curve(name="", role=Role.FIRST, x=x, y=x - 3.0)
    axis = Axis(label="y", unit="", low=0.1, high=10.0, log=True)
    picture = Picture(title="t", x=Axis(label="x", unit="", low=1.0, high=10.0), y=axis, curves=(curve,), note="so far")
    assert drawing_note(picture) == "so far · values at or below zero have no place on a logarithmic axis"
    figure, _ = drawn(picture)  # warnings are errors here
    assert any("at or below zero" in text.get_text() for text in figure.texts)
    assert drawing_note(replace(picture, curves=(), note="")) == ""


# ------------------------------------------------------------------ files


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_png_has_the_size_and_resolution_asked_for(any_picture, theme):
    data = picture_bytes([any_picture(1.0)], "png", theme=theme, size_mm=(127.0, 88.9), dpi=200.0)
    image = Image.open(io.BytesIO(data))
    assert image.size == (1000, 700)
    assert image.info["dpi"] == pytest.approx((200.0, 200.0), abs=0.02)
    assert image.convert("RGB").getpixel((0, 0)) == tuple(rgb(theme.background))


def test_svg_has_the_size_asked_for_and_text_as_text(any_picture):
    picture = any_picture(1.0)
    text = picture_bytes([picture], "svg", size_mm=(127.0, 88.9)).decode()
    assert 'width="360pt" height="252pt"' in text
    assert f">{picture.title}</text>" in text
    for entry in legend_entries(picture):
        assert f">{entry.name}</text>" in text


def test_pdf_has_the_size_asked_for_and_keeps_its_fonts(any_picture):
    data = picture_bytes([any_picture(1.0)], "pdf", size_mm=(127.0, 88.9))
    box = re.search(rb"/MediaBox \[([^]]*)\]", data)
    assert box is not None
    assert [float(edge) for edge in box[1].split()] == pytest.approx([0.0, 0.0, 360.0, 252.0], abs=0.01)
    assert b"/CIDFontType2" in data
    assert b"/Type3" not in data
    assert b"CreationDate" not in data


@pytest.mark.parametrize("format", ["png", "svg", "pdf"])
def test_the_same_pictures_give_the_same_bytes(a_map, a_slice, format):
    once = picture_bytes([a_map(1.0), a_slice(1.0)], format)
    picture_bytes([a_slice(2.0)], format)
    assert picture_bytes([a_map(1.0), a_slice(1.0)], format) == once
    assert picture_bytes([a_map(1.1), a_slice(1.0)], format) != once


def test_several_pictures_share_a_page_in_rows_that_fill_it(tmp_path, a_map, a_slice, a_profile):
    path = tmp_path / "three.svg"
    save_pictures([a_map(1.0), a_slice(1.0), a_profile(1.0)], str(path), "svg", size_mm=(300.0, 220.0))
    text = path.read_text(encoding="utf-8")
    for picture in (a_map(1.0), a_slice(1.0), a_profile(1.0)):
        assert f">{picture.title}</text>" in text


@pytest.mark.parametrize(
    ("count", "format", "size", "message"),
    [
        (1, "gif", None, "written as png, svg or pdf, got 'gif'"),
        (0, "png", None, "there is no picture to write"),
        (1, "png", (20.0, 90.0), "1 picture needs a page of at least 40 x 30 mm, got 20 x 90 mm"),
        (3, "png", (70.0, 90.0), "3 pictures need a page of at least 80 x 60 mm, got 70 x 90 mm"),
    ],
)
def test_what_cannot_be_written_is_said(a_slice, count, format, size, message):
    with pytest.raises(ValueError, match=message):
        picture_bytes([a_slice(1.0)] * count, format, size_mm=size)


def test_drawing_never_imports_pyplot_or_a_window_toolkit():
    code = (
        "import sys, app.figures.draw; print([m for m in sys.modules if 'pyplot' in m or 'PySide' in m or 'Qt' in m])"
    )
    result = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert result.stdout.strip() == "[]"


def test_a_mark_outside_the_axes_is_not_drawn_upon_the_frame(a_profile):
    picture = replace(a_profile(1.0), marks=(Mark(name="", role=Role.CLOUD, x=500.0, y=1e13),))
    _, with_mark = drawn(picture)
    _, without = drawn(replace(picture, marks=()))
    np.testing.assert_array_equal(with_mark, without)
