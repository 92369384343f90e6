"""A plan whose beams and coils hold nothing: it is shown and kept, and the window says that it has no answer."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.plan import DEFAULT_PLAN, plan_with, read_plan
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
ROOT = Path(__file__).parents[3]
FILE = ROOT / "tests" / "data" / "plan_of_a_trap_that_holds_nothing.toml"
REASON = "the trap of this plan, beams A and cross and coils, holds no atoms: gravity pulls the atoms out"


@pytest.fixture
def plan_file(tmp_path: Path) -> Path:
    path = tmp_path / "beams.toml"
    path.write_bytes(FILE.read_bytes())
    return path


def test_the_plan_is_shown_with_the_reason_and_saved_with_all_that_it_holds(
    window: MainWindow, settle: Settle, plan_file: Path
) -> None:
    window.files.read(plan_file)
    settle(window)
    desk, trap = window.desk, window.desk.bench.trap
    assert window.document.plan == read_plan(FILE)
    assert desk.bench.cloud.atoms.text() == "1.0(1)e5"
    assert [field.text() for field in trap.frequencies] == ["", "", ""]
    assert not any(field.isEnabled() for field in (*trap.frequencies, trap.depth_field))
    assert desk.bench.problems == ()
    assert desk.verdict.sentence.startswith(f"Not current: {REASON}")
    assert desk.readouts.stale
    assert desk.map.plot.canvas.stale_text is not None
    # an edit of the rest of the plan changes that line of the file, and no other
    QTest.keyClick(desk.bench.cloud.atoms, Qt.Key.Key_A, Qt.KeyboardModifier.ControlModifier)
    QTest.keyClicks(desk.bench.cloud.atoms, "3e5")
    settle(window)
    assert desk.verdict.stale
    assert window.files.save()
    assert plan_file.read_text(encoding="utf-8") == FILE.read_text(encoding="utf-8").replace('"1.0(1)e5"', '"3e5"')


def test_a_drag_on_an_older_map_moves_the_cloud_and_nothing_else(
    window: MainWindow, settle: Settle, plan_file: Path
) -> None:
    window.files.read(plan_file)
    settle(window)
    plan = window.document.plan
    window.desk.map.plot.canvas.double_clicked.emit(1e6, 1e-6)
    moved = window.document.plan
    assert moved.cloud.atoms.value == pytest.approx(1e6)
    assert moved == replace(plan, cloud=moved.cloud)
    settle(window)
    for page in window.desk.pages:  # another page in front, and still nothing is current
        window.desk.tabs.setCurrentWidget(page)
        settle(window)
        assert window.desk.verdict.stale
        if page.needs_cloud:  # the others show the trap as it is
            assert all(plot.canvas.stale_text is not None for plot in page.plots if plot.ready)


def test_undo_and_frequencies_bring_the_answer_back(window: MainWindow, settle: Settle, plan_file: Path) -> None:
    made = read_plan(plan_file)
    window.document.edit(made, "trap")
    settle(window)
    assert window.desk.verdict.stale
    window.document.stack.undo()
    settle(window)
    assert not window.desk.verdict.stale
    assert all(field.isEnabled() for field in window.desk.bench.trap.frequencies)
    window.document.stack.redo()
    window.document.edit(plan_with(made, {"trap.frequencies": "90 Hz, 80 Hz, 70 Hz"}), "trap frequencies")
    settle(window)
    assert not window.desk.verdict.stale
    assert [field.text() for field in window.desk.bench.trap.frequencies] == ["90 Hz", "80 Hz", "70 Hz"]


def test_a_field_that_is_mended_leaves_the_reason(window: MainWindow, settle: Settle, plan_file: Path) -> None:
    window.files.read(plan_file)
    settle(window)
    field = window.desk.bench.cloud.temperature
    for text, start in (("hot", "Not current: temperature"), ("1 uK", f"Not current: {REASON}")):
        field.setFocus()
        field.selectAll()
        QTest.keyClicks(field, text)
        QTest.keyClick(field, Qt.Key.Key_Return)
        settle(window)
        assert window.desk.verdict.sentence.startswith(start)


def test_a_window_can_begin_with_such_a_plan(make_window: Callable[..., MainWindow], settle: Settle) -> None:
    window = make_window(read_plan(FILE))
    assert window.desk.verdict.sentence.startswith(f"Not current: {REASON}")
    assert window.banner.text == ""
    for page in window.desk.pages:
        window.desk.tabs.setCurrentWidget(page)
        settle(window)
    dialogs = ("plot.limits", "plot.save", "plot.data")  # of the candidates, which are compared all the same
    ends = ("file.", "help.", "view.theme", *dialogs)  # these open dialogs or close the window
    for name, action in window.actions_by_id.items():
        if not name.startswith(ends) and action.isEnabled():
            action.trigger()
            settle(window)
    window.document.edit(DEFAULT_PLAN, "plan")
    settle(window)
    assert not window.desk.verdict.stale


def test_pictures_of_a_plan_without_an_answer_are_refused(tmp_path: Path) -> None:
    command = [sys.executable, "-m", "app", "window", str(FILE), "--pictures", str(tmp_path / "pictures")]
    command += ["--settings-dir", str(tmp_path / "settings")]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False, timeout=100)
    assert done.returncode == 1
    assert done.stderr.startswith(f"coldward: {REASON}")
    assert done.stderr.count("\n") == 1
