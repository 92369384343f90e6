"""What the live canvas tells of mouse, wheel and keys, and that a drag draws no frame anew."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QMouseEvent, QWheelEvent
from PySide6.QtWidgets import QApplication, QStackedWidget, QToolTip

from app.figures.picture import Picture, Role
from app.figures.theme import DARK, LIGHT
from app.window.live_canvas import LiveCanvas

LEFT = Qt.MouseButton.LeftButton
NONE = Qt.KeyboardModifier.NoModifier
SHIFT = Qt.KeyboardModifier.ShiftModifier
CONTROL = Qt.KeyboardModifier.ControlModifier


class Recorder:
    """Keeps what a signal sent."""

    def __init__(self, signal) -> None:
        self.got: list[tuple] = []
        signal.connect(lambda *values: self.got.append(values))


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


# ------------------------------------------------------------------ mouse


def test_a_drag_of_100_steps_redraws_no_frame_and_shows_the_last_value(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
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


def test_dragging_the_mark_tells_where_it_goes_and_where_it_is_left(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    dragged, released, views = map(Recorder, (canvas.mark_dragged, canvas.mark_released, canvas.view_requested))
    start, end = canvas.place_of(1e5, 2e-6), canvas.place_of(1e6, 2e-5)
    drag(canvas, (start[0] + 3.0, start[1] - 2.0), (end[0] + 3.0, end[1] - 2.0))  # held beside its middle: no jump
    assert len(dragged.got) >= 5
    assert dragged.got[-1] == released.got[0] == (0, pytest.approx(1e6, rel=1e-6), pytest.approx(2e-5, rel=1e-6))
    assert len(released.got) == 1
    assert views.got == []


def test_moves_that_arrive_together_are_told_once(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    dragged = Recorder(canvas.mark_dragged)
    x, y = canvas.place_of(1e5, 2e-6)
    press(canvas, x, y)
    for step in range(1, 21):
        move(canvas, x + step, y, LEFT)
    QApplication.processEvents()
    assert len(dragged.got) == 1
    assert dragged.got[0][1] == pytest.approx(canvas.data_at(x + 20, y)[0], rel=1e-9)
    release(canvas, x + 20, y)


def test_a_click_on_the_mark_moves_nothing(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    dragged, released = Recorder(canvas.mark_dragged), Recorder(canvas.mark_released)
    x, y = canvas.place_of(1e5, 2e-6)
    press(canvas, x, y)
    release(canvas, x, y)
    assert dragged.got == released.got == []


def test_a_mark_dragged_off_the_axes_stays_at_their_edge(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    released = Recorder(canvas.mark_released)
    drag(canvas, canvas.place_of(1e5, 2e-6), (-500.0, -500.0))
    assert released.got == [(0, pytest.approx(1e3), pytest.approx(1e-3))]


def test_escape_puts_a_dragged_mark_back(show_canvas, a_map, qtbot):
    canvas = show_canvas(a_map(1.0))
    dragged, released = Recorder(canvas.mark_dragged), Recorder(canvas.mark_released)
    x, y = canvas.place_of(1e5, 2e-6)
    press(canvas, x, y)
    move(canvas, x + 40, y, LEFT)
    QApplication.processEvents()
    qtbot.keyClick(canvas, Qt.Key.Key_Escape)
    release(canvas, x + 40, y)
    assert dragged.got[-1] == released.got[-1] == (0, 1e5, 2e-6)
    assert len(released.got) == 1


def test_a_drag_on_empty_space_moves_the_view_with_the_hand(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    views = Recorder(canvas.view_requested)
    left, top, width, height = canvas.axes_box()
    start = (left + 0.8 * width, top + 0.2 * height)
    drag(canvas, start, (start[0] - 0.2 * width, start[1] + 0.5 * height))
    (view,) = views.got[-1]
    assert view == pytest.approx((1e4, 1e9, 1e-6, 1e-0), rel=1e-6)  # a fifth of 5 decades, half of 6


def test_a_press_that_hardly_moves_is_no_drag(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    views = Recorder(canvas.view_requested)
    drag(canvas, (500.0, 100.0), (502.0, 101.0))
    assert views.got == []


@pytest.mark.parametrize("mode", ["shift", "mode"])
def test_a_box_is_zoomed_into(show_canvas, a_map, mode):
    canvas = show_canvas(a_map(1.0))
    views = Recorder(canvas.view_requested)
    canvas.set_box_zoom(mode == "mode")
    a, b = canvas.place_of(1e6, 1e-4), canvas.place_of(1e7, 1e-5)
    drag(canvas, a, b, modifiers=SHIFT if mode == "shift" else NONE)
    assert len(views.got) == 1
    assert views.got[0][0] == pytest.approx((1e6, 1e7, 1e-5, 1e-4), rel=1e-6)


def test_the_wheel_zooms_about_the_pointer_and_notches_add_up(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
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


def test_the_wheel_beside_an_axis_zooms_that_axis_alone(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    views = Recorder(canvas.view_requested)
    left, top, width, height = canvas.axes_box()
    turn_wheel(canvas, left + 0.5 * width, top + height + 10.0, 1)
    QApplication.processEvents()
    assert views.got[0][0][2:] == (1e-9, 1e-3)
    assert np.ptp(np.log10(views.got[0][0][:2])) == pytest.approx(4.0)


def test_zooming_on_and_on_ends_in_a_view_that_still_shows_something(show_canvas, a_profile):
    canvas = show_canvas(a_profile(1.0))
    views = Recorder(canvas.view_requested)
    for _ in range(200):
        turn_wheel(canvas, 300.0, 200.0, 3)
        QApplication.processEvents()
    for (view,) in views.got:
        assert np.isfinite(view).all()
        assert view[0] < view[1]
        assert view[2] < view[3]


def test_the_pointer_is_told_in_data_and_its_leaving_too(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    places = Recorder(canvas.pointer_moved)
    move(canvas, *canvas.place_of(1e7, 1e-8))
    QApplication.processEvents()
    assert places.got[-1][0] == pytest.approx((1e7, 1e-8), rel=1e-6)
    move(canvas, 2.0, 2.0)
    QApplication.processEvents()
    assert places.got[-1] == (None,)
    QApplication.sendEvent(canvas, QEvent(QEvent.Type.Leave))
    assert places.got[-1] == (None,)


def test_a_double_click_tells_its_place(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
    clicks = Recorder(canvas.double_clicked)
    press(canvas, *canvas.place_of(1e6, 1e-7), QEvent.Type.MouseButtonDblClick)
    press(canvas, 2.0, 2.0, QEvent.Type.MouseButtonDblClick)
    assert clicks.got == [(pytest.approx(1e6, rel=1e-6), pytest.approx(1e-7, rel=1e-6))]


def test_the_pointer_shows_that_the_mark_can_be_dragged(show_canvas, a_map, monkeypatch):
    canvas = show_canvas(a_map(1.0))
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
def test_arrow_keys_move_the_mark_in_small_steps(show_canvas, a_map, qtbot, key, modifiers, atoms, temperature):
    canvas = show_canvas(a_map(1.0))
    dragged, released = Recorder(canvas.mark_dragged), Recorder(canvas.mark_released)
    qtbot.keyClick(canvas, key, modifiers)
    assert dragged.got == released.got == [(0, pytest.approx(atoms, rel=1e-9), pytest.approx(temperature, rel=1e-9))]


def test_a_key_held_down_is_one_move_of_many_steps(show_canvas, a_map, qtbot):
    canvas = show_canvas(a_map(1.0))
    dragged, released = Recorder(canvas.mark_dragged), Recorder(canvas.mark_released)
    for _ in range(5):
        qtbot.keyPress(canvas, Qt.Key.Key_Right)
    qtbot.keyRelease(canvas, Qt.Key.Key_Right)
    assert len(dragged.got) == 5
    assert released.got == [(0, pytest.approx(1e5 * 10**0.05, rel=1e-9), 2e-6)]


def test_arrow_keys_move_the_view_where_nothing_can_be_dragged(show_canvas, a_profile, qtbot):
    canvas = show_canvas(a_profile(1.0))
    views = Recorder(canvas.view_requested)
    qtbot.keyClick(canvas, Qt.Key.Key_Right)
    assert views.got[0][0] == pytest.approx((-80.0, 120.0, 0.0, 4.5e13))


def test_plus_minus_home_and_control_arrows_change_the_view(show_canvas, a_map, qtbot):
    canvas = show_canvas(a_map(1.0))
    views, homes = Recorder(canvas.view_requested), Recorder(canvas.home_requested)
    qtbot.keyClick(canvas, Qt.Key.Key_Plus)
    qtbot.keyClick(canvas, Qt.Key.Key_Minus)
    assert views.got[1][0] == pytest.approx((1e3, 1e8, 1e-9, 1e-3), rel=1e-9)
    qtbot.keyClick(canvas, Qt.Key.Key_Up, CONTROL)
    assert views.got[2][0] == pytest.approx((1e3, 1e8, 10**-8.4, 10**-2.4), rel=1e-9)
    qtbot.keyClick(canvas, Qt.Key.Key_Home)
    assert len(homes.got) == 1


def test_m_chooses_the_next_of_several_marks(show_canvas, a_map, qtbot):
    picture = a_map(1.0)
    other = replace(picture.marks[0], name="other", role=Role.CLOUD, x=1e7, y=1e-5, outline=None)
    canvas = show_canvas(replace(picture, marks=(*picture.marks, other)))
    dragged = Recorder(canvas.mark_dragged)
    qtbot.keyClick(canvas, Qt.Key.Key_M)
    qtbot.keyClick(canvas, Qt.Key.Key_Up)
    qtbot.keyClick(canvas, Qt.Key.Key_M)
    qtbot.keyClick(canvas, Qt.Key.Key_Up)
    assert [values[0] for values in dragged.got] == [1, 0]


def test_keys_that_mean_nothing_here_go_on_to_the_window(show_canvas, a_map, qtbot):
    canvas = show_canvas(a_map(1.0))
    parent = QStackedWidget()
    qtbot.addWidget(parent)
    seen = []
    parent.keyPressEvent = lambda event: seen.append(event.key())
    canvas.setParent(parent)
    for key in (Qt.Key.Key_A, Qt.Key.Key_Escape):
        qtbot.keyClick(canvas, key)
    canvas.setParent(None)
    assert seen == [Qt.Key.Key_A, Qt.Key.Key_Escape]


def test_the_focus_is_seen(show_canvas, a_map):
    canvas = show_canvas(a_map(1.0))
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


def test_a_hint_names_the_keys_over_a_mark_that_can_be_dragged(show_canvas, a_map, monkeypatch):
    from PySide6.QtGui import QHelpEvent

    shown = []
    monkeypatch.setattr(QToolTip, "showText", lambda *arguments: shown.append(arguments[1]))
    canvas = show_canvas(a_map(1.0))
    at = QPoint(*(round(v) for v in canvas.place_of(1e5, 2e-6)))
    QApplication.sendEvent(canvas, QHelpEvent(QEvent.Type.ToolTip, at, canvas.mapToGlobal(at)))
    assert shown == ["Drag to move, or use the arrow keys"]
