"""The live canvas: what it costs, by counts; what it shows, by pixels; what it tells of mouse, wheel and keys."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import reduce

import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QImage, QMouseEvent, QWheelEvent
from PySide6.QtWidgets import QApplication, QStackedWidget, QToolTip

from app.figures.draw import draw_picture
from app.figures.picture import Picture, Role
from app.figures.theme import DARK, LIGHT
from app.window.live_canvas import DPI, LiveCanvas

LEFT = Qt.MouseButton.LeftButton
NONE = Qt.KeyboardModifier.NoModifier
SHIFT = Qt.KeyboardModifier.ShiftModifier
CONTROL = Qt.KeyboardModifier.ControlModifier
SIZE = (640, 480)


@pytest.fixture
def show(qtbot) -> Callable[..., LiveCanvas]:
    """Makes a canvas that shows a picture and has been painted."""

    def shown(picture: Picture, *, theme=LIGHT, size=SIZE) -> LiveCanvas:
        canvas = LiveCanvas(theme=theme)
        qtbot.addWidget(canvas)
        canvas.resize(*size)
        canvas.show_picture(lambda: picture)
        canvas.show()
        QApplication.processEvents()
        return canvas

    return shown


class Recorder:
    """Keeps what a signal sent."""

    def __init__(self, signal) -> None:
        self.got: list[tuple] = []
        signal.connect(lambda *values: self.got.append(values))


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


def move(canvas: LiveCanvas, x: float, y: float, buttons=Qt.MouseButton.NoButton, modifiers=NONE) -> None:
    at = QPointF(x, y)
    event = QMouseEvent(QEvent.Type.MouseMove, at, canvas.mapToGlobal(at), Qt.MouseButton.NoButton, buttons, modifiers)
    QApplication.sendEvent(canvas, event)


def press(canvas: LiveCanvas, x: float, y: float, kind=QEvent.Type.MouseButtonPress, modifiers=NONE) -> None:
    at = QPointF(x, y)
    held = Qt.MouseButton.NoButton if kind is QEvent.Type.MouseButtonRelease else LEFT
    QApplication.sendEvent(canvas, QMouseEvent(kind, at, canvas.mapToGlobal(at), LEFT, held, modifiers))


def release(canvas: LiveCanvas, x: float, y: float) -> None:
    press(canvas, x, y, QEvent.Type.MouseButtonRelease)


def turn_wheel(canvas: LiveCanvas, x: float, y: float, notches: int) -> None:
    at = QPointF(x, y)
    event = QWheelEvent(at, canvas.mapToGlobal(at), QPoint(), QPoint(0, 120 * notches), Qt.MouseButton.NoButton, NONE,
                        Qt.ScrollPhase.NoScrollPhase, False)  # fmt: skip
    QApplication.sendEvent(canvas, event)


def drag(
    canvas: LiveCanvas, start: tuple[float, float], end: tuple[float, float], steps: int = 5, modifiers=NONE
) -> None:
    press(canvas, *start, modifiers=modifiers)
    for step in range(1, steps + 1):
        share = step / steps
        move(canvas, start[0] + share * (end[0] - start[0]), start[1] + share * (end[1] - start[1]), LEFT, modifiers)
        QApplication.processEvents()
    release(canvas, *end)
    QApplication.processEvents()


# ------------------------------------------------------------------ what it costs


def test_a_drag_of_100_steps_redraws_no_frame_and_shows_the_last_value(show, a_map):
    canvas = show(a_map(1.0))
    frames, calls, place = canvas.full_draws, [], [1.0]

    def source() -> Picture:
        calls.append(place[0])
        return a_map(place[0])

    def follow(_mark: int, _x: float, y: float) -> None:
        place[0] = y / 2e-6
        canvas.show_picture(source)

    canvas.mark_dragged.connect(follow)
    x, y = canvas.place_of(1e5, 2e-6)
    live = canvas.live_frames
    drag(canvas, (x, y), (x, y - 100.0), steps=100)
    assert canvas.full_draws == frames
    assert 50 <= canvas.live_frames - live <= 101
    assert canvas.live_frames - live == len(calls)
    assert calls[-1] == place[0] == pytest.approx(canvas.picture.marks[0].y / 2e-6)
    assert canvas.place_of(1e5, canvas.picture.marks[0].y)[1] == pytest.approx(y - 100.0, abs=0.01)


def test_many_changes_before_a_paint_are_one_render_of_the_newest(show, a_slice):
    canvas = show(a_slice(1.0))
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


def test_painting_again_without_a_change_asks_for_nothing(show, a_slice):
    canvas = show(a_slice(1.0))
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
def test_a_frame_that_differs_is_drawn_again_once(show, a_profile, change):
    canvas = show(a_profile(1.0))
    changed = change(a_profile(1.0))
    for _ in range(3):
        canvas.show_picture(lambda: changed)
        QApplication.processEvents()
    assert canvas.full_draws == 2
    assert unlike(pixels(canvas), full_redraw(changed, SIZE, LIGHT)) < 0.005


# ------------------------------------------------------------------ what it shows


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_a_live_frame_equals_a_full_redraw_of_the_same_state(show, any_picture, theme):
    canvas = show(any_picture(1.0), theme=theme)
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


def test_only_the_cloud_moves_over_an_unchanged_field(show, a_map):
    ground = a_map(1.0)
    canvas = show(ground)
    for y in (1e-5, 1e-7, 4e-6):
        picture = replace(ground, marks=(replace(ground.marks[0], y=y),))
        canvas.show_picture(lambda picture=picture: picture)
        QApplication.processEvents()
        assert unlike(pixels(canvas), full_redraw(picture, SIZE, LIGHT)) < 0.005


def test_a_change_of_theme_redraws_in_its_colours(show, a_map):
    canvas = show(a_map(1.0))
    canvas.set_theme(DARK)
    canvas.set_theme(DARK)
    QApplication.processEvents()
    assert canvas.full_draws == 2
    assert unlike(pixels(canvas), full_redraw(a_map(1.0), SIZE, DARK)) < 0.005


def test_a_stale_plot_stays_and_says_so_without_a_redraw_of_the_frame(show, a_profile):
    canvas = show(a_profile(1.0))
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


def test_the_picture_on_the_screen_is_the_one_in_the_buffer(show, any_picture):
    canvas = show(any_picture(1.0))
    canvas.clearFocus()
    image = canvas.grab().toImage().convertToFormat(QImage.Format.Format_RGBX8888)
    ratio = canvas.devicePixelRatioF()
    assert (image.width(), image.height()) == (round(SIZE[0] * ratio), round(SIZE[1] * ratio))
    seen = np.frombuffer(image.constBits(), dtype=np.uint8).reshape(image.height(), image.width(), 4)[..., :3]
    assert differing(seen.astype(int), pixels(canvas)) == 0.0


@pytest.mark.parametrize("ratio", [1.25, 2.0])
def test_another_pixel_ratio_redraws_sharply(show, any_picture, monkeypatch, ratio):
    canvas = show(any_picture(1.0))
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


def test_a_canvas_squeezed_to_nothing_comes_back(show, any_picture):
    canvas = show(any_picture(1.0))
    for size in ((0, 0), (300, 0), (0, 300), (1, 1), (9, 9), (40, 400), (400, 40), SIZE):
        canvas.resize(*size)
        canvas.show_picture(lambda: any_picture(1.1))
        QApplication.processEvents()
        canvas.grab()
    assert unlike(pixels(canvas), full_redraw(any_picture(1.1), SIZE, LIGHT)) < 0.005


def test_a_canvas_without_a_picture_shows_its_background(qtbot):
    canvas = LiveCanvas(theme=DARK)
    qtbot.addWidget(canvas)
    canvas.resize(100, 80)
    canvas.show()
    assert canvas.grab().toImage().pixelColor(50, 40).name() == DARK.background
    press(canvas, 50, 40)
    move(canvas, 60, 40, LEFT)
    turn_wheel(canvas, 50, 40, 1)
    release(canvas, 60, 40)
    QApplication.processEvents()
    assert canvas.place_of(1.0, 1.0) is None
    assert canvas.data_at(50, 40) is None


def test_title_and_summary_are_told_to_screen_readers(show, a_map):
    canvas = show(a_map(1.0))
    assert canvas.accessibleName() == "where the cloud stands"
    assert canvas.accessibleDescription() == "The cloud is 1 times as warm."
    canvas.show_picture(lambda: a_map(2.0))
    QApplication.processEvents()
    assert canvas.accessibleDescription() == "The cloud is 2 times as warm."


# ------------------------------------------------------------------ places


def test_data_and_pixels_lead_to_each_other(show, any_picture):
    canvas = show(any_picture(1.0))
    left, top, width, height = canvas.axes_box()
    x, y = canvas.data_at(left + 0.3 * width, top + 0.6 * height)
    assert canvas.place_of(x, y) == pytest.approx((left + 0.3 * width, top + 0.6 * height))
    picture = canvas.picture
    assert canvas.place_of(picture.x.low, picture.y.high) == pytest.approx((left, top), abs=1e-9)
    assert canvas.data_at(left - 2.0, top + 5.0) is None
    assert canvas.place_of(np.nan, 1.0) is None


# ------------------------------------------------------------------ mouse


def test_dragging_the_mark_tells_where_it_goes_and_where_it_is_left(show, a_map):
    canvas = show(a_map(1.0))
    dragged, released, views = map(Recorder, (canvas.mark_dragged, canvas.mark_released, canvas.view_requested))
    start, end = canvas.place_of(1e5, 2e-6), canvas.place_of(1e6, 2e-5)
    drag(canvas, (start[0] + 3.0, start[1] - 2.0), (end[0] + 3.0, end[1] - 2.0))  # held beside its middle: no jump
    assert len(dragged.got) >= 5
    assert dragged.got[-1] == released.got[0] == (0, pytest.approx(1e6, rel=1e-6), pytest.approx(2e-5, rel=1e-6))
    assert len(released.got) == 1
    assert views.got == []


def test_moves_that_arrive_together_are_told_once(show, a_map):
    canvas = show(a_map(1.0))
    dragged = Recorder(canvas.mark_dragged)
    x, y = canvas.place_of(1e5, 2e-6)
    press(canvas, x, y)
    for step in range(1, 21):
        move(canvas, x + step, y, LEFT)
    QApplication.processEvents()
    assert len(dragged.got) == 1
    assert dragged.got[0][1] == pytest.approx(canvas.data_at(x + 20, y)[0], rel=1e-9)
    release(canvas, x + 20, y)


def test_a_click_on_the_mark_moves_nothing(show, a_map):
    canvas = show(a_map(1.0))
    dragged, released = Recorder(canvas.mark_dragged), Recorder(canvas.mark_released)
    x, y = canvas.place_of(1e5, 2e-6)
    press(canvas, x, y)
    release(canvas, x, y)
    assert dragged.got == released.got == []


def test_a_mark_dragged_off_the_axes_stays_at_their_edge(show, a_map):
    canvas = show(a_map(1.0))
    released = Recorder(canvas.mark_released)
    drag(canvas, canvas.place_of(1e5, 2e-6), (-500.0, -500.0))
    assert released.got == [(0, pytest.approx(1e3), pytest.approx(1e-3))]


def test_escape_puts_a_dragged_mark_back(show, a_map, qtbot):
    canvas = show(a_map(1.0))
    dragged, released = Recorder(canvas.mark_dragged), Recorder(canvas.mark_released)
    x, y = canvas.place_of(1e5, 2e-6)
    press(canvas, x, y)
    move(canvas, x + 40, y, LEFT)
    QApplication.processEvents()
    qtbot.keyClick(canvas, Qt.Key.Key_Escape)
    release(canvas, x + 40, y)
    assert dragged.got[-1] == released.got[-1] == (0, 1e5, 2e-6)
    assert len(released.got) == 1


def test_a_drag_on_empty_space_moves_the_view_with_the_hand(show, a_map):
    canvas = show(a_map(1.0))
    views = Recorder(canvas.view_requested)
    left, top, width, height = canvas.axes_box()
    start = (left + 0.8 * width, top + 0.2 * height)
    drag(canvas, start, (start[0] - 0.2 * width, start[1] + 0.5 * height))
    (view,) = views.got[-1]
    assert view == pytest.approx((1e4, 1e9, 1e-6, 1e-0), rel=1e-6)  # a fifth of 5 decades, half of 6


def test_a_press_that_hardly_moves_is_no_drag(show, a_map):
    canvas = show(a_map(1.0))
    views = Recorder(canvas.view_requested)
    drag(canvas, (500.0, 100.0), (502.0, 101.0))
    assert views.got == []


@pytest.mark.parametrize("mode", ["shift", "mode"])
def test_a_box_is_zoomed_into(show, a_map, mode):
    canvas = show(a_map(1.0))
    views = Recorder(canvas.view_requested)
    canvas.set_box_zoom(mode == "mode")
    a, b = canvas.place_of(1e6, 1e-4), canvas.place_of(1e7, 1e-5)
    drag(canvas, a, b, modifiers=SHIFT if mode == "shift" else NONE)
    assert len(views.got) == 1
    assert views.got[0][0] == pytest.approx((1e6, 1e7, 1e-5, 1e-4), rel=1e-6)


def test_the_wheel_zooms_about_the_pointer_and_notches_add_up(show, a_map):
    canvas = show(a_map(1.0))
    views = Recorder(canvas.view_requested)
    x, y = canvas.place_of(1e4, 1e-8)
    turn_wheel(canvas, x, y, 1)
    turn_wheel(canvas, x, y, 1)
    QApplication.processEvents()
    assert len(views.got) == 1
    (view,) = views.got[0]
    # two notches of 0.8: the point, a fifth along x and a sixth along y, stays where it is
    decades = np.log10(view)
    assert decades[1] - decades[0] == pytest.approx(5 * 0.64)
    assert decades[0] == pytest.approx(4 - 0.64)
    assert decades[3] - decades[2] == pytest.approx(6 * 0.64)
    assert decades[2] == pytest.approx(-8 - 0.64)
    turn_wheel(canvas, x, y, 1)  # before the page has answered: goes on from what was asked for
    QApplication.processEvents()
    decades = np.log10(views.got[1][0])
    assert decades[1] - decades[0] == pytest.approx(5 * 0.512)


def test_the_wheel_beside_an_axis_zooms_that_axis_alone(show, a_map):
    canvas = show(a_map(1.0))
    views = Recorder(canvas.view_requested)
    left, top, width, height = canvas.axes_box()
    turn_wheel(canvas, left + 0.5 * width, top + height + 10.0, 1)
    QApplication.processEvents()
    assert views.got[0][0][2:] == (1e-9, 1e-3)
    assert np.ptp(np.log10(views.got[0][0][:2])) == pytest.approx(4.0)


def test_zooming_on_and_on_ends_in_a_view_that_still_shows_something(show, a_profile):
    canvas = show(a_profile(1.0))
    views = Recorder(canvas.view_requested)
    for _ in range(200):
        turn_wheel(canvas, 300.0, 200.0, 3)
        QApplication.processEvents()
    for (view,) in views.got:
        assert np.isfinite(view).all()
        assert view[0] < view[1]
        assert view[2] < view[3]


def test_the_pointer_is_told_in_data_and_its_leaving_too(show, a_map):
    canvas = show(a_map(1.0))
    places = Recorder(canvas.pointer_moved)
    move(canvas, *canvas.place_of(1e7, 1e-8))
    QApplication.processEvents()
    assert places.got[-1][0] == pytest.approx((1e7, 1e-8), rel=1e-6)
    move(canvas, 2.0, 2.0)
    QApplication.processEvents()
    assert places.got[-1] == (None,)
    QApplication.sendEvent(canvas, QEvent(QEvent.Type.Leave))
    assert places.got[-1] == (None,)


def test_a_double_click_tells_its_place(show, a_map):
    canvas = show(a_map(1.0))
    clicks = Recorder(canvas.double_clicked)
    press(canvas, *canvas.place_of(1e6, 1e-7), QEvent.Type.MouseButtonDblClick)
    press(canvas, 2.0, 2.0, QEvent.Type.MouseButtonDblClick)
    assert clicks.got == [(pytest.approx(1e6, rel=1e-6), pytest.approx(1e-7, rel=1e-6))]


def test_the_pointer_shows_that_the_mark_can_be_dragged(show, a_map, monkeypatch):
    canvas = show(a_map(1.0))
    x, y = canvas.place_of(1e5, 2e-6)
    move(canvas, x, y)
    QApplication.processEvents()
    assert canvas.cursor().shape() is Qt.CursorShape.OpenHandCursor
    press(canvas, x, y)
    assert canvas.cursor().shape() is Qt.CursorShape.ClosedHandCursor
    release(canvas, x, y)
    move(canvas, x + 60, y)
    QApplication.processEvents()
    assert canvas.cursor().shape() is Qt.CursorShape.ArrowCursor
    canvas.set_box_zoom(True)
    assert canvas.cursor().shape() is Qt.CursorShape.CrossCursor


# ------------------------------------------------------------------ keys


@pytest.mark.parametrize(
    ("key", "modifiers", "atoms", "temperature"),
    [
        (Qt.Key.Key_Right, NONE, 1e5 * 10**0.01, 2e-6),
        (Qt.Key.Key_Left, SHIFT, 1e5 * 10**-0.1, 2e-6),
        (Qt.Key.Key_Up, NONE, 1e5, 2e-6 * 10**0.01),
        (Qt.Key.Key_Down, SHIFT, 1e5, 2e-6 * 10**-0.1),
    ],
)
def test_arrow_keys_move_the_mark_in_small_steps(show, a_map, qtbot, key, modifiers, atoms, temperature):
    canvas = show(a_map(1.0))
    dragged, released = Recorder(canvas.mark_dragged), Recorder(canvas.mark_released)
    qtbot.keyClick(canvas, key, modifiers)
    assert dragged.got == released.got == [(0, pytest.approx(atoms, rel=1e-9), pytest.approx(temperature, rel=1e-9))]


def test_a_key_held_down_is_one_move_of_many_steps(show, a_map, qtbot):
    canvas = show(a_map(1.0))
    dragged, released = Recorder(canvas.mark_dragged), Recorder(canvas.mark_released)
    for _ in range(5):
        qtbot.keyPress(canvas, Qt.Key.Key_Right)
    qtbot.keyRelease(canvas, Qt.Key.Key_Right)
    assert len(dragged.got) == 5
    assert released.got == [(0, pytest.approx(1e5 * 10**0.05, rel=1e-9), 2e-6)]


def test_arrow_keys_move_the_view_where_nothing_can_be_dragged(show, a_profile, qtbot):
    canvas = show(a_profile(1.0))
    views = Recorder(canvas.view_requested)
    qtbot.keyClick(canvas, Qt.Key.Key_Right)
    assert views.got[0][0] == pytest.approx((-80.0, 120.0, 0.0, 4.5e13))


def test_plus_minus_home_and_control_arrows_change_the_view(show, a_map, qtbot):
    canvas = show(a_map(1.0))
    views, homes = Recorder(canvas.view_requested), Recorder(canvas.home_requested)
    qtbot.keyClick(canvas, Qt.Key.Key_Plus)
    qtbot.keyClick(canvas, Qt.Key.Key_Minus)
    assert views.got[1][0] == pytest.approx((1e3, 1e8, 1e-9, 1e-3), rel=1e-9)
    qtbot.keyClick(canvas, Qt.Key.Key_Up, CONTROL)
    assert views.got[2][0] == pytest.approx((1e3, 1e8, 10**-8.4, 10**-2.4), rel=1e-9)
    qtbot.keyClick(canvas, Qt.Key.Key_Home)
    assert len(homes.got) == 1


def test_m_chooses_the_next_of_several_marks(show, a_map, qtbot):
    picture = a_map(1.0)
    other = replace(picture.marks[0], name="other", role=Role.CLOUD, x=1e7, y=1e-5, outline=None)
    canvas = show(replace(picture, marks=(*picture.marks, other)))
    dragged = Recorder(canvas.mark_dragged)
    qtbot.keyClick(canvas, Qt.Key.Key_M)
    qtbot.keyClick(canvas, Qt.Key.Key_Up)
    qtbot.keyClick(canvas, Qt.Key.Key_M)
    qtbot.keyClick(canvas, Qt.Key.Key_Up)
    assert [values[0] for values in dragged.got] == [1, 0]


def test_keys_that_mean_nothing_here_go_on_to_the_window(show, a_map, qtbot):
    canvas = show(a_map(1.0))
    parent = QStackedWidget()
    qtbot.addWidget(parent)
    seen = []
    parent.keyPressEvent = lambda event: seen.append(event.key())
    canvas.setParent(parent)
    for key in (Qt.Key.Key_A, Qt.Key.Key_Escape):
        qtbot.keyClick(canvas, key)
    canvas.setParent(None)
    assert seen == [Qt.Key.Key_A, Qt.Key.Key_Escape]


def test_the_focus_is_seen(show, a_map):
    canvas = show(a_map(1.0))
    canvas.window().activateWindow()
    canvas.setFocus()
    QApplication.processEvents()
    assert canvas.hasFocus()
    focused = canvas.grab().toImage()
    canvas.clearFocus()
    plain = canvas.grab().toImage()
    assert focused.pixelColor(1, 1).name() == LIGHT.accent
    assert plain.pixelColor(1, 1).name() == LIGHT.background
    x, y = canvas.place_of(1e5, 2e-6)
    ring = QPoint(round(x - 10), round(y))
    assert focused.pixelColor(ring) != plain.pixelColor(ring)


def test_a_hint_names_the_keys_over_a_mark_that_can_be_dragged(show, a_map, monkeypatch):
    from PySide6.QtGui import QHelpEvent

    shown = []
    monkeypatch.setattr(QToolTip, "showText", lambda *arguments: shown.append(arguments[1]))
    canvas = show(a_map(1.0))
    at = QPoint(*(round(v) for v in canvas.place_of(1e5, 2e-6)))
    QApplication.sendEvent(canvas, QHelpEvent(QEvent.Type.ToolTip, at, canvas.mapToGlobal(at)))
    assert shown == ["Drag to move, or use the arrow keys"]
