"""The live canvas: what it costs, by counts; what it shows, by pixels; which data are where."""

from __future__ import annotations

from dataclasses import replace
from functools import reduce

import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from PySide6.QtGui import QImage
from PySide6.QtWidgets import QApplication, QStackedWidget

from app.figures.draw import draw_picture
from app.figures.picture import Picture
from app.figures.theme import DARK, LIGHT
from app.window.live_canvas import DPI, LiveCanvas

SIZE = (640, 480)


def pixels(canvas: LiveCanvas) -> np.ndarray:
    return np.asarray(canvas.buffer_rgba())[..., :3].astype(int)


def full_redraw(picture: Picture, size: tuple[int, int], theme, ratio: float = 1.0) -> np.ndarray:
    """The same picture by the drawing that files get, without any of the canvas's short cuts."""
    figure = Figure(figsize=(size[0] / DPI, size[1] / DPI), dpi=DPI * ratio, facecolor=theme.background)
    canvas = FigureCanvasAgg(figure)
    draw_picture(picture, figure.add_axes((0, 0, 1, 1)), theme)
    canvas.draw()
    return np.asarray(canvas.buffer_rgba())[..., :3].astype(int)


def differing(one: np.ndarray, other: np.ndarray) -> float:
    """Share of pixels that differ by more than 8 of 255 in any channel."""
    assert one.shape == other.shape
    return float((np.abs(one - other).max(axis=2) > 8).mean())


def unlike(one: np.ndarray, other: np.ndarray) -> float:
    """Share of pixels of either that differ by more than 8 of 255 from all that the other has within one pixel: texts
    on the screen start at whole pixels, those in files do not."""
    return max(float((_beyond(one, other) > 8).mean()), float((_beyond(other, one) > 8).mean()))


def _beyond(one: np.ndarray, other: np.ndarray) -> np.ndarray:
    assert one.shape == other.shape
    rows, columns = one.shape[:2]
    padded = np.pad(other, ((1, 1), (1, 1), (0, 0)), mode="edge")
    around = [padded[i : i + rows, j : j + columns] for i in range(3) for j in range(3)]
    return np.maximum(reduce(np.minimum, around) - one, one - reduce(np.maximum, around)).max(axis=2)


# ------------------------------------------------------------------ what it costs


def test_many_changes_before_a_paint_are_one_render_of_the_newest(show_canvas, a_slice):
    canvas = show_canvas(a_slice(1.0))
    calls = []
    before = canvas.live_frames
    for strength in np.linspace(1.0, 2.0, 50):
        canvas.show_picture(lambda strength=strength: calls.append(strength) or a_slice(strength))
    QApplication.processEvents()
    QApplication.processEvents()
    assert calls == [2.0]
    assert canvas.live_frames == before + 1


def test_a_hidden_canvas_is_not_rendered_until_it_is_shown(qtbot, a_slice):
    stack = QStackedWidget()
    qtbot.addWidget(stack)
    front, back = LiveCanvas(), LiveCanvas()
    stack.addWidget(front)
    stack.addWidget(back)
    stack.resize(*SIZE)
    stack.show()
    calls = []
    for strength in (1.0, 2.0, 3.0):
        back.show_picture(lambda strength=strength: calls.append(strength) or a_slice(strength))
        QApplication.processEvents()
    assert calls == []
    assert (back.full_draws, back.live_frames, back.renders_hidden) == (0, 0, 0)
    stack.setCurrentWidget(back)
    QApplication.processEvents()
    assert calls == [3.0]
    assert (back.full_draws, back.live_frames, back.renders_hidden) == (1, 1, 0)


def test_painting_again_without_a_change_asks_for_nothing(show_canvas, a_slice):
    canvas = show_canvas(a_slice(1.0))
    counts = canvas.full_draws, canvas.live_frames
    for _ in range(3):
        canvas.repaint()
    assert (canvas.full_draws, canvas.live_frames) == counts


@pytest.mark.parametrize(
    "change",
    [
        lambda p: replace(p, title="another title"),
        lambda p: replace(p, y=replace(p.y, high=2.0 * p.y.high)),
        lambda p: replace(p, curves=(replace(p.curves[0], name="another name"), *p.curves[1:])),
    ],
    ids=["title", "limits", "legend"],
)
def test_a_frame_that_differs_is_drawn_again_once(show_canvas, a_profile, change):
    canvas = show_canvas(a_profile(1.0))
    changed = change(a_profile(1.0))
    for _ in range(3):
        canvas.show_picture(lambda: changed)
        QApplication.processEvents()
    assert canvas.full_draws == 2
    assert unlike(pixels(canvas), full_redraw(changed, SIZE, LIGHT)) < 0.005


# ------------------------------------------------------------------ what it shows


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_a_live_frame_equals_a_full_redraw_of_the_same_state(show_canvas, any_picture, theme):
    canvas = show_canvas(any_picture(1.0), theme=theme)
    for strength in (0.5, 2.0, 1.3):
        picture = any_picture(strength)
        canvas.show_picture(lambda picture=picture: picture)
        QApplication.processEvents()
        live = pixels(canvas).copy()
        assert unlike(live, full_redraw(picture, SIZE, theme)) < 0.005
        canvas.draw_idle()
        QApplication.processEvents()
        assert differing(live, pixels(canvas)) == 0.0
    assert canvas.full_draws == 4
    assert unlike(live, full_redraw(any_picture(0.5), SIZE, theme)) > 0.01  # else nothing above could fail


def test_only_the_cloud_moves_over_an_unchanged_field(show_canvas, a_map):
    ground = a_map(1.0)
    canvas = show_canvas(ground)
    for y in (1e-5, 1e-7, 4e-6):
        picture = replace(ground, marks=(replace(ground.marks[0], y=y),))
        canvas.show_picture(lambda picture=picture: picture)
        QApplication.processEvents()
        assert unlike(pixels(canvas), full_redraw(picture, SIZE, LIGHT)) < 0.005


def test_a_change_of_theme_redraws_in_its_colours(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    canvas.set_theme(DARK)
    canvas.set_theme(DARK)
    QApplication.processEvents()
    assert canvas.full_draws == 2
    assert unlike(pixels(canvas), full_redraw(a_map(1.0), SIZE, DARK)) < 0.005


def test_a_stale_plot_stays_and_says_so_without_a_redraw_of_the_frame(show_canvas, a_profile):
    canvas = show_canvas(a_profile(1.0))
    current = pixels(canvas).copy()
    canvas.set_stale(True, "last good answer")
    QApplication.processEvents()
    changed = np.abs(pixels(canvas) - current).max(axis=2) > 8
    rows = np.nonzero(changed.any(axis=1))[0]
    assert rows.min() > 0
    assert rows.max() < canvas.axes_box()[1]  # in the row of the title, off the data
    canvas.set_stale(False)
    QApplication.processEvents()
    assert differing(pixels(canvas), current) == 0.0
    assert canvas.full_draws == 1
    assert canvas.stale_text is None


def test_the_picture_on_the_screen_is_the_one_in_the_buffer(show_canvas, any_picture):
    canvas = show_canvas(any_picture(1.0))
    canvas.clearFocus()
    image = canvas.grab().toImage().convertToFormat(QImage.Format.Format_RGBX8888)
    ratio = canvas.devicePixelRatioF()
    assert (image.width(), image.height()) == (round(SIZE[0] * ratio), round(SIZE[1] * ratio))
    seen = np.frombuffer(image.constBits(), dtype=np.uint8).reshape(image.height(), image.width(), 4)[..., :3]
    assert differing(seen.astype(int), pixels(canvas)) == 0.0


@pytest.mark.parametrize("ratio", [1.25, 2.0])
def test_another_pixel_ratio_redraws_sharply(show_canvas, any_picture, monkeypatch, ratio):
    canvas = show_canvas(any_picture(1.0))
    monkeypatch.setattr(canvas, "devicePixelRatioF", lambda: ratio)
    canvas.update()
    QApplication.processEvents()
    assert canvas.full_draws == 2
    assert pixels(canvas).shape[:2] == (SIZE[1] * ratio, SIZE[0] * ratio)
    assert unlike(pixels(canvas), full_redraw(any_picture(1.0), SIZE, LIGHT, ratio)) < 0.005
    canvas.show_picture(lambda: any_picture(1.4))
    QApplication.processEvents()
    assert canvas.full_draws == 2
    assert unlike(pixels(canvas), full_redraw(any_picture(1.4), SIZE, LIGHT, ratio)) < 0.005


def test_a_canvas_squeezed_to_nothing_comes_back(show_canvas, any_picture):
    canvas = show_canvas(any_picture(1.0))
    for size in ((0, 0), (300, 0), (0, 300), (1, 1), (9, 9), (40, 400), (400, 40), SIZE):
        canvas.resize(*size)
        canvas.show_picture(lambda: any_picture(1.1))
        QApplication.processEvents()
        canvas.grab()
    assert unlike(pixels(canvas), full_redraw(any_picture(1.1), SIZE, LIGHT)) < 0.005


def test_title_and_summary_are_told_to_screen_readers(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    assert canvas.accessibleName() == "where the cloud stands"
    assert canvas.accessibleDescription() == "The cloud is 1 times as warm."
    canvas.show_picture(lambda: a_map(2.0))
    QApplication.processEvents()
    assert canvas.accessibleDescription() == "The cloud is 2 times as warm."


# ------------------------------------------------------------------ places


def test_data_and_pixels_lead_to_each_other(show_canvas, any_picture):
    canvas = show_canvas(any_picture(1.0))
    left, top, width, height = canvas.axes_box()
    x, y = canvas.data_at(left + 0.3 * width, top + 0.6 * height)
    assert canvas.place_of(x, y) == pytest.approx((left + 0.3 * width, top + 0.6 * height))
    picture = canvas.picture
    assert canvas.place_of(picture.x.low, picture.y.high) == pytest.approx((left, top), abs=1e-9)
    assert canvas.data_at(left - 2.0, top + 5.0) is None
    assert canvas.place_of(np.nan, 1.0) is None
