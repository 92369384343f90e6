"""The main job by keyboard alone: say what the cloud is, read where it stands, move it, take it back, keep it."""

from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QFileDialog
from pytestqt.qtbot import QtBot

from app.plan import read_plan
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
ALT, CONTROL = Qt.KeyboardModifier.AltModifier, Qt.KeyboardModifier.ControlModifier


class Keyboard:
    """Keys, and nothing else; they go where the focus is."""

    def __init__(self, window: MainWindow) -> None:
        self._window = window

    def press(self, key: Qt.Key, modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier) -> None:
        QTest.keyClick(QApplication.focusWidget() or self._window, key, modifier)

    def fill(self, mnemonic: Qt.Key, text: str) -> None:
        """Go to the field with this mnemonic, replace what it says, and press Return."""
        self.press(mnemonic, ALT)
        self.press(Qt.Key.Key_A, CONTROL)
        QTest.keyClicks(QApplication.focusWidget(), text)
        self.press(Qt.Key.Key_Return)


@pytest.fixture
def keys(window: MainWindow, qtbot: QtBot) -> Keyboard:
    window.activateWindow()
    qtbot.waitUntil(window.isActiveWindow)
    window.desk.bench.take_focus()
    return Keyboard(window)


def test_the_main_job_by_keyboard(
    window: MainWindow, keys: Keyboard, settle: Settle, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    desk = window.desk
    # choose a species
    keys.fill(Qt.Key.Key_I, "23Na")
    assert window.document.plan.species.key == "23Na"
    # type frequencies
    for mnemonic, text in ((Qt.Key.Key_X, "200 Hz"), (Qt.Key.Key_Y, "180(5) Hz"), (Qt.Key.Key_Z, "2pi x 25 Hz")):
        keys.fill(mnemonic, text)
    frequencies = window.document.plan.trap.frequencies
    assert [quantity.value for quantity in frequencies] == [200.0, 180.0, 25.0]
    assert frequencies[2].text == "2pi x 25 Hz"
    # type N and T, read the verdict
    keys.fill(Qt.Key.Key_A, "2.0(2)e6")
    keys.fill(Qt.Key.Key_T, "1.5 uK")
    settle(window)
    hot = desk.verdict.sentence
    assert "too hot" in hot
    keys.fill(Qt.Key.Key_T, "100 nK")
    settle(window)
    assert "condensate" in desk.verdict.sentence.lower()
    assert desk.verdict.figures[0].value == "2.61"
    # move the cloud on the map
    keys.press(Qt.Key.Key_1, CONTROL)
    assert QApplication.focusWidget() is desk.map.plot.canvas
    before = window.document.plan
    steps = window.document.stack.index()
    for _ in range(3):
        keys.press(Qt.Key.Key_Up)
        settle(window)
    moved = window.document.plan
    assert moved.cloud.temperature.value > before.cloud.temperature.value
    assert moved.cloud.atoms.value == before.cloud.atoms.value
    # undo
    while window.document.stack.index() > steps:
        keys.press(Qt.Key.Key_Z, CONTROL)
    assert window.document.plan == before
    # save and reopen
    path = tmp_path / "sodium.toml"
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_args: (str(path), ""))
    keys.press(Qt.Key.Key_S, CONTROL)
    assert read_plan(path) == before
    assert not window.isWindowModified()
    assert "sodium.toml" in window.windowTitle()
    keys.press(Qt.Key.Key_N, CONTROL)
    assert window.document.plan.species.key == "87Rb"
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_args: (str(path), ""))
    keys.press(Qt.Key.Key_O, CONTROL)
    settle(window)
    assert window.document.plan == before
    assert "condensate" in desk.verdict.sentence.lower()


def test_typing_in_one_field_is_one_step_and_names_itself(window: MainWindow, keys: Keyboard, settle: Settle) -> None:
    before = window.document.plan
    keys.fill(Qt.Key.Key_T, "1250 nK")
    assert window.document.stack.count() == 1
    assert window.actions_by_id["edit.undo"].text() == "&Undo change of temperature"
    keys.press(Qt.Key.Key_Z, CONTROL)
    assert window.document.plan == before
    assert window.desk.bench.cloud.temperature.text() == before.cloud.temperature.text


def test_an_unknown_isotope_is_told_beside_the_field_with_the_nearest_ones(window: MainWindow, keys: Keyboard) -> None:
    keys.fill(Qt.Key.Key_I, "88Rb")
    assert window.document.plan.species.key == "87Rb"
    assert any("88Rb" in problem and "87Rb" in problem for problem in window.desk.bench.species.problems)
    assert window.desk.verdict.stale
    keys.fill(Qt.Key.Key_I, "85Rb")
    assert window.desk.bench.problems == ()
    assert window.document.plan.species.key == "85Rb"
