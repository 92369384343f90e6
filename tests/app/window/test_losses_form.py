"""The Losses form: folded while nothing is given, filled by the plan, and its edits reach rates and caveats."""

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.kinds import LIFETIME
from app.plan import DEFAULT_PLAN, plan_with
from app.units import read_quantity
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
MakeWindow = Callable[..., MainWindow]


def test_it_is_folded_and_unfolds_by_its_title(window: MainWindow) -> None:
    form = window.desk.bench.losses
    assert not form.unfolded
    assert not form.background.isVisible()
    QTest.keyClick(form.fold, Qt.Key.Key_Space)
    assert form.unfolded
    assert form.background.isVisible()
    assert form.fold.accessibleName() == "Losses, unfolded"
    QTest.keyClick(form.fold, Qt.Key.Key_Space)
    assert not form.background.isVisible()


def test_a_plan_with_losses_opens_it_and_empty_fields_show_the_data(make_window: MakeWindow) -> None:
    form = make_window(plan_with(DEFAULT_PLAN, {"losses.background_lifetime": "60 s"})).desk.bench.losses
    assert form.unfolded
    assert form.background.text() == "60 s"
    assert form.three_body.placeholderText().endswith("(recalled)")
    assert form.two_body.placeholderText() == "not known"


def test_what_is_typed_reaches_plan_and_answer(window: MainWindow, settle: Settle) -> None:
    form = window.desk.bench.losses
    form.set_unfolded(True)
    QTest.keyClicks(form.background, "40 s")
    QTest.keyClick(form.background, Qt.Key.Key_Return)
    settle(window)
    assert window.document.plan.losses.background_lifetime == read_quantity("40 s", LIFETIME)
    assert window.answers.cloud is not None
    assert float(window.answers.cloud.value("background_lifetime")) == 40.0  # type: ignore[arg-type]
    assert "no_background_lifetime" not in {caveat.id for caveat in window.answers.cloud.caveats}
    window.document.stack.undo()
    assert window.document.plan.losses.background_lifetime is None
