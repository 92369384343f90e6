"""Some PySide6 releases lose a reference to None in every void call, and abort the process after minutes of use."""

from __future__ import annotations

import sys

from PySide6.QtCore import QObject

CALLS = 20_000


def test_void_calls_into_qt_keep_the_references_to_none(qapp):
    thing = QObject()
    before = sys.getrefcount(None)
    for _ in range(CALLS):
        thing.setObjectName("name")
    lost = before - sys.getrefcount(None)
    assert lost < CALLS // 20, f"{lost} references to None lost in {CALLS} calls"
