"""Random sessions with a whole window: whatever is typed, chosen, dragged, undone and resized, nothing breaks.

Each session is a list of acts drawn from a seed. After every act the window has told of no inner error; at its end the
verdict is that of the plan, undoing all gives the plan of the start back, and redoing all that of the end.
"""

from __future__ import annotations

import os
import random
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QPoint, QPointF, QSize, Qt
from PySide6.QtGui import QGuiApplication, QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QComboBox
from shiboken6 import delete, isValid

from app.engine import cloud_answer
from app.plan import DEFAULT_PLAN, Plan, read_plan
from app.quantities import QUANTITIES
from app.widgets.entry_field import EntryField
from app.widgets.form import Form
from app.widgets.quantity_field import QuantityField
from app.window.main_window import MainWindow
from app.window.pictures import settle
from app.window.settings import Settings, ThemeChoice
from app.window.start import application
from app.words import verdict

LONG = os.environ.get("COLDWARD_LONG") == "1"
BLOCKS = 100 if LONG else 1
SESSIONS = 10  # a block, in one window
ACTS = 15
SEED = 20_270_114

TEXTS = (
    "200 nK", "1.20(5) uK", "3 µK", "4.2 kHz", "30 nK", "1e5", "2.0(3)e6", "500", "120(2) Hz", "2pi x 33 Hz", "7 kHz",
    "20 uK", "100.4 a0", "-20 a0", "155.2 G", "834 G", "0 a0", "0.3", "2.5", "", "1,5 nK", "abc", "1 000", "-1 nK",
    "2.5 W", "40(2) mW", "1.55 um", "60 um", "20 G/cm", "-1 G", "0, 1, 1", "off", "A", "arm 2",
    "1e", "(", "∞ K", "1 furlong", "0", "1e300 K", "99999999999", "１ nK",
)  # fmt: skip
ISOTOPES = ("87Rb", "6Li", "40K", "133Cs", "85Rb", "4He*", "164Dy", "87Sr", "7Li", "88Rb", "", "rb")
KEYS = (
    Qt.Key.Key_Return, Qt.Key.Key_Escape, Qt.Key.Key_Up, Qt.Key.Key_Down, Qt.Key.Key_PageUp, Qt.Key.Key_PageDown,
    Qt.Key.Key_Left, Qt.Key.Key_Right, Qt.Key.Key_Home, Qt.Key.Key_Plus, Qt.Key.Key_Minus, Qt.Key.Key_Tab,
    Qt.Key.Key_Backspace, Qt.Key.Key_Delete,
)  # fmt: skip
COMMANDS = (
    "edit.undo", "edit.redo", "edit.copy", "edit.copy_all", "edit.copy_verdict", "view.map", "view.slices",
    "view.profile", "view.readouts", "view.next_pane", "view.previous_pane", "view.theme_light", "view.theme_dark",
    "view.reset", "plot.home", "plot.zoom_in", "plot.zoom_out", "plot.left", "plot.up", "plot.copy",
)  # fmt: skip


class Session:
    """One random user at one window."""

    def __init__(self, window: MainWindow, seed: str, folder: Path) -> None:
        self.window, self.chance, self.folder = window, random.Random(seed), folder
        self.log: list[str] = []
        self.acts: tuple[Callable[[], str], ...] = (
            self.type, self.type, self.press, self.press, self.command, self.command, self.choose_isotope,
            self.choose, self.drag, self.drag, self.double_click, self.turn_wheel, self.turn_wheel_over_a_field,
            self.resize, self.page_options, self.unit, self.save, self.undo_some, self.make_trap, self.change_parts,
        )  # fmt: skip

    def run(self) -> None:
        for _ in range(ACTS):
            self.log.append(self.chance.choice(self.acts)())
            if self.chance.random() < 0.4:
                settle(self.window)
            else:
                QApplication.processEvents()
            assert "went wrong" not in self.window.banner.text, self.window.banner.text
            assert "cannot be built" not in self.window.banner.text

    # ---------------------------------------------------------------- acts

    @property
    def form(self) -> Form:
        return self.chance.choice(self.window.desk.bench.forms)

    @property
    def field(self) -> QuantityField | EntryField:
        bench = self.window.desk.bench
        fields = [*bench.findChildren(QuantityField), *bench.findChildren(EntryField)]
        return self.chance.choice([field for field in fields if field.isVisible()])

    def type(self) -> str:
        field, text = self.field, self.chance.choice(TEXTS)
        field.setFocus()
        field.selectAll()
        QTest.keyClick(field, Qt.Key.Key_Delete)
        if text.isascii():
            QTest.keyClicks(field, text)
        else:
            field.insert(text)  # as pasted: the test keyboard has no such keys
        if self.chance.random() < 0.6:
            QTest.keyClick(field, Qt.Key.Key_Return)
        return f"type {text!r} into {field.accessibleName()}"

    def press(self) -> str:
        key = self.chance.choice(KEYS)
        modifier = self.chance.choice((Qt.KeyboardModifier.NoModifier, Qt.KeyboardModifier.ShiftModifier))
        count = self.chance.randint(1, 4)
        for _ in range(count):
            QTest.keyClick(QApplication.focusWidget() or self.window, key, modifier)
        return f"press {key.name} {count} times"

    def command(self) -> str:
        name = self.chance.choice(COMMANDS)
        self.window.actions_by_id[name].trigger()
        return name

    def undo_some(self) -> str:
        count = self.chance.randint(1, 6)
        name = self.chance.choice(("edit.undo", "edit.undo", "edit.redo"))
        for _ in range(count):
            self.window.actions_by_id[name].trigger()
        return f"{name} {count} times"

    def choose_isotope(self) -> str:
        text = self.chance.choice(ISOTOPES)
        line = self.window.desk.bench.species.isotope.lineEdit()
        assert line is not None
        line.setFocus()
        line.selectAll()
        QTest.keyClicks(line, text)
        QTest.keyClick(line, Qt.Key.Key_Return)
        popup = QApplication.activePopupWidget()
        if popup is not None:
            popup.close()
        return f"isotope {text!r}"

    def choose(self) -> str:
        box = self.chance.choice(self.form.findChildren(QComboBox) or [self.window.desk.bench.species.state])
        index = self.chance.randrange(box.count())
        box.setCurrentIndex(index)
        box.activated.emit(index)
        return f"choose {box.itemText(index)!r} of {box.accessibleName()}"

    def drag(self) -> str:
        """Press near the cloud, or anywhere, move, and let go."""
        canvas = self.chance.choice(self.window.desk.page.plots).canvas
        picture, modifier = canvas.picture, Qt.KeyboardModifier.NoModifier
        start = self._somewhere(canvas)
        if picture is not None and picture.marks and self.chance.random() < 0.7:
            place = canvas.place_of(picture.marks[0].x, picture.marks[0].y)
            start = QPoint(round(place[0]), round(place[1])) if place is not None else start
        if self.chance.random() < 0.2:
            modifier = Qt.KeyboardModifier.ShiftModifier
        QTest.mousePress(canvas, Qt.MouseButton.LeftButton, modifier, start)
        for _ in range(self.chance.randint(1, 6)):
            QTest.mouseMove(canvas, self._somewhere(canvas))
            QApplication.processEvents()
            if not isValid(canvas):  # what it showed is not wanted any more
                return "drag on a plot that went"
        QTest.mouseRelease(canvas, Qt.MouseButton.LeftButton, modifier, self._somewhere(canvas))
        return "drag"

    def double_click(self) -> str:
        canvas = self.chance.choice(self.window.desk.page.plots).canvas
        QTest.mouseDClick(canvas, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, self._somewhere(canvas))
        return "double click"

    def make_trap(self) -> str:
        """Change over from frequencies to beams and coils, or back."""
        trap = self.window.desk.bench.trap
        button = trap.by_frequencies if trap.by_beams.isChecked() else trap.by_beams
        button.click()
        return f"trap by {button.text()}"

    def change_parts(self) -> str:
        """Press something in the list of beams and coils, if it is there."""
        made = self.window.desk.bench.trap.made
        if made is None or not made.isVisible():
            return "no beams"
        heads = [card.head for card in made.cards] + ([made.coils.head] if made.coils.isVisible() else [])
        head = self.chance.choice(heads) if heads else None
        what = self.chance.randrange(5)
        if what == 0 or head is None:
            self.chance.choice([button for button in (made.add_beam, made.add_coils) if button.isVisible()]).click()
            return "one part more"
        if what == 1 and head.switch.isVisible():
            head.switch.click()
            return f"switch {head.fold.text()}"
        if what == 2:
            action = self.chance.choice([a for a in head.menu.actions() if a.text() and a.isEnabled()])
            action.trigger()
            return f"{action.text()} {head.fold.text()}"
        head.fold.click()
        return f"fold {head.fold.text()}"

    def _somewhere(self, canvas: object) -> QPoint:
        width, height = canvas.width(), canvas.height()  # type: ignore[attr-defined]
        return QPoint(self.chance.randint(-5, width + 5), self.chance.randint(-5, height + 5))

    def turn_wheel(self) -> str:
        canvas = self.chance.choice(self.window.desk.page.plots).canvas
        turn_wheel(canvas, self._somewhere(canvas), self.chance.choice((-360, -120, 120, 360)))
        return "wheel over a plot"

    def turn_wheel_over_a_field(self) -> str:
        field = self.field
        focused, text = field.hasFocus(), field.text()
        turn_wheel(field, field.rect().center(), self.chance.choice((-120, 120)))
        assert focused or field.text() == text
        return f"wheel over {field.accessibleName()}"

    def resize(self) -> str:
        size = QSize(self.chance.randint(640, 1500), self.chance.randint(480, 950))
        self.window.resize(size)
        return f"resize to {size.width()} x {size.height()}"

    def page_options(self) -> str:
        desk = self.window.desk
        match self.chance.randrange(3):
            case 0:
                self.chance.choice(desk.profile.choice.buttons()).click()
                return "axis"
            case 1:
                desk.profile.log.click()
                return "logarithmic"
        desk.slices.choose(tuple(self.chance.sample(sorted(QUANTITIES), self.chance.randint(0, 3))))
        return "quantities of the slices"

    def unit(self) -> str:
        row = self.chance.choice(sorted(QUANTITIES.values(), key=lambda row: row.name))
        unit = self.chance.choice(row.units)
        self.window.desk.readouts.unit_chosen.emit(row.name, unit)
        return f"{row.name} in {unit}"

    def save(self) -> str:
        path = self.folder / "session.toml"
        assert self.window.files._write(path)
        assert read_plan(path) == self.window.document.plan
        return "save"


def expected_verdict(plan: Plan) -> str:
    """What the window says of a plan: its verdict, or why it has none."""
    try:
        return verdict(cloud_answer(plan))
    except ValueError as error:
        return f"Not current: {error}"


def turn_wheel(widget: object, at: QPoint, angle: int) -> None:
    QApplication.sendEvent(
        widget,  # type: ignore[arg-type]
        QWheelEvent(
            QPointF(at), QPointF(at), QPoint(), QPoint(0, angle), Qt.MouseButton.NoButton,
            Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
        ),
    )  # fmt: skip


@pytest.fixture
def window(tmp_path: Path) -> Iterator[MainWindow]:
    application()
    window = MainWindow(Settings(tmp_path / "settings"), size=QSize(1200, 800))
    window.show()
    window.furnish(DEFAULT_PLAN, theme=ThemeChoice.LIGHT)
    window.activateWindow()
    settle(window)
    yield window
    window.document.stack.setClean()
    window.close()
    delete(window)  # at once: windows that pile up make every change of the look slower


@pytest.mark.long
@pytest.mark.timeout(900)
@pytest.mark.qt_no_exception_capture
@pytest.mark.parametrize("block", range(BLOCKS))
def test_no_session_breaks_the_window(block: int, window: MainWindow, tmp_path: Path) -> None:
    document, bench = window.document, window.desk.bench
    troubles: list[str] = []
    tell = window._tell_trouble
    window._tell_trouble = lambda sentence, details: (troubles.append(details), tell(sentence, details))[0]  # type: ignore[method-assign]
    for number in range(SESSIONS):
        document.load(DEFAULT_PLAN, None, None)
        window.banner.hide()
        session = Session(window, f"{SEED}/{block}/{number}", tmp_path)
        try:
            session.run()
            bench.discard_edits()
            bench.set_plan(document.plan)
            settle(window)
            end, steps = document.plan, document.stack.index()
            assert window.desk.verdict.sentence == expected_verdict(end)
            while document.stack.canUndo():
                document.stack.undo()
            assert document.plan == DEFAULT_PLAN
            assert bench.cloud.temperature.text() == DEFAULT_PLAN.cloud.temperature.text
            assert bench.cloud.atoms.text() == DEFAULT_PLAN.cloud.atoms.text
            assert bench.species.isotope.currentText() == "87Rb"
            while document.stack.index() < steps:
                document.stack.redo()
            assert document.plan == end
            settle(window)
            assert window.desk.verdict.sentence == expected_verdict(end)
            assert not troubles, troubles[0]
        except Exception as error:
            where = f"block {block}, session {number}"
            raise AssertionError(f"{where}: {'; '.join(session.log)}\n{error}") from error
    QGuiApplication.clipboard().clear()
