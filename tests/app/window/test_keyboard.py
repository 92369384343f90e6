"""The whole window without a mouse: the Tab key comes to every control, and each says what it is and what it does."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import QEvent, QObject, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QAbstractButton,
    QAbstractItemView,
    QApplication,
    QComboBox,
    QHeaderView,
    QLabel,
    QLineEdit,
    QTextEdit,
    QToolButton,
    QWidget,
)
from pytestqt.qtbot import QtBot

from app.candidate_choices import CandidatesChoice
from app.plan import Plan, read_plan
from app.widgets.empty_state import EmptyState
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]

PLANS = Path(__file__).resolve().parents[3] / "presets" / "plans"
FEW = CandidatesChoice(keys=("87Rb", "41K"))
CONTROLS = (QAbstractButton, QComboBox, QLineEdit, QAbstractItemView, QTextEdit)
TITLES = ("Map", "Slices", "Profile", "Trap", "Ramp", "Field", "Collisions", "Models", "Mixture", "Candidates")


@pytest.fixture
def active_window(lasting_window: MainWindow, qtbot: QtBot) -> MainWindow:
    lasting_window.activateWindow()
    qtbot.waitUntil(lasting_window.isActiveWindow)
    return lasting_window


class NewWindows(QObject):
    """Notes what is shown as a window of its own."""

    def __init__(self) -> None:
        super().__init__()
        self.shown: list[str] = []

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if event.type() == QEvent.Type.Show and isinstance(watched, QWidget) and watched.isWindow():
            self.shown.append(type(watched).__name__)
        return False


def test_another_plan_opens_no_window_and_leaves_the_keyboard_where_it_is(
    active_window: MainWindow, settle: Settle
) -> None:
    active_window.desk.bench.take_focus()
    focus, watcher = QApplication.focusWidget(), NewWindows()
    QApplication.instance().installEventFilter(watcher)
    for title in ("Map", "Ramp"):
        active_window.document.edit(plan_for(title), "plan")
        settle(active_window)
    QApplication.instance().removeEventFilter(watcher)
    assert watcher.shown == []
    assert active_window.isActiveWindow()
    assert QApplication.focusWidget() is focus


def plan_for(title: str) -> Plan:
    """One with beams and a passenger; for the ramp one whose trap need not be surveyed at each step."""
    if title == "Ramp":
        return read_plan(PLANS / "evaporation_rubidium.toml")
    return replace(read_plan(PLANS / "sympathetic_potassium.toml"), ramp=(), candidates=FEW)


def controls(window: MainWindow) -> list[QWidget]:
    """All that can be seen and used, with what belongs to a part of its own counted as that part."""
    found = [widget for widget in window.findChildren(QWidget) if isinstance(widget, CONTROLS)]
    return [
        widget
        for widget in found
        if widget.isVisible()
        and widget.isEnabled()
        and not isinstance(widget, QHeaderView)
        and not isinstance(widget.parentWidget(), QComboBox)
        and not widget.objectName().startswith("qt_")
    ]


def walk(window: MainWindow) -> list[QWidget]:
    """What the Tab key comes to, from the first field of the bench until it is back at one of them."""
    window.desk.bench.take_focus()
    seen: list[QWidget] = []
    while (focus := QApplication.focusWidget()) is not None and focus not in seen:
        seen.append(focus)
        QTest.keyClick(focus, Qt.Key.Key_Tab)
        assert len(seen) < 300
    return seen


def in_group(widget: QWidget) -> bool:
    """Whether the arrow keys come to it from another button of its group."""
    if not isinstance(widget, QAbstractButton):
        return False
    group = widget.group()
    return widget.autoExclusive() or (group is not None and group.exclusive())


def spoken(window: MainWindow, widget: QWidget) -> str:
    """What a screen reader calls it."""
    text = widget.text() if isinstance(widget, QAbstractButton) else ""
    labels = [label.text() for label in window.findChildren(QLabel) if label.buddy() is widget]
    return widget.accessibleName() or text or "".join(labels)


@pytest.mark.parametrize("title", TITLES)
def test_the_tab_key_comes_to_every_control_of_a_page(active_window: MainWindow, settle: Settle, title: str) -> None:
    window = active_window
    window.document.edit(plan_for(title), "plan")
    settle(window)
    for button in window.desk.bench.findChildren(QToolButton):
        if button.isCheckable() and not button.isChecked() and button.isVisible():
            button.click()
    window.desk.show_page(TITLES.index(title))
    settle(window)
    seen = walk(window)
    missed = [spoken(window, widget) for widget in controls(window) if widget not in seen and not in_group(widget)]
    assert missed == []
    nameless = [type(widget).__name__ for widget in seen if not spoken(window, widget)]
    assert nameless == []
    # Offers of an empty page stand under the sentence that they answer.
    offers = [button for empty in window.findChildren(EmptyState) for button in empty.buttons()]
    unexplained = [
        spoken(window, widget)
        for widget in controls(window)
        if not widget.toolTip() and widget not in offers and not isinstance(widget, QAbstractItemView | QTextEdit)
    ]
    assert unexplained == []


def test_arrow_keys_go_through_the_views_of_the_ramp(active_window: MainWindow, settle: Settle) -> None:
    page = active_window.desk.ramp
    active_window.document.edit(plan_for(page.title), "plan")
    active_window.desk.tabs.setCurrentWidget(page)
    settle(active_window)
    first = page.panel.choice.button(0)
    first.click()
    first.setFocus()
    QTest.keyClick(first, Qt.Key.Key_Right)
    settle(active_window)
    assert page.panel.view == list(page.panel.views)[1]
    assert QApplication.focusWidget() is page.panel.choice.button(1)
    page.panel.choose_view(next(iter(page.panel.views)))
