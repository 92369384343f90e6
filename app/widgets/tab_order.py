"""The keyboard's way through widgets that come and go: from top to bottom, whatever was made first."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import pairwise

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QWidget


def tab_stops(parts: Iterable[QWidget]) -> list[QWidget]:
    """The parts, and what is in them, as far as the Tab key stops there; each part's own in the order of making."""
    found = []
    for part in parts:
        window = part.window()
        inside = (part, *part.findChildren(QWidget))
        # Menus are windows of their own.
        found += [w for w in inside if w.window() is window and w.focusPolicy() & Qt.FocusPolicy.TabFocus]
    return found


def lay_tab_order(parts: Iterable[QWidget]) -> None:
    """Let the Tab key go through these parts in turn."""
    for before, after in pairwise(tab_stops(parts)):
        QWidget.setTabOrder(before, after)
