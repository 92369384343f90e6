"""Every action can be reached by keyboard, and no key or mnemonic means two things."""

from collections import Counter

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QAbstractButton, QApplication, QLabel, QMenu, QWidget
from pytestqt.qtbot import QtBot

from app.window.actions import ACTIONS, MenuName, key_sequences
from app.window.dialogs import AboutDialog, glossary_dialog, shortcuts_dialog
from app.window.main_window import MainWindow

STANDARD = {
    "file.new": QKeySequence.StandardKey.New,
    "file.open": QKeySequence.StandardKey.Open,
    "file.save": QKeySequence.StandardKey.Save,
    "edit.undo": QKeySequence.StandardKey.Undo,
    "edit.redo": QKeySequence.StandardKey.Redo,
    "edit.copy": QKeySequence.StandardKey.Copy,
    "plot.zoom_in": QKeySequence.StandardKey.ZoomIn,
    "plot.zoom_out": QKeySequence.StandardKey.ZoomOut,
}


def mnemonic(text: str) -> str:
    place = text.replace("&&", "").find("&")
    return text[place + 1].lower() if place >= 0 else ""


def test_ids_are_unique() -> None:
    assert len({spec.id for spec in ACTIONS}) == len(ACTIONS)


@pytest.mark.parametrize(("name", "key"), STANDARD.items())
def test_standard_keys_are_the_platforms(name: str, key: QKeySequence.StandardKey) -> None:
    spec = next(spec for spec in ACTIONS if spec.id == name)
    assert spec.keys == key


def test_no_two_actions_share_a_shortcut(window: MainWindow) -> None:
    keys = Counter(key.toString() for action in window.actions_by_id.values() for key in action.shortcuts())
    assert [key for key, count in keys.items() if count > 1] == []


def test_every_action_with_keys_in_the_table_has_at_least_one_here(window: MainWindow) -> None:
    for spec in ACTIONS:
        if spec.keys is not None and key_sequences(spec):
            assert window.actions_by_id[spec.id].shortcuts(), spec.id


def test_every_action_is_in_a_menu_with_a_mnemonic_of_its_own(window: MainWindow) -> None:
    menus = [action.menu() for action in window.menuBar().actions()]
    seen = []
    for menu in menus:
        assert isinstance(menu, QMenu)
        letters = [mnemonic(action.text()) for action in menu.actions() if not action.isSeparator()]
        assert "" not in letters, menu.title()
        assert len(set(letters)) == len(letters), menu.title()
        seen += menu.actions()
    assert all(action in seen for action in window.actions_by_id.values())


def test_mnemonics_of_the_window_are_unique(window: MainWindow) -> None:
    letters = [mnemonic(menu.value) for menu in MenuName]
    letters += [mnemonic(label.text()) for label in window.desk.findChildren(QLabel) if label.buddy() is not None]
    assert len(letters) >= 18
    assert "" not in letters
    buttons = window.desk.bench.findChildren(QAbstractButton)
    letters += [letter for button in buttons if (letter := mnemonic(button.text()))]
    assert [letter for letter, count in Counter(letters).items() if count > 1] == []


def test_every_action_tells_what_it_does(window: MainWindow) -> None:
    assert all(spec.tip and window.actions_by_id[spec.id].toolTip() == spec.tip for spec in ACTIONS)


def test_help_lists_every_action_with_its_keys(window: MainWindow) -> None:
    text = shortcuts_dialog(window).browser.toPlainText()
    assert "Ctrl+N, New" not in text  # a key for media
    for spec in ACTIONS:
        assert spec.text.replace("&", "") in text
        for key in key_sequences(spec)[:1]:
            assert key.toString(QKeySequence.SequenceFormat.NativeText) in text


def test_about_names_licences_and_what_the_numbers_are_for(window: MainWindow) -> None:
    text = AboutDialog(window).text.text()
    for words in (
        "BSD-3-Clause",
        "Qt for Python",
        "Lesser General Public License",
        "planning estimates",
        "no hardware",
        "IEC 60825-1 or ANSI Z136.1",
        "0.5 mT",
    ):
        assert words in text


def test_the_glossary_has_every_quantity(window: MainWindow) -> None:
    from app.quantities import QUANTITIES

    text = glossary_dialog(window).browser.toPlainText()
    assert all(row.label in text for row in QUANTITIES.values())


def tab_through(pane: QWidget) -> list[QWidget]:
    """Widgets that Tab visits inside a pane, in order."""
    visited: list[QWidget] = []
    for _ in range(60):
        focus = QApplication.focusWidget()
        if focus is None or not pane.isAncestorOf(focus) or focus in visited:
            break
        visited.append(focus)
        QTest.keyClick(focus, Qt.Key.Key_Tab)
    return visited


def test_tab_order_of_the_bench_follows_its_layout(window: MainWindow, qtbot: QtBot) -> None:
    window.activateWindow()
    qtbot.waitUntil(window.isActiveWindow)
    bench = window.desk.bench
    bench.take_focus()
    visited = tab_through(bench)
    assert len(visited) >= 11
    heights = [widget.mapTo(bench.widget(), QPoint(0, 0)).y() for widget in visited]
    assert heights == sorted(heights)


def test_panes_are_reached_one_after_the_other(window: MainWindow, qtbot: QtBot) -> None:
    window.activateWindow()
    qtbot.waitUntil(window.isActiveWindow)
    desk = window.desk
    desk.bench.take_focus()
    forward = []
    for _ in range(5):
        window.actions_by_id["view.next_pane"].trigger()
        forward.append(QApplication.focusWidget())
    assert forward[:4] == [desk.map.plot.canvas, desk.readouts, desk.detail, desk.caveats]
    assert forward[4] is not None
    assert desk.bench.isAncestorOf(forward[4])
    window.actions_by_id["view.previous_pane"].trigger()
    assert QApplication.focusWidget() is desk.caveats


def test_every_input_and_plot_has_a_name_a_tip_and_help(window: MainWindow) -> None:
    from PySide6.QtWidgets import QComboBox, QLineEdit

    desk = window.desk
    widgets = [w for kind in (QLineEdit, QComboBox) for w in desk.bench.findChildren(kind)]
    widgets = [w for w in widgets if not isinstance(w.parent(), QComboBox)]
    widgets += [plot.canvas for page in desk.pages for plot in page.plots]
    names = [widget.accessibleName() for widget in widgets]
    assert "" not in names
    assert all(widget.toolTip() and widget.whatsThis() for widget in widgets)
    bench_names = [w.accessibleName() for w in widgets if desk.bench.isAncestorOf(w)]
    assert len(set(bench_names)) == len(bench_names)
    assert all(
        button.accessibleName() or button.text() for button in desk.findChildren(QAbstractButton) if button.isVisible()
    )
